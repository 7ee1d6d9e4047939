#include <trotline/analysis/analyse.hpp>

#include <fmt/format.h>

#include <cmath>
#include <map>
#include <numbers>

#include <trotline/base/version.hpp>
#include <trotline/physics/constants.hpp>

#include "checks.hpp"
#include "line_method.hpp"
#include "prepared_line.hpp"

namespace trotline {
namespace {

constexpr double kRadPerArcsec = std::numbers::pi / (180.0 * 3600.0);
constexpr double kStrikingSigma = 3.0;
constexpr double kLeastPlainSnr = 5.0;      // below it the logarithm's bias sigma^2/2W^2 exceeds 2 %

void warn_about_lines(Result& result, const std::vector<PreparedLine>& lines) {
  std::vector<std::string> weak;
  std::vector<std::string> negative;
  std::map<std::string, int> times;
  for (const PreparedLine& line : lines) {
    if (line.result.intensity_k_km_s < -kStrikingSigma * line.result.intensity_error_k_km_s) {
      negative.push_back(line.result.transition);
    }
    if (!line.result.used) continue;
    if (line.result.intensity_k_km_s < kLeastPlainSnr * line.result.intensity_error_k_km_s) {
      weak.push_back(line.result.transition);
    }
    ++times[line.result.transition];
  }
  if (!weak.empty()) {
    result.warnings.push_back(fmt::format("below S/N {:g}, where the logarithm of an intensity is biased low by "
                                          "half its squared relative error: {}",
                                          kLeastPlainSnr, fmt::join(weak, ", ")));
  }
  if (!negative.empty()) {
    result.warnings.push_back(fmt::format("negative by more than {:g} of its errors, which noise does not do; look for "
                                          "a baseline or a line of the reference position: {}",
                                          kStrikingSigma, fmt::join(negative, ", ")));
  }
  for (const auto& [transition, count] : times) {
    if (count > 1) {
      result.warnings.push_back(fmt::format("{} stands {} times in the table; each counts as a measurement",
                                            transition, count));
    }
  }
}

void warn_about_interval_ends(Result& result) {
  if (result.status == Status::done && !result.temperature_fixed && std::isnan(result.temperature_k.high95)) {
    result.warnings.push_back("within 95 % the slope may be flat: T has no upper bound there");
  }
}

std::vector<std::string> assumptions_of(const Result& result) {
  return {result.temperature_fixed ? "LTE at the given temperature for every line" : "LTE: one temperature for every line",
          "optically thin lines", "noise Gaussian in the logarithm of the intensity"};
}

}  // namespace

Result analyse(const Species& species, const IntensityTable& table, const RunOptions& options) {
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
  fit_by_straight_line(result, lines, species, options);
  warn_about_lines(result, lines);
  warn_about_interval_ends(result);
  for (const PreparedLine& line : lines) result.lines.push_back(line.result);
  check_assumptions(result);
  result.assumptions = assumptions_of(result);
  result.provenance.version = version();
  result.provenance.table_file = table.file;
  result.provenance.species_file = species.file;
  result.provenance.species_fingerprint = species.file_fingerprint;
  result.provenance.constants = constants::kVintage;
  for (const Citation& c : species.citations) result.provenance.data_sources.push_back(c.what + ": " + c.from);
  result.provenance.options = shown(options);
  return result;
}

}  // namespace trotline
