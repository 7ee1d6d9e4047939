#include <fmt/format.h>

#include <cmath>
#include <numbers>

#include <trotline/analysis/prediction.hpp>
#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/physics/angle.hpp>

namespace trotline {
namespace {

constexpr std::size_t kMostChosen = 40;

double positive(const std::string& text, Dimension dimension) {
  const double value = parse_quantity(text, dimension);
  if (!(value > 0.0)) {
    throw InputError({fmt::format("'{}' is not above zero", printable(text)), "a value above zero"});
  }
  return value;
}

double number_inside(const std::string& text, double low, double high) {
  const double value = parse_quantity(text, Dimension::dimensionless);
  if (!(value >= low && value <= high)) {
    throw InputError({fmt::format("'{}' is outside {:g} to {:g}", printable(text), low, high), "a number inside"});
  }
  return value;
}

std::string word_of(const std::string& text, const std::vector<std::string>& words) {
  const std::string word = lower_case(trimmed(text));
  for (const std::string& known : words) {
    if (word == known) return word;
  }
  throw InputError({fmt::format("there is no '{}'", printable(text)), "one of: " + listed(words),
                    did_you_mean(text, words)});
}

/// "84 GHz..116 GHz" or "84 GHz..116 GHz at 120 K".
ObservingBand band_of(const std::string& text) {
  const std::size_t at = text.find(" at ");
  ObservingBand band;
  band.frequency_hz = parse_quantity_range(trimmed(text.substr(0, at)), Dimension::frequency);
  if (at != std::string::npos) {
    band.system_temperature_k = positive(std::string(trimmed(text.substr(at + 4))), Dimension::temperature);
  }
  return band;
}

std::vector<ObservingBand> bands_of(const std::string& text) {
  std::vector<ObservingBand> bands;
  for (std::size_t start = 0; start <= text.size();) {
    const std::size_t comma = std::min(text.find(',', start), text.size());
    bands.push_back(band_of(std::string(trimmed(text.substr(start, comma - start)))));
    start = comma + 1;
  }
  return bands;
}

std::string bands_text(const std::vector<ObservingBand>& bands) {
  std::string text;
  for (const ObservingBand& band : bands) {
    text += fmt::format("{}{:.10g} GHz..{:.10g} GHz", text.empty() ? "" : ", ", band.frequency_hz.low / 1e9,
                        band.frequency_hz.high / 1e9);
    if (band.system_temperature_k) text += fmt::format(" at {:g} K", *band.system_temperature_k);
  }
  return text.empty() ? "not given" : text;
}

struct Shown {
  double internal_per_shown;
  const char* unit;
};

/// A quantity above zero that is not given unless somebody gives it.
PredictionOption quantity(const std::string& key, Dimension dimension,
                          std::optional<double> PredictionOptions::*member, Shown shown) {
  // Velocities are kept in km/s and column densities per cm2, everything else in SI.
  const double kept = dimension == Dimension::velocity         ? 1e-3
                      : dimension == Dimension::column_density ? 1e-4
                                                               : 1.0;
  return {key,
          [=](PredictionOptions& options, const std::string& text) {
            options.*member = positive(text, dimension) * kept;
          },
          [=](const PredictionOptions& options) {
            const auto& value = options.*member;
            return value ? fmt::format("{:.10g} {}", *value / shown.internal_per_shown, shown.unit)
                         : std::string("not given");
          }};
}

void set_channel(PredictionOptions& options, const std::string& text) {
  options.channel_hz.reset();
  options.channel_km_s.reset();
  const std::size_t space = text.find_last_of("0123456789. ");
  const std::string unit = space == std::string::npos ? text : std::string(trimmed(text.substr(space + 1)));
  if (is_unit_of(unit, Dimension::frequency)) {
    options.channel_hz = positive(text, Dimension::frequency);
  } else {
    options.channel_km_s = positive(text, Dimension::velocity) * 1e-3;
  }
}

std::string show_channel(const PredictionOptions& options) {
  if (options.channel_hz) return fmt::format("{:.10g} kHz", *options.channel_hz / 1e3);
  if (options.channel_km_s) return fmt::format("{:.10g} km/s", *options.channel_km_s);
  return "not given";
}

void set_background(PredictionOptions& options, const std::string& text) {
  options.background_k = parse_quantity(text, Dimension::temperature);
  if (options.background_k < 0.0) {
    throw InputError({fmt::format("'{}' is below zero", printable(text)), "a background of 0 K or more"});
  }
}

void set_choose(PredictionOptions& options, const std::string& text) {
  const auto count = parse_whole_number(text);
  if (!count || *count < 2 || *count > static_cast<long long>(kMostChosen)) {
    throw InputError({fmt::format("'{}' is no number of lines to choose", printable(text)),
                      fmt::format("2 to {}", kMostChosen)});
  }
  options.choose = static_cast<std::size_t>(*count);
}

void add_source_options(std::vector<PredictionOption>& table) {
  using Options = PredictionOptions;
  table.push_back(quantity("temperature", Dimension::temperature, &Options::temperature_k, {1.0, "K"}));
  table.push_back(
      quantity("column_density", Dimension::column_density, &Options::column_density_per_cm2, {1.0, "cm-2"}));
  table.push_back(quantity("line_width", Dimension::velocity, &Options::fwhm_km_s, {1.0, "km/s"}));
  table.push_back({"background", set_background,
                   [](const Options& o) { return fmt::format("{:.10g} K", o.background_k); }});
  table.push_back(
      quantity("source_size", Dimension::angle, &Options::source_size_rad, {kRadPerArcsec, "arcsec"}));
  table.push_back({"source_shape",
                   [](Options& o, const std::string& text) {
                     o.source_shape =
                         word_of(text, {"gaussian", "disc"}) == "disc" ? SourceShape::disc : SourceShape::gaussian;
                   },
                   [](const Options& o) {
                     return std::string(o.source_shape == SourceShape::disc ? "disc" : "gaussian");
                   }});
}

void add_telescope_options(std::vector<PredictionOption>& table) {
  using Options = PredictionOptions;
  table.push_back(quantity("beam", Dimension::angle, &Options::beam_fwhm_rad, {kRadPerArcsec, "arcsec"}));
  table.push_back(quantity("dish", Dimension::length, &Options::dish_m, {1.0, "m"}));
  table.push_back({"bands", [](Options& o, const std::string& text) { o.bands = bands_of(text); },
                   [](const Options& o) { return bands_text(o.bands); }});
  table.push_back(quantity("rms", Dimension::temperature, &Options::rms_k, {1e-3, "mK"}));
  table.push_back(quantity("time", Dimension::time, &Options::time_s, {1.0, "s"}));
  table.push_back(
      quantity("system_temperature", Dimension::temperature, &Options::system_temperature_k, {1.0, "K"}));
  table.push_back({"channel", set_channel, show_channel});
  table.push_back({"noise_factor",
                   [](Options& o, const std::string& text) { o.noise_factor = number_inside(text, 0.1, 10.0); },
                   [](const Options& o) { return fmt::format("{:.10g}", o.noise_factor); }});
  table.push_back({"calibration_error",
                   [](Options& o, const std::string& text) { o.calibration_error = number_inside(text, 0.0, 1.0); },
                   [](const Options& o) { return fmt::format("{:.10g}", o.calibration_error); }});
  table.push_back({"calibration_shared",
                   [](Options& o, const std::string& text) {
                     o.calibration_shared = word_of(text, {"yes", "no"}) == "yes";
                   },
                   [](const Options& o) { return std::string(o.calibration_shared ? "yes" : "no"); }});
}

void add_choice_options(std::vector<PredictionOption>& table) {
  using Options = PredictionOptions;
  table.push_back({"least_snr",
                   [](Options& o, const std::string& text) { o.least_snr = number_inside(text, 0.0, 1e9); },
                   [](const Options& o) { return fmt::format("{:.10g}", o.least_snr); }});
  table.push_back({"choose", set_choose, [](const Options& o) {
                     return o.choose == 0 ? std::string("not given") : fmt::format("{}", o.choose);
                   }});
  table.push_back({"aim",
                   [](Options& o, const std::string& text) {
                     o.aim = word_of(text, {"temperature", "column"}) == "column" ? Aim::column : Aim::temperature;
                   },
                   [](const Options& o) {
                     return std::string(o.aim == Aim::column ? "column" : "temperature");
                   }});
}

}  // namespace

const std::vector<PredictionOption>& prediction_option_table() {
  static const std::vector<PredictionOption> kTable = [] {
    std::vector<PredictionOption> table;
    add_source_options(table);
    add_telescope_options(table);
    add_choice_options(table);
    return table;
  }();
  return kTable;
}

}  // namespace trotline
