#include "prepared_line.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <numbers>
#include <set>

#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/physics/angle.hpp>
#include <trotline/physics/intensity_scale.hpp>

namespace trotline {
namespace {


double needed(const std::optional<double>& in_row, const std::optional<double>& in_options,
              const Place& place, const char* what, const char* advice) {
  if (in_row) return *in_row;
  if (in_options) return *in_options;
  throw InputError(place, {fmt::format("the row has no {}", what), "one for every line", advice});
}

double beam_rad(const IntensityRow& row, const RunOptions& options, const Place& place) {
  return needed(row.beam_fwhm_rad, options.beam_fwhm_rad, place, "beam",
                "add a column 'beam_fwhm [arcsec]' or the option 'beam'");
}

/// What the intensity of a row is multiplied with to become K km/s on the main-beam scale.
double main_beam_factor(const IntensityRow& row, double frequency_hz, const RunOptions& options,
                        const Place& place) {
  switch (row.scale) {
    case IntensityScale::main_beam:
      return 1.0;
    case IntensityScale::antenna: {
      const char* advice =
          "give the options 'forward_efficiency' and 'main_beam_efficiency', or such columns";
      const double forward =
          needed(row.forward_efficiency, options.forward_efficiency, place, "forward efficiency", advice);
      const double main_beam = needed(row.main_beam_efficiency, options.main_beam_efficiency, place,
                                      "main-beam efficiency", advice);
      if (main_beam > forward) {
        throw InputError(place, {fmt::format("main-beam efficiency {:g} above the forward efficiency {:g}",
                                             main_beam, forward),
                                 "a main-beam efficiency that is not above the forward efficiency"});
      }
      return main_beam_per_antenna_temperature(forward, main_beam);
    }
    case IntensityScale::flux_per_beam: {
      const double beam = beam_rad(row, options, place);
      return kelvin_per_jansky_per_beam(frequency_hz, beam, beam);
    }
  }
  return kNotKnown;
}

double filling_of(const IntensityRow& row, const RunOptions& options, const Place& place) {
  if (!options.source_size_rad) return 1.0;
  const double beam = beam_rad(row, options, place);
  return options.source_shape == SourceShape::disc ? disc_filling(*options.source_size_rad, beam)
                                                   : gaussian_filling(*options.source_size_rad, beam);
}

/// Intensities that no telescope gives, and whose squares would leave the range of a double, are a slip of
/// unit or of typing.
void require_plausible(const LineResult& line, const Place& place) {
  constexpr double kLeast = 1e-12;
  constexpr double kMost = 1e12;
  const double w = std::abs(line.intensity_k_km_s);
  const double sigma = line.intensity_error_k_km_s;
  const auto refuse = [&](const char* what, double value) {
    throw InputError(place, {fmt::format("{} of {:g} K km/s on the main-beam scale", what, value),
                             fmt::format("{:g} to {:g} K km/s", kLeast, kMost), "check value and unit"});
  };
  if (w != 0.0 && !(w >= kLeast && w <= kMost)) refuse("an intensity", line.intensity_k_km_s);
  if (!std::isnan(sigma) && !(sigma >= kLeast && sigma <= kMost)) refuse("an intensity error", sigma);
}

/// Noise that vanishes beside a calibration error shared by lines leaves a covariance that cannot be
/// inverted.
void require_distinguishable(const LineResult& line, const Place& place) {
  constexpr double kLeast = 1e-6;
  const double calibration = line.calibration_error * std::abs(line.intensity_k_km_s);
  if (!(line.intensity_error_k_km_s < kLeast * calibration)) return;
  throw InputError(
      place, {fmt::format("an intensity error of {:g} K km/s beside a calibration error of {:g} K km/s",
                          line.intensity_error_k_km_s, calibration),
              fmt::format("noise of at least {:g} of it", kLeast), "check value and unit of the error"});
}

bool is_listed(const std::vector<std::string>& labels, const std::string& transition) {
  return std::any_of(labels.begin(), labels.end(), [&](const std::string& label) {
    return normalised_label(label) == normalised_label(transition);
  });
}

bool is_inside(const std::optional<QuantityRange>& range, double value) {
  return !range || (value >= range->low && value <= range->high);
}

/// Which option chooses other lines than this one, or an empty text.
std::string reason_excluded(const LineResult& line, const RunOptions& options) {
  if (!options.only_lines.empty() && !is_listed(options.only_lines, line.transition)) {
    return "not among the lines of the option 'only'";
  }
  if (is_listed(options.without_lines, line.transition)) return "left out by the option 'without'";
  if (!is_inside(options.upper_energy_k, line.upper_energy_k)) return "outside the option 'upper_energy'";
  if (!is_inside(options.frequency_hz, line.frequency_mhz * 1e6)) return "outside the option 'frequency'";
  return {};
}

/// Why a line is not fitted, or an empty text.
std::string reason_to_leave_out(const LineResult& line, const RunOptions& options) {
  if (line.excluded) return reason_excluded(line, options);
  if (!fits_intensities(options)) {
    if (line.limit) return "an upper limit: compared with the model, not fitted";
    if (!line.blend.empty()) return "a blend: the straight line cannot part it";
    if (!(line.intensity_k_km_s > 0.0)) return "the intensity is not above zero and has no logarithm";
  }
  if (line.limit) return {};
  const double snr = line.intensity_k_km_s / line.intensity_error_k_km_s;
  if (options.least_snr > 0.0 && snr < options.least_snr)
    return fmt::format("W/sigma = {:.1f}, below the option 'least_snr'", snr);
  return {};
}

void check_labels_exist(const std::vector<std::string>& labels, const char* option,
                        const std::vector<PreparedLine>& lines, const std::string& table_file) {
  std::vector<std::string> known;
  for (const PreparedLine& line : lines) known.push_back(line.result.transition);
  for (const std::string& label : labels) {
    if (!is_listed(known, label)) {
      throw InputError(Place{table_file},
                       {fmt::format("option '{}': the table has no line '{}'", option, printable(label)),
                        "one of: " + listed(known), did_you_mean(label, known)});
    }
  }
}

PreparedLine prepare(const MatchedRow& matched, const Species& species, const RunOptions& options,
                     const Place& place) {
  const IntensityRow& row = matched.row;
  const Transition& transition = species.transitions[matched.transition];
  const Level& upper = species.levels[transition.upper];
  PreparedLine line;
  line.constants = {transition.frequency_hz, upper.energy_k, upper.degeneracy, transition.einstein_a_per_s};
  line.transition = matched.transition;
  line.spin = upper.spin;
  line.upper_label = upper.label;

  LineResult& result = line.result;
  result.transition = transition_label(species, transition);
  result.frequency_mhz = transition.frequency_hz / 1e6;
  result.upper_energy_k = upper.energy_k;
  result.upper_degeneracy = upper.degeneracy;
  result.einstein_a_s1 = transition.einstein_a_per_s;
  const double factor = main_beam_factor(row, transition.frequency_hz, options, place);
  result.intensity_k_km_s = row.intensity * factor;
  result.intensity_error_k_km_s = row.intensity_sigma * factor;
  require_plausible(result, place);
  result.calibration_error = row.calibration_error.value_or(options.calibration_error.value_or(0.0));
  result.calibration_group = row.calibration_group.value_or("");
  require_distinguishable(result, place);
  result.limit = row.is_limit;
  result.blend = row.blend.value_or("");
  result.filling = filling_of(row, options, place);
  if (row.beam_fwhm_rad || options.beam_fwhm_rad) {
    result.beam_fwhm_arcsec = row.beam_fwhm_rad.value_or(options.beam_fwhm_rad.value_or(0.0)) / kRadPerArcsec;
  }
  result.fwhm_km_s = row.fwhm_km_s.value_or(options.fwhm_km_s.value_or(kNotKnown));
  result.table_line = row.line_number;
  result.note = row.note.value_or("");
  result.excluded = !reason_excluded(result, options).empty();
  result.why_unused = reason_to_leave_out(result, options);
  result.used = result.why_unused.empty();

  if (result.intensity_k_km_s > 0.0) {
    const double per_column = intensity_per_upper_column_k_km_s_cm2(line.constants) * upper.degeneracy;
    line.ln_thin = std::log(result.intensity_k_km_s / (per_column * result.filling));
    line.ln_noise_sigma = result.intensity_error_k_km_s / result.intensity_k_km_s;
    result.ln_nu_gu_error = std::hypot(line.ln_noise_sigma, result.calibration_error);
  }
  return line;
}

/// A blend is one measurement: it is fitted whole or not at all.
void keep_blends_whole(std::vector<PreparedLine>& lines) {
  std::set<std::string> broken;
  for (const PreparedLine& line : lines) {
    if (!line.result.blend.empty() && !line.result.used) broken.insert(line.result.blend);
  }
  for (PreparedLine& line : lines) {
    if (!line.result.used || !broken.contains(line.result.blend)) continue;
    line.result.used = false;
    line.result.why_unused = "its blend holds a line that is left out";
  }
}

}  // namespace

bool fits_intensities(const RunOptions& options) {
  return options.method == "likelihood" || options.method == "robust";
}

std::vector<PreparedLine> prepare_lines(const MatchedTable& matched, const Species& species,
                                        const RunOptions& options, const std::string& table_file) {
  std::vector<PreparedLine> lines;
  for (const MatchedRow& row : matched.rows) {
    lines.push_back(prepare(row, species, options, Place{table_file, row.row.line_number}));
  }
  keep_blends_whole(lines);
  check_labels_exist(options.only_lines, "only", lines, table_file);
  check_labels_exist(options.without_lines, "without", lines, table_file);
  return lines;
}

}  // namespace trotline
