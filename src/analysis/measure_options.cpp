// The options of `measure`: how each is read and shown.
#include <trotline/analysis/measure_description.hpp>
#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/physics/angle.hpp>
#include <trotline/physics/constants.hpp>
#include <trotline/physics/quantity.hpp>

namespace trotline {
namespace {

constexpr double kMetresPerKm = 1e3;
const char* const kNotGiven = "not given";

std::string number(double value, const char* unit) {
  return *unit == '\0' ? fmt::format("{:.10g}", value) : fmt::format("{:.10g} {}", value, unit);
}

double positive(const std::string& text, Dimension dimension) {
  const double value = parse_quantity(text, dimension);
  if (!(value > 0.0))
    throw InputError({fmt::format("'{}' is not above zero", printable(text)), "a value above zero"});
  return value;
}

double velocity_km_s(const std::string& text) {
  return parse_quantity(text, Dimension::velocity) / kMetresPerKm;
}

double width_km_s(const std::string& text) { return positive(text, Dimension::velocity) / kMetresPerKm; }

double fraction(const std::string& text) {
  const double value = parse_quantity(text, Dimension::dimensionless);
  if (!(value > 0.0 && value <= 1.0)) {
    throw InputError({fmt::format("'{}' is outside 0 to 1", printable(text)),
                      "a fraction above 0 and up to 1, or percent"});
  }
  return value;
}

/// Parts between separators that stand outside of brackets; parts of white space only are dropped.
std::vector<std::string> split(const std::string& text, char separator) {
  std::vector<std::string> parts(1);
  int depth = 0;
  for (const char c : text) {
    depth += (c == '(') - (c == ')');
    if (c == separator && depth <= 0) {
      parts.emplace_back();
    } else {
      parts.back() += c;
    }
  }
  std::vector<std::string> kept;
  for (const std::string& part : parts) {
    if (!trimmed(part).empty()) kept.emplace_back(trimmed(part));
  }
  return kept;
}

std::vector<std::string> names_of(const std::string& text) {
  auto names = split(text, ',');
  if (names.empty()) throw InputError({"no name is given", "names separated by commas"});
  return names;
}

std::string joined(const std::vector<std::string>& names) {
  return names.empty() ? kNotGiven : fmt::format("{}", fmt::join(names, ", "));
}

/// "1-0: -3 km/s..8 km/s; 2-1: 2..9 km/s"
std::vector<std::pair<std::string, VelocityRange>> line_windows(const std::string& text) {
  std::vector<std::pair<std::string, VelocityRange>> windows;
  for (const std::string& part : split(text, ';')) {
    const std::size_t colon = part.rfind(':');
    if (colon == std::string::npos || trimmed(part.substr(0, colon)).empty()) {
      throw InputError({fmt::format("'{}' is no window of a line", printable(part)),
                        "a label, ':' and a range, as in '1-0: -3..8 km/s'"});
    }
    const QuantityRange range = parse_quantity_range(part.substr(colon + 1), Dimension::velocity);
    const std::string_view label = trimmed(std::string_view(part).substr(0, colon));
    for (const auto& [other, window] : windows) {
      if (other == label)
        throw InputError({fmt::format("'{}' has two windows", printable(label)), "one window a line"});
    }
    windows.push_back({std::string(label), {range.low / kMetresPerKm, range.high / kMetresPerKm}});
  }
  if (windows.empty()) throw InputError({"no window is given", "windows such as '1-0: -3..8 km/s'"});
  return windows;
}

std::string show_windows(const std::vector<std::pair<std::string, VelocityRange>>& windows) {
  std::vector<std::string> shown;
  for (const auto& [label, window] : windows) {
    shown.push_back(fmt::format("{}: {:.10g}..{:.10g} km/s", label, window.low_km_s, window.high_km_s));
  }
  return windows.empty() ? kNotGiven : fmt::format("{}", fmt::join(shown, "; "));
}

std::optional<int> baseline_order(const std::string& text) {
  if (lower_case(trimmed(text)) == "auto") return std::nullopt;
  const auto order = parse_whole_number(text);
  constexpr int kHighest = 15;
  if (!order || *order < 0 || *order > kHighest) {
    throw InputError({fmt::format("'{}' is no order of a baseline", printable(text)),
                      "a whole number from 0 to 15, or 'auto'"});
  }
  return static_cast<int>(*order);
}

IntensityScale scale_of(const std::string& text) {
  const std::string word = lower_case(trimmed(text));
  if (word == "tmb") return IntensityScale::main_beam;
  if (word == "ta*") return IntensityScale::antenna;
  throw InputError({fmt::format("there is no scale '{}'", printable(text)), "'Tmb' or 'TA*'"});
}

RestFrame frame_of(const std::string& text) {
  const auto frame = rest_frame_named(text);
  if (!frame || *frame == RestFrame::unknown || *frame == RestFrame::other) {
    throw InputError({fmt::format("there is no frame '{}'", printable(text)),
                      "LSRK, LSRD, BARYCENT, HELIOCEN, GEOCENTR or TOPOCENT"});
  }
  return *frame;
}

using Description = MeasureDescription;
using Input = SpectrumInput;

MeasureOption common(std::string key, std::string example,
                     std::function<void(Description&, const std::string&)> set,
                     std::function<std::string(const Description&)> show) {
  return {std::move(key), std::move(example), std::move(set), {}, std::move(show)};
}

/// An option that every file may have for itself.
MeasureOption of_files(const std::string& key, const std::string& example,
                       const std::function<void(Input&, const std::string&)>& set_file,
                       const std::function<std::string(const Input&)>& show_file) {
  MeasureOption option{key, example, {}, set_file, {}};
  option.set = [set_file](Description& description, const std::string& text) {
    const auto values = split(text, ',');
    const std::size_t files = description.inputs.size();
    if (values.size() != 1 && values.size() != files) {
      throw InputError({fmt::format("{} values are given for {} files", values.size(), files),
                        "one value for all, or one for each file"});
    }
    for (std::size_t i = 0; i < files; ++i)
      set_file(description.inputs[i], values[values.size() == 1 ? 0 : i]);
  };
  option.show = [show_file](const Description& description) {
    std::vector<std::string> shown;
    for (const Input& input : description.inputs) shown.push_back(show_file(input));
    const bool same = std::all_of(shown.begin(), shown.end(), [&](const auto& s) { return s == shown[0]; });
    return shown.empty() ? kNotGiven : same ? shown[0] : fmt::format("{}", fmt::join(shown, ", "));
  };
  return option;
}

template <class Value>
std::string if_given(const std::optional<Value>& value, double scale, const char* unit) {
  return value ? number(*value / scale, unit) : std::string(kNotGiven);
}

std::string show_resolution(const Input& input) {
  return input.resolution_hz ? if_given(input.resolution_hz, 1e6, "MHz")
                             : if_given(input.resolution_km_s, 1.0, "km/s");
}

void set_resolution(Input& input, const std::string& text) {
  const std::string unit(trimmed(text.substr(std::min(text.find_first_of(" \t"), text.size()))));
  if (is_unit_of(unit, Dimension::velocity)) {
    input.resolution_km_s = width_km_s(text);
    input.resolution_hz.reset();
  } else {
    input.resolution_hz = positive(text, Dimension::frequency);
    input.resolution_km_s.reset();
  }
}

void set_noise(Input& input, const std::string& text) {
  const std::string unit(trimmed(text.substr(std::min(text.find_first_of(" \t"), text.size()))));
  input.noise_is_flux = is_unit_of(unit + " m/s", Dimension::flux_times_velocity);
  input.noise = input.noise_is_flux ? positive(text + " m/s", Dimension::flux_times_velocity)
                                    : positive(text, Dimension::temperature);
}

void add_line_options(std::vector<MeasureOption>& table) {
  table.push_back(common(
      "vlsr", "5.2 km/s", [](Description& d, const std::string& t) { d.vlsr_km_s = velocity_km_s(t); },
      [](const Description& d) { return if_given(d.vlsr_km_s, 1.0, "km/s"); }));
  table.push_back(common(
      "window", "6 km/s", [](Description& d, const std::string& t) { d.options.window_km_s = width_km_s(t); },
      [](const Description& d) {
        return d.options.window_km_s ? number(*d.options.window_km_s, "km/s") : std::string("found");
      }));
  table.push_back(common(
      "line_windows", "1-0: -3..8 km/s; 2-1: 2..9 km/s",
      [](Description& d, const std::string& t) { d.selection.windows = line_windows(t); },
      [](const Description& d) { return show_windows(d.selection.windows); }));
  table.push_back(common(
      "search", "40 km/s", [](Description& d, const std::string& t) { d.options.search_km_s = width_km_s(t); },
      [](const Description& d) {
        return d.options.search_km_s ? number(*d.options.search_km_s, "km/s") : std::string("automatic");
      }));
  table.push_back(common(
      "line_width", "1.5 km/s",
      [](Description& d, const std::string& t) { d.options.fwhm_km_s = width_km_s(t); },
      [](const Description& d) { return if_given(d.options.fwhm_km_s, 1.0, "km/s"); }));
  table.push_back(common(
      "excitation", "50 K",
      [](Description& d, const std::string& t) {
        d.selection.excitation_k = positive(t, Dimension::temperature);
      },
      [](const Description& d) { return number(d.selection.excitation_k, "K"); }));
  table.push_back(common(
      "least_strength", "0.001",
      [](Description& d, const std::string& t) { d.selection.least_strength = fraction(t); },
      [](const Description& d) { return number(d.selection.least_strength, ""); }));
  table.push_back(common(
      "only", "1-0, 2-1", [](Description& d, const std::string& t) { d.selection.only_lines = names_of(t); },
      [](const Description& d) { return joined(d.selection.only_lines); }));
  table.push_back(common(
      "without", "3-2", [](Description& d, const std::string& t) { d.selection.without_lines = names_of(t); },
      [](const Description& d) { return joined(d.selection.without_lines); }));
}

void add_measurement_options(std::vector<MeasureOption>& table) {
  table.push_back(common(
      "baseline_order", "auto",
      [](Description& d, const std::string& t) { d.options.baseline.order = baseline_order(t); },
      [](const Description& d) {
        return d.options.baseline.order ? std::to_string(*d.options.baseline.order) : std::string("auto");
      }));
  table.push_back(common(
      "limit", "3",
      [](Description& d, const std::string& t) {
        d.options.limit_in_sigma = positive(t, Dimension::dimensionless);
      },
      [](const Description& d) { return number(d.options.limit_in_sigma, ""); }));
  table.push_back(common(
      "neighbours", "13CO, HCN", [](Description& d, const std::string& t) { d.other_species = names_of(t); },
      [](const Description& d) { return joined(d.other_species); }));
  table.push_back(common(
      "local_oscillator", "105 GHz",
      [](Description& d, const std::string& t) { d.local_oscillator_hz = positive(t, Dimension::frequency); },
      [](const Description& d) { return if_given(d.local_oscillator_hz, 1e9, "GHz"); }));
}

void add_file_options(std::vector<MeasureOption>& table) {
  table.push_back(of_files(
      "beam", "27 arcsec",
      [](Input& i, const std::string& t) { i.beam_fwhm_rad = positive(t, Dimension::angle); },
      [](const Input& i) { return if_given(i.beam_fwhm_rad, kRadPerArcsec, "arcsec"); }));
  table.push_back(of_files(
      "forward_efficiency", "0.95",
      [](Input& i, const std::string& t) { i.forward_efficiency = fraction(t); },
      [](const Input& i) { return if_given(i.forward_efficiency, 1.0, ""); }));
  table.push_back(of_files(
      "main_beam_efficiency", "0.78",
      [](Input& i, const std::string& t) { i.main_beam_efficiency = fraction(t); },
      [](const Input& i) { return if_given(i.main_beam_efficiency, 1.0, ""); }));
  table.push_back(of_files(
      "calibration_error", "10 %", [](Input& i, const std::string& t) { i.calibration_error = fraction(t); },
      [](const Input& i) { return if_given(i.calibration_error, 1.0, ""); }));
  table.push_back(of_files("resolution", "0.2 MHz", set_resolution, show_resolution));
  table.push_back(of_files("noise", "0.02 K", set_noise, [](const Input& i) {
    return if_given(i.noise, 1.0, i.noise_is_flux ? "Jy/beam" : "K");
  }));
  table.push_back(of_files(
      "scale", "TA*", [](Input& i, const std::string& t) { i.reading.scale = scale_of(t); },
      [](const Input& i) {
        if (!i.reading.scale) return std::string(kNotGiven);
        return std::string(*i.reading.scale == IntensityScale::antenna ? "TA*" : "Tmb");
      }));
  table.push_back(of_files(
      "unit", "K", [](Input& i, const std::string& t) { i.reading.intensity_unit = std::string(trimmed(t)); },
      [](const Input& i) { return i.reading.intensity_unit.value_or(kNotGiven); }));
  table.push_back(of_files(
      "frame", "LSRK", [](Input& i, const std::string& t) { i.reading.axis.frame = frame_of(t); },
      [](const Input& i) {
        return i.reading.axis.frame ? std::string(name_of(*i.reading.axis.frame)) : std::string(kNotGiven);
      }));
  table.push_back(of_files(
      "rest_frequency", "115.2712 GHz",
      [](Input& i, const std::string& t) {
        i.reading.axis.rest_frequency_hz = positive(t, Dimension::frequency);
      },
      [](const Input& i) { return if_given(i.reading.axis.rest_frequency_hz, 1e9, "GHz"); }));
}

std::vector<MeasureOption> make_table() {
  std::vector<MeasureOption> table;
  add_line_options(table);
  add_measurement_options(table);
  add_file_options(table);
  return table;
}

const MeasureOption& option_named(const std::string& key) {
  std::vector<std::string> keys;
  for (const MeasureOption& option : measure_option_table()) {
    if (option.key == key) return option;
    keys.push_back(option.key);
  }
  throw InputError({fmt::format("there is no option '{}'", printable(key)),
                    "one of: " + listed(keys, keys.size()), did_you_mean(key, keys)});
}

template <class Target, class Set>
void set_named(const Set& set, Target& target, const std::string& key, const std::string& value) {
  try {
    set(target, value);
  } catch (const InputError& error) {
    const Complaint& complaint = error.complaint();
    throw InputError({key + ": " + complaint.found, complaint.expected, complaint.advice});
  }
}

}  // namespace

const std::vector<MeasureOption>& measure_option_table() {
  static const std::vector<MeasureOption> kTable = make_table();
  return kTable;
}

void set_measure_option(MeasureDescription& description, const std::string& key, const std::string& value) {
  set_named(option_named(key).set, description, key, value);
}

void set_input_option(SpectrumInput& input, const std::string& key, const std::string& value) {
  const MeasureOption& option = option_named(key);
  if (!option.set_file) {
    throw InputError({fmt::format("'{}' holds for all files", key), "it beside the list of files"});
  }
  set_named(option.set_file, input, key, value);
}

std::vector<std::pair<std::string, std::string>> shown(const MeasureDescription& description) {
  std::vector<std::pair<std::string, std::string>> pairs;
  for (const MeasureOption& option : measure_option_table()) {
    pairs.emplace_back(option.key, option.show(description));
  }
  return pairs;
}

}  // namespace trotline
