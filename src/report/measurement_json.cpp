#include <nlohmann/json.hpp>

#include <trotline/report/display_text.hpp>
#include <trotline/report/measurement_report.hpp>

namespace trotline {
namespace {

using Json = nlohmann::ordered_json;  // keeps the keys in the order written

constexpr double kHzPerMhz = 1e6;

const char* name_of(LineStatus status) {
  switch (status) {
    case LineStatus::measured:
      return "measured";
    case LineStatus::not_covered:
      return "not covered";
    case LineStatus::not_measured:
      break;
  }
  return "not measured";
}

const char* unit_of(IntensityScale scale) {
  return scale == IntensityScale::flux_per_beam ? "Jy/beam km/s" : "K km/s";
}

const char* name_of(IntensityScale scale) {
  switch (scale) {
    case IntensityScale::main_beam:
      return "Tmb";
    case IntensityScale::antenna:
      return "TA*";
    case IntensityScale::flux_per_beam:
      break;
  }
  return "flux per beam";
}

Json json_of(const VelocityRange& range) { return Json::array({range.low_km_s, range.high_km_s}); }

Json json_of(const Measured& measured) { return {{"value", measured.value}, {"error", measured.sigma}}; }

Json json_of(const GaussianLine& line) {
  return {{"area", json_of(line.area)},
          {"velocity_km_s", json_of(line.velocity_km_s)},
          {"fwhm_km_s", json_of(line.fwhm_km_s)},
          {"peak", json_of(line.peak)}};
}

void add_numbers(const LineMeasurement& line, Json& json) {
  json["intensity"] = line.intensity;
  json["intensity_error"] = line.sigma();
  json["noise_error"] = line.noise_sigma;
  json["baseline_error"] = line.baseline_sigma;
  json["calibration_error"] = line.calibration_sigma;
  json["detected"] = line.detected;
  json["limit"] = line.limit;
  json["method"] = line.method;
  json["window_km_s"] = json_of(line.window);
  json["channels"] = line.channels;
  json["channel_km_s"] = line.channel_km_s;
  json["rms"] = line.rms;
  json["channels_per_independent_one"] = line.channels_per_independent_one;
  json["baseline_order"] = line.baseline_order;
  json["baseline_channels"] = line.baseline_channels;
  json["gaussian"] = line.gaussian ? json_of(*line.gaussian) : Json();
  json["blend"] = line.blend;
}

Json json_of(const LineMeasurement& line) {
  Json json;
  json["transition"] = line.label;
  json["species"] = line.tag;
  json["frequency_mhz"] = line.rest_frequency_hz / kHzPerMhz;
  json["status"] = name_of(line.status);
  json["trouble"] = line.trouble;
  if (line.status == LineStatus::measured) add_numbers(line, json);
  json["trusted"] = line.is_trusted();
  json["flags"] = Json::array();
  for (const LineFlag flag : line.flags) json["flags"].push_back(name_of(flag));
  json["neighbours"] = line.neighbours;
  json["fitted_with"] = line.fitted_with;
  return json;
}

Json json_of(const SpectrumMeasurement& spectrum) {
  Json json;
  json["spectrum"] = spectrum.spectrum;
  json["object"] = spectrum.object ? Json(*spectrum.object) : Json();
  json["scale"] = name_of(spectrum.scale);
  json["intensity_unit"] = unit_of(spectrum.scale);
  json["window_km_s"] = json_of(spectrum.window);
  json["window_found_at_snr"] = spectrum.window_snr > 0.0 ? Json(spectrum.window_snr) : Json();
  json["noise_autocorrelation"] =
      std::vector<double>(spectrum.correlation.rho.begin(), spectrum.correlation.rho.end());
  json["lines"] = Json::array();
  for (const LineMeasurement& line : spectrum.lines) json["lines"].push_back(json_of(line));
  return json;
}

}  // namespace

std::string measurement_json(const SpeciesMeasurement& measurement) {
  Json json;
  json["schema"] = kMeasurementSchema;
  json["spectra"] = Json::array();
  for (const SpectrumMeasurement& spectrum : measurement.spectra)
    json["spectra"].push_back(json_of(spectrum));
  json["warnings"] = measurement.warnings;
  json["provenance"] = Json::object();
  for (const auto& [name, value] : measurement.table.provenance) json["provenance"][name] = value;
  return quiet_json(json.dump(2, ' ', false, Json::error_handler_t::replace)) + "\n";
}

}  // namespace trotline
