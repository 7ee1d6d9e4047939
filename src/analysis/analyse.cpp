#include <fmt/format.h>

#include <cmath>
#include <map>
#include <numbers>

#include <trotline/analysis/analyse.hpp>
#include <trotline/base/errors.hpp>
#include <trotline/base/version.hpp>
#include <trotline/physics/angle.hpp>
#include <trotline/physics/constants.hpp>

#include "checks.hpp"
#include "likelihood_method.hpp"
#include "line_method.hpp"
#include "model_comparison.hpp"
#include "opacity_method.hpp"
#include "prepared_line.hpp"

namespace trotline {
namespace {

constexpr double kStrikingSigma = 3.0;
constexpr double kLeastPlainSnr = 5.0;  // below it the logarithm's bias sigma^2/2W^2 exceeds 2 %

void warn_about_lines(Result& result, const std::vector<PreparedLine>& lines, const RunOptions& options) {
  std::vector<std::string> weak;
  std::vector<std::string> negative;
  std::map<std::string, int> times;
  for (const PreparedLine& line : lines) {
    if (line.result.intensity_k_km_s < -kStrikingSigma * line.result.intensity_error_k_km_s) {
      negative.push_back(line.result.transition);
    }
    if (!line.result.used || line.result.limit) continue;
    if (line.result.intensity_k_km_s < kLeastPlainSnr * line.result.intensity_error_k_km_s) {
      weak.push_back(line.result.transition);
    }
    ++times[line.result.transition];
  }
  if (!weak.empty() && !fits_intensities(options)) {
    result.warnings.push_back(
        fmt::format("below S/N {:g}, where the logarithm of an intensity is biased low by "
                    "half its squared relative error: {}",
                    kLeastPlainSnr, fmt::join(weak, ", ")));
  }
  if (!negative.empty()) {
    result.warnings.push_back(
        fmt::format("negative by more than {:g} of its errors, which noise does not do; look for "
                    "a baseline or a line of the reference position: {}",
                    kStrikingSigma, fmt::join(negative, ", ")));
  }
  for (const auto& [transition, count] : times) {
    if (count > 1) {
      result.warnings.push_back(
          fmt::format("{} stands {} times in the table; each counts as a measurement", transition, count));
    }
  }
}

void warn_about_interval_ends(Result& result, const RunOptions& options) {
  if (result.status != Status::done || result.temperature_fixed || !std::isnan(result.temperature_k.high95))
    return;
  result.warnings.push_back(fits_intensities(options)
                                ? "within 95 % T has no upper bound in the range that was looked at"
                                : "within 95 % the slope may be flat: T has no upper bound there");
}

std::string noise_assumption(const RunOptions& options) {
  if (options.method == "likelihood") return "noise Gaussian in the intensity";
  if (options.method == "robust") {
    return "noise with heavy tails in the intensity (Student's t of 4 degrees of freedom)";
  }
  return "noise Gaussian in the logarithm of the intensity";
}

std::string opacity_assumption(const Result& result, const RunOptions& options, Opacity opacity) {
  if (options.method == "line" || opacity == Opacity::thin) return "optically thin lines";
  (void)result;
  return opacity == Opacity::line_centre ? "opacity of Gaussian lines, corrected as at line centre"
                                         : "opacity of Gaussian lines by their curve of growth";
}

std::vector<std::string> assumptions_of(const Result& result, const RunOptions& options, Opacity opacity) {
  std::string thermal = "LTE: one temperature for every line";
  if (result.temperature_fixed) thermal = "LTE at the given temperature for every line";
  if (options.components > 1) thermal = "LTE: two components, each of one temperature";
  std::vector<std::string> assumptions = {thermal, opacity_assumption(result, options, opacity),
                                          noise_assumption(options)};
  if (options.isomers_apart) assumptions.emplace_back("a column density for each spin isomer");
  if (options.column_density_per_cm2) assumptions.emplace_back("the column density as given");
  return assumptions;
}

/// Options that a method would pass over in silence are refused.
void require_method_can(const RunOptions& options) {
  if (options.keep_samples && options.intervals != "posterior") {
    throw InputError({"'samples' are asked for without a posterior", "intervals 'posterior' with them"});
  }
  if (fits_intensities(options)) return;
  const auto refuse = [&](const std::string& what) {
    throw InputError({fmt::format("method '{}' cannot fit {}", options.method, what),
                      "the method 'likelihood' or 'robust'"});
  };
  if (options.source_size_free) refuse("the source size");
  if (options.background_free) refuse("the background");
  if (options.components > 1) refuse("two components");
  if (options.isomers_apart) refuse("spin isomers apart");
  if (options.column_density_per_cm2) refuse("T with N given");
  if (options.temperature_range_k) refuse("T inside of a range");
  if (options.intervals == "posterior") refuse("a posterior");
  if (options.temperature_prior_k) refuse("T with what is known beforehand");
  if (options.method == "line" && options.opacity != "automatic" && options.opacity != "thin") {
    throw InputError({fmt::format("method 'line' and opacity '{}' contradict each other", options.opacity),
                      "the method 'opacity-line' or 'likelihood'"});
  }
}

/// What the method leaves for those who come after it.
struct MethodOutcome {
  FittedModel fitted;
  Opacity opacity = Opacity::thin;
};

MethodOutcome run_method(Result& result, std::vector<PreparedLine>& lines, const Species& species,
                         const RunOptions& options) {
  MethodOutcome outcome;
  if (options.method == "line") {
    fit_by_straight_line(result, lines, species, options);
  } else if (options.method == "opacity-line") {
    fit_by_opacity_line(result, lines, species, options);
    outcome.opacity = options.opacity == "line-centre" ? Opacity::line_centre : Opacity::curve_of_growth;
  } else {
    outcome.fitted = fit_by_likelihood(result, lines, species, options);
    outcome.opacity = outcome.fitted.setup.kind.opacity;
  }
  return outcome;
}

}  // namespace

Result analyse(const Species& species, const IntensityTable& table, const RunOptions& options) {
  require_method_can(options);
  const MatchedTable matched = match_rows(table, species, options.frequency_tolerance_hz, options.source);
  std::vector<PreparedLine> lines = prepare_lines(matched, species, options, table.file);
  Result result;
  result.source = matched.source;
  result.species = species.name;
  result.formula = species.formula;
  result.method = options.method;
  result.temperature_fixed = options.temperature_k.has_value();
  result.background_k = options.background_k;
  if (options.source_size_rad) result.source_size_arcsec = *options.source_size_rad / kRadPerArcsec;
  result.warnings = table.warnings;
  result.warnings.insert(result.warnings.end(), matched.warnings.begin(), matched.warnings.end());
  result.warnings.insert(result.warnings.end(), species.warnings.begin(), species.warnings.end());
  for (PreparedLine& line : lines) line.result.ln_nu_gu = line.ln_thin;
  const MethodOutcome outcome = run_method(result, lines, species, options);
  warn_about_lines(result, lines, options);
  warn_about_interval_ends(result, options);
  for (const PreparedLine& line : lines) result.lines.push_back(line.result);
  check_assumptions(result, lines, species, options, outcome.fitted, outcome.opacity);
  if (options.compare_models) compare_models(result, lines, species, options);
  result.assumptions = assumptions_of(result, options, outcome.opacity);
  result.provenance.version = version();
  result.provenance.table_file = table.file;
  result.provenance.species_file = species.file;
  result.provenance.species_fingerprint = species.file_fingerprint;
  result.provenance.constants = constants::kVintage;
  for (const Citation& c : species.citations)
    result.provenance.data_sources.push_back(c.what + ": " + c.from);
  result.provenance.options = shown(options);
  return result;
}

}  // namespace trotline
