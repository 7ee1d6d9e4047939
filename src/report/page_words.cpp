#include "page_words.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include <trotline/report/display_text.hpp>
#include <trotline/report/page.hpp>
#include <trotline/report/rounding.hpp>

namespace trotline::page {

std::string words(const std::string& text) {
  constexpr std::size_t kMost = 600;  // columns: one text must not fill the page
  const std::string shown = display_text(text);
  return shown.size() <= kMost ? shown : shortened(shown, kMost);
}

std::string with_error(const Estimate& estimate) {
  if (!std::isfinite(estimate.value)) return {};
  return value_with_error(estimate.value, estimate.error);
}

std::string interval68(const Estimate& estimate) {
  if (!std::isfinite(estimate.low68) && !std::isfinite(estimate.high68)) return {};
  return rounded_interval(estimate.low68, estimate.high68, estimate.error);
}

std::string chi_squared(const Result& result) {
  if (!std::isfinite(result.chi2)) return {};
  return fmt::format("{}/{}", fixed_decimals(result.chi2, 1), result.dof);
}

std::size_t fitted_lines(const Result& result) {
  return static_cast<std::size_t>(
      std::count_if(result.lines.begin(), result.lines.end(),
                    [](const LineResult& line) { return line.used && !line.limit; }));
}

std::size_t failed_checks(const Result& result) {
  return static_cast<std::size_t>(
      std::count_if(result.checks.begin(), result.checks.end(),
                    [](const Check& check) { return check.outcome == Outcome::fail; }));
}

std::string key(double value) { return std::isfinite(value) ? fmt::format("{:.9g}", value) : ""; }

double quantile(const std::vector<double>& sorted, double share) {
  if (sorted.empty()) return kNotKnown;
  const double place = share * static_cast<double>(sorted.size() - 1);
  const auto below = static_cast<std::size_t>(place);
  const std::size_t above = std::min(below + 1, sorted.size() - 1);
  return sorted[below] + (place - static_cast<double>(below)) * (sorted[above] - sorted[below]);
}

}  // namespace trotline::page

namespace trotline {

std::string verdict_without_details(const std::string& verdict) { return verdict.substr(0, verdict.find(" (")); }

}  // namespace trotline
