#include <trotline/base/text.hpp>
#include <trotline/observation/line_measurement.hpp>

namespace trotline {
namespace {

std::string note_of(const LineMeasurement& line, const MeasurementOptions& options) {
  std::string note = line.method;
  if (!line.fitted_with.empty()) note += "; fitted with " + listed(line.fitted_with, 6);
  note += fmt::format("; baseline order {}, rms {:.3g}", line.baseline_order, line.rms);
  if (!line.detected)
    note += fmt::format("; below {:g} sigma, limit {:.3g}", options.limit_in_sigma, line.limit);
  for (const LineFlag flag : line.flags) note += fmt::format("; {}", name_of(flag));
  if (!line.neighbours.empty()) note += ": " + listed(line.neighbours, 4);
  return note;
}

std::string why_not(const LineMeasurement& line) {
  if (line.status != LineStatus::measured) return line.trouble;
  std::vector<std::string> flags;
  for (const LineFlag flag : {LineFlag::saturation, LineFlag::edge, LineFlag::hole}) {
    if (line.has(flag)) flags.emplace_back(name_of(flag));
  }
  return listed(flags);
}

/// A baseline that crosses most of what it was fitted to may hold any number, and may have eaten the line.
bool is_lost_in_baseline(const LineMeasurement& line) {
  constexpr double kLost = 5.0;
  return line.baseline_sigma > kLost * line.noise_sigma;
}

std::string lost_in_baseline(const LineMeasurement& line) {
  return fmt::format(
      "line {} is not measured well: its baseline is fitted to so little beside the window of {:.4g} km/s "
      "that it "
      "makes the error {:.0f} times that of the noise; state a narrower --window or --search, or "
      "--baseline-order",
      line.label, line.window.high_km_s - line.window.low_km_s, line.sigma() / line.noise_sigma);
}

IntensityRow row_of(const Spectrum& spectrum, const LineMeasurement& line,
                    const MeasurementOptions& options) {
  IntensityRow row;
  row.transition = line.label;
  row.frequency_hz = line.rest_frequency_hz;
  row.intensity = line.intensity;
  row.intensity_sigma = line.sigma();
  row.scale = spectrum.scale;
  row.source = spectrum.object;
  if (!line.tag.empty()) row.species = line.tag;
  row.beam_fwhm_rad = spectrum.beam_fwhm_rad;
  if (line.gaussian && line.blend.empty()) row.fwhm_km_s = line.gaussian->fwhm_km_s.value;
  const double calibration = spectrum.calibration_error.value_or(options.calibration_error);
  if (calibration > 0.0) row.calibration_error = calibration;
  row.forward_efficiency = spectrum.forward_efficiency;
  row.main_beam_efficiency = spectrum.main_beam_efficiency;
  if (!line.blend.empty()) row.blend = line.blend;
  row.note = note_of(line, options);
  return row;
}

}  // namespace

IntensityTable to_intensity_table(const Spectrum& spectrum, const SpectrumMeasurement& measured,
                                  const MeasurementOptions& options) {
  IntensityTable table;
  table.file = spectrum.name;
  table.warnings = measured.warnings;
  for (const LineMeasurement& line : measured.lines) {
    if (line.status == LineStatus::not_covered) continue;
    if (!line.is_trusted()) {
      table.warnings.push_back(
          fmt::format("{}: line {} is left out: {}", spectrum.name, line.label, why_not(line)));
      continue;
    }
    if (is_lost_in_baseline(line)) {
      table.warnings.push_back(fmt::format("{}: {}", spectrum.name, lost_in_baseline(line)));
    }
    table.rows.push_back(row_of(spectrum, line, options));
    table.rows.back().line_number = table.rows.size();
  }
  return table;
}

}  // namespace trotline
