// How numbers and texts of a result are worded on the page.
#pragma once

#include <string>
#include <vector>

#include <trotline/analysis/result.hpp>

namespace trotline::page {

/// Text from outside, safe to show; the templates escape it for HTML.
[[nodiscard]] std::string words(const std::string& text);

/// "62.3 ± 3.1", or nothing where not known.
[[nodiscard]] std::string with_error(const Estimate& estimate);

/// "59.3 … 65.5"
[[nodiscard]] std::string interval68(const Estimate& estimate);

/// "12.3/9"
[[nodiscard]] std::string chi_squared(const Result& result);

[[nodiscard]] std::size_t fitted_lines(const Result& result);
[[nodiscard]] std::size_t failed_checks(const Result& result);

/// A number for sorting: nine digits, or nothing where not known.
[[nodiscard]] std::string key(double value);

/// The value below which a share of the sorted numbers lies; NaN for none.
[[nodiscard]] double quantile(const std::vector<double>& sorted, double share);

}  // namespace trotline::page
