#pragma once

#include <string>

#include <trotline/analysis/result.hpp>

namespace trotline {

/// The name that `schema` holds in every document; it changes when a key changes its meaning or goes.
inline constexpr const char* kResultSchema = "trotline-result-1";

/// A result as one JSON document, indented by two spaces and ending in '\n'; docs/result.schema.json states
/// every key. Numbers are written with the fewest digits that read back to the same double; what is not
/// known (NaN) or has no bound is null. Bytes that are not UTF-8 become U+FFFD. The same result gives the
/// same bytes.
[[nodiscard]] std::string result_json(const Result& result);

}  // namespace trotline
