#include "check_hints.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <set>

#include <trotline/inference/least_squares.hpp>
#include <trotline/inference/lte_checks.hpp>

namespace trotline {
namespace {

/// The options that `needed` asks for, with a method that can honour them.
std::string with_likelihood(const std::string& needed, const RunOptions& options) {
  return fits_intensities(options) ? needed : "--method likelihood " + needed;
}

bool spin_isomers_seen(const std::vector<PreparedLine>& lines) {
  std::set<std::string> seen;
  for (const PreparedLine& line : lines) {
    if (line.result.used && !line.spin.empty()) seen.insert(line.spin);
  }
  return seen.size() > 1;
}

std::vector<std::string> names_of_parts(const std::vector<SubsetTemperature>& subsets,
                                        const std::string& division) {
  std::vector<std::string> names;
  for (const SubsetTemperature& subset : subsets) {
    if (subset.division == division && !std::isnan(subset.temperature_k)) names.push_back(subset.subset);
  }
  return names;
}

}  // namespace

std::string unseen_opacity_hint(const Result& result, const RunOptions& options) {
  const bool widths = std::none_of(result.lines.begin(), result.lines.end(), [](const LineResult& line) {
    return line.used && !(line.fwhm_km_s > 0.0);
  });
  if (widths) return {};
  return fmt::format("; or low lines are opaque, which cannot be seen without widths: try {}",
                     with_likelihood("--line-width", options));
}

std::string beam_hint(double trend, const RunOptions& options) {
  if (options.source_size_free) return "; the source fills the beams otherwise than the model has it";
  const std::string cure = with_likelihood("--source-size free", options);
  if (options.source_size_rad)
    return "; the source fills the beams otherwise than the size given has it: try " + cure;
  if (trend < 0.0) return "; beam dilution: the source does not fill every beam? try " + cure;
  return "; the larger beams hold more than the model, which is not beam dilution: check the beams";
}

bool temperatures_agree(const std::vector<SubsetTemperature>& subsets, const std::string& division) {
  double weights = 0.0;
  double sum = 0.0;
  double squares = 0.0;
  int count = 0;
  for (const SubsetTemperature& subset : subsets) {
    const double weight = std::pow(subset.temperature_k / subset.temperature_error_k, 2);
    if (subset.division != division || !(weight > 0.0) || !std::isfinite(weight)) continue;
    const double ln_t = std::log(subset.temperature_k);
    weights += weight;
    sum += weight * ln_t;
    squares += weight * ln_t * ln_t;
    ++count;
  }
  if (count < 2) return false;
  const double chi2 = std::max(0.0, squares - sum * sum / weights);
  return chi2_survival(chi2, count - 1) >= kLteCheckChance;
}

std::string offset_hint(const std::string& division, const std::vector<SubsetTemperature>& subsets,
                        const std::vector<PreparedLine>& lines, const RunOptions& options) {
  std::string text =
      fmt::format("; {} differ in N, not in T", fmt::join(names_of_parts(subsets, division), " and "));
  if (division == "spin isomer" || (division == "K-ladder" && spin_isomers_seen(lines))) {
    if (!options.isomers_apart) text += ": try " + with_likelihood("--isomers apart", options);
  } else if (division == "band" || division == "beam") {
    text += ": calibration, or how the source fills the beams?";
  }
  return text;
}

std::string neglected_opacity_hint(const RunOptions& options) {
  return fits_intensities(options) ? "--opacity automatic" : "--method likelihood";
}

}  // namespace trotline
