#include "checks.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

namespace trotline {
namespace {

// Common practice: a fit is called bad where chance alone would give a worse one less often than this.
constexpr double kLeastPValue = 0.01;
// At tau0 = 0.3 the Gaussian curve of growth takes 10 % off a line (PHYSICS: C = 1.10).
constexpr double kThinOpacity = 0.3;
constexpr double kMostRelativeError = 0.5;

Check goodness_of_fit(const Result& result) {
  Check check{"goodness of fit", result.p_value, Outcome::not_testable,
              "chi2 needs more lines than fitted parameters"};
  if (std::isnan(result.p_value)) return check;
  check.outcome = result.p_value >= kLeastPValue ? Outcome::pass : Outcome::fail;
  check.meaning = fmt::format("chance alone would scatter the lines more than this with probability {:.2g}",
                              result.p_value);
  return check;
}

/// Whether the data set T at all: with an open interval, or an error of the size of T, every model would do.
Check temperature_set(const Result& result) {
  const Estimate& t = result.temperature_k;
  Check check{"temperature set by the data", kNotKnown, Outcome::not_testable, "T is given, not fitted"};
  if (result.temperature_fixed) return check;
  check.meaning = "there is no temperature";
  if (std::isnan(t.value) || std::isnan(t.error)) return check;
  check.figure = t.error / t.value;
  if (std::isnan(t.high95)) {
    check.meaning = "within 95 % the slope may be flat: the data bound T from below only";
  } else if (check.figure > kMostRelativeError) {
    check.meaning = "the error of T is as large as T itself";
  } else {
    check.outcome = Outcome::pass;
    check.meaning = fmt::format("T is known to {:.2g} %", 100.0 * check.figure);
  }
  return check;
}

Check limits_kept(const Result& result) {
  Check check{"limits", kNotKnown, Outcome::not_testable, "no line is a limit"};
  int limits = 0;
  std::vector<std::string> broken;
  for (const LineResult& line : result.lines) {
    if (!line.limit || std::isnan(line.model_intensity_k_km_s)) continue;
    ++limits;
    if (line.model_intensity_k_km_s > line.intensity_k_km_s) broken.push_back(line.transition);
  }
  if (limits == 0) return check;
  check.figure = static_cast<double>(broken.size());
  check.outcome = broken.empty() ? Outcome::pass : Outcome::fail;
  check.meaning = broken.empty() ? fmt::format("the model stays below all {} limits", limits)
                                 : fmt::format("the model lies above the limit of {}", fmt::join(broken, ", "));
  return check;
}

Check thin_lines(const Result& result) {
  Check check{"opacity", kNotKnown, Outcome::not_testable, "no line has a width: opacity cannot be told"};
  double largest = -1.0;
  std::string transition;
  for (const LineResult& line : result.lines) {
    if (line.used && line.optical_depth > largest) {
      largest = line.optical_depth;
      transition = line.transition;
    }
  }
  if (largest < 0.0) return check;
  check.figure = largest;
  check.outcome = largest <= kThinOpacity ? Outcome::pass : Outcome::fail;
  check.meaning = fmt::format("largest optical depth at line centre, by this model: {:.2g} in {}{}", largest,
                              transition,
                              check.outcome == Outcome::fail ? "; thin lines are assumed, so N is too low" : "");
  return check;
}

std::string verdict_of(const Result& result) {
  std::vector<std::string> failed;
  for (const Check& check : result.checks) {
    if (check.outcome == Outcome::fail) failed.push_back(check.name);
  }
  if (!failed.empty()) {
    return fmt::format("one thin temperature does not describe the lines (failed: {})", fmt::join(failed, ", "));
  }
  const bool fit_testable = result.checks[0].outcome != Outcome::not_testable;
  const bool is_set = result.temperature_fixed || result.checks[1].outcome == Outcome::pass;
  if (!fit_testable || !is_set) return "these lines cannot tell";
  return "one temperature describes the lines";
}

}  // namespace

void check_assumptions(Result& result) {
  result.checks = {goodness_of_fit(result), temperature_set(result), limits_kept(result), thin_lines(result)};
  result.verdict = result.status == Status::done ? verdict_of(result) : "these lines cannot tell";
}

}  // namespace trotline
