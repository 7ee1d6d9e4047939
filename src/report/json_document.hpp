// The JSON document of a result before it is text: shared by the writers of this room.
#pragma once

#include <nlohmann/json.hpp>

#include <trotline/analysis/result.hpp>

namespace trotline {

using Json = nlohmann::ordered_json;  // keeps the keys in the order of the contract

[[nodiscard]] Json result_document(const Result& result);

}  // namespace trotline
