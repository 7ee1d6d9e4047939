#pragma once

#include <string>
#include <string_view>

#include <trotline/analysis/result.hpp>

namespace trotline {

/// The document of result_json() on one line, without spaces and without '\n' at its end.
[[nodiscard]] std::string result_json_line(const Result& result);

/// The result that result_json() or result_json_line() wrote: writing it again gives the same bytes. Keys
/// that are not known are passed over, keys that are missing leave their default.
/// @throws InputError  when `json` is no document of the schema kResultSchema
[[nodiscard]] Result parse_result_json(std::string_view json);

}  // namespace trotline
