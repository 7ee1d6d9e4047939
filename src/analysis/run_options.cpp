#include <fmt/format.h>

#include <cmath>
#include <numbers>

#include <trotline/analysis/run_options.hpp>
#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/physics/angle.hpp>

namespace trotline {
namespace {


std::string show_number(double value, const char* unit) {
  return unit[0] == '\0' ? fmt::format("{:.10g}", value) : fmt::format("{:.10g} {}", value, unit);
}

double positive(const std::string& text, Dimension dimension) {
  const double value = parse_quantity(text, dimension);
  if (!(value > 0.0)) throw InputError({fmt::format("'{}' is not above zero", text), "a value above zero"});
  return value;
}

/// An error of a whole intensity or more leaves nothing to fit; 0 takes back what a description says.
void set_calibration_error(RunOptions& options, const std::string& text) {
  const double value = parse_quantity(text, Dimension::dimensionless);
  if (!(value >= 0.0 && value < 1.0)) {
    throw InputError(
        {fmt::format("'{}' is outside 0 to 1", text), "a fraction from 0 to below 1, or percent, as '10 %'"});
  }
  options.calibration_error = value;
}

std::string show_calibration_error(const RunOptions& options) {
  return options.calibration_error ? show_number(*options.calibration_error, "") : "not given";
}

double fraction(const std::string& text) {
  const double value = parse_quantity(text, Dimension::dimensionless);
  if (!(value > 0.0 && value <= 1.0)) {
    throw InputError(
        {fmt::format("'{}' is outside 0 to 1", text), "a fraction above 0 and up to 1, or percent"});
  }
  return value;
}

bool yes_or_no(const std::string& text) {
  const std::string word = lower_case(trimmed(text));
  if (word == "yes" || word == "true") return true;
  if (word == "no" || word == "false") return false;
  throw InputError({fmt::format("'{}' is neither yes nor no", printable(text)), "'yes' or 'no'"});
}

std::string one_of(const std::string& text, const std::vector<std::string>& words) {
  const std::string word = lower_case(trimmed(text));
  for (const std::string& allowed : words) {
    if (word == allowed) return word;
  }
  throw InputError({fmt::format("there is no '{}'", printable(text)), "one of: " + listed(words),
                    did_you_mean(text, words)});
}

/// "1-0, 2-1": labels hold commas only inside brackets.
std::vector<std::string> split_labels(const std::string& text) {
  std::vector<std::string> labels(1);
  int depth = 0;
  for (const char c : text) {
    depth += (c == '(') - (c == ')');
    if (c == ',' && depth == 0) {
      labels.emplace_back();
    } else {
      labels.back() += c;
    }
  }
  std::vector<std::string> kept;
  for (const std::string& label : labels) {
    if (!trimmed(label).empty()) kept.emplace_back(trimmed(label));
  }
  if (kept.empty()) throw InputError({"no label is given", "labels such as '1-0, 2-1'"});
  return kept;
}

std::string joined(const std::vector<std::string>& labels) {
  return labels.empty() ? "not given" : listed(labels, labels.size());
}

/// An option that is an optional double in an internal unit, shown in another.
struct NumberOption {
  std::string key, example, help;
  Dimension dimension;
  std::optional<double> RunOptions::*member;
  double internal_per_shown;
  const char* shown_unit;
};

RunOption make(const NumberOption& number) {
  RunOption option{number.key, number.example, number.help, {}, {}};
  option.set = [number](RunOptions& options, const std::string& text) {
    options.*number.member =
        number.dimension == Dimension::dimensionless ? fraction(text) : positive(text, number.dimension);
    if (number.dimension == Dimension::velocity) *(options.*number.member) *= 1e-3;  // kept in km/s
  };
  option.show = [number](const RunOptions& options) {
    const auto& value = options.*number.member;
    return value ? show_number(*value / number.internal_per_shown, number.shown_unit)
                 : std::string("not given");
  };
  return option;
}

RunOption make_range(const std::string& key, const std::string& example, const std::string& help,
                     Dimension dimension, std::optional<QuantityRange> RunOptions::*member, double scale,
                     const char* unit) {
  return {key, example, help,
          [=](RunOptions& options, const std::string& text) {
            options.*member = parse_quantity_range(text, dimension);
          },
          [=](const RunOptions& options) {
            const auto& range = options.*member;
            return range ? fmt::format("{:.10g} {}..{:.10g} {}", range->low / scale, unit,
                                       range->high / scale, unit)
                         : std::string("not given");
          }};
}

RunOption make_labels(const std::string& key, const std::string& help,
                      std::vector<std::string> RunOptions::*member) {
  return {key, "1-0, 2-1", help,
          [=](RunOptions& options, const std::string& text) { options.*member = split_labels(text); },
          [=](const RunOptions& options) { return joined(options.*member); }};
}

void set_background(RunOptions& options, const std::string& text) {
  options.background_free = lower_case(trimmed(text)) == "free";
  if (options.background_free) {
    options.background_k = constants::kCosmicBackgroundK;  // where the fit starts
    return;
  }
  options.background_k = parse_quantity(text, Dimension::temperature);
  constexpr double kMostK = 1000.0;
  if (!(options.background_k >= 0.0 && options.background_k <= kMostK)) {
    throw InputError({fmt::format("'{}' is outside 0 to {:g} K", text, kMostK),
                      "a background of 0 K or more, as '2.7255 K'"});
  }
}

void set_tolerance(RunOptions& options, const std::string& text) {
  options.frequency_tolerance_hz = positive(text, Dimension::frequency);
}

void set_least_snr(RunOptions& options, const std::string& text) {
  options.least_snr = parse_quantity(text, Dimension::dimensionless);
  if (options.least_snr < 0.0) throw InputError({fmt::format("'{}' is below zero", text), "0 or more"});
}

void set_source_size(RunOptions& options, const std::string& text) {
  const std::string word = lower_case(trimmed(text));
  options.source_size_free = word == "free";
  options.source_size_rad.reset();
  if (word == "free" || word == "none") return;
  const double size_rad = positive(text, Dimension::angle);
  constexpr double kLeastArcsec = 1e-6;
  constexpr double kMostArcsec = 3600.0 * 90.0;
  if (!(size_rad >= kLeastArcsec * kRadPerArcsec && size_rad <= kMostArcsec * kRadPerArcsec)) {
    throw InputError(
        {fmt::format("'{}' is no size of a source", text), "1e-6 arcsec to 90 deg, as '8 arcsec'"});
  }
  options.source_size_rad = size_rad;
}

std::string show_source_size(const RunOptions& options) {
  if (options.source_size_free) return "free";
  return options.source_size_rad ? show_number(*options.source_size_rad / kRadPerArcsec, "arcsec") : "none";
}

/// "40 K +/- 5 K", or with the sign itself.
PriorKnowledge parse_prior(const std::string& text, Dimension dimension) {
  for (const std::string sign : {"+/-", "±"}) {
    const std::size_t at = text.find(sign);
    if (at == std::string::npos) continue;
    return {positive(std::string(trimmed(text.substr(0, at))), dimension),
            positive(std::string(trimmed(text.substr(at + sign.size()))), dimension)};
  }
  throw InputError(
      {fmt::format("'{}' has no error", printable(text)), "a value and its error, as '40 K +/- 5 K'"});
}

RunOption make_prior(const std::string& key, const std::string& example, const std::string& help,
                     Dimension dimension, std::optional<PriorKnowledge> RunOptions::*member, double scale,
                     const char* unit) {
  return {
      key, example, help,
      [=](RunOptions& options, const std::string& text) { options.*member = parse_prior(text, dimension); },
      [=](const RunOptions& options) {
        const auto& prior = options.*member;
        return prior ? fmt::format("{:.10g} {} +/- {:.10g} {}", prior->value / scale, unit,
                                   prior->sigma / scale, unit)
                     : std::string("not given");
      }};
}

RunOption make_words(const std::string& key, const std::string& example, const std::string& help,
                     const std::vector<std::string>& words, std::string RunOptions::*member) {
  return {key, example, help,
          [=](RunOptions& options, const std::string& text) { options.*member = one_of(text, words); },
          [=](const RunOptions& options) { return options.*member; }};
}

RunOption make_number(const std::string& key, const std::string& example, const std::string& help,
                      Dimension dimension, std::optional<double> RunOptions::*member, double per_shown,
                      const char* unit) {
  return {key, example, help,
          [=](RunOptions& options, const std::string& text) {
            options.*member = positive(text, dimension) / per_shown;
          },
          [=](const RunOptions& options) {
            const auto& value = options.*member;
            return value ? show_number(*value, unit) : std::string("not given");
          }};
}

void set_seed(RunOptions& options, const std::string& text) {
  const std::optional<long long> seed = parse_whole_number(text);
  if (!seed || *seed < 0)
    throw InputError({fmt::format("'{}' is no seed", printable(text)), "a whole number from 0 on"});
  options.seed = static_cast<std::uint64_t>(*seed);
}

/// The options of the estimators beyond the straight line.
void add_model_options(std::vector<RunOption>& table) {
  table.push_back(make_words(
      "opacity", "automatic",
      "curve-of-growth, line-centre or thin; automatic: the curve of growth where lines have widths",
      {"automatic", "curve-of-growth", "line-centre", "thin"}, &RunOptions::opacity));
  table.push_back(make_words("intervals", "profile",
                             "profile (of the likelihood), curvature (at the best fit) or posterior",
                             {"profile", "curvature", "posterior"}, &RunOptions::intervals));
  table.push_back({"seed", "1", "where the draws from a posterior start: a whole number", set_seed,
                   [](const RunOptions& o) { return std::to_string(o.seed); }});
  table.push_back({"samples", "no", "keep draws from the posterior and write them: yes or no",
                   [](RunOptions& o, const std::string& text) { o.keep_samples = yes_or_no(text); },
                   [](const RunOptions& o) { return std::string(o.keep_samples ? "yes" : "no"); }});
  table.push_back({"components", "1", "how many components, each with its own T and N: 1 or 2",
                   [](RunOptions& o, const std::string& text) {
                     o.components = one_of(text, {"1", "2"}) == "2" ? 2 : 1;
                   },
                   [](const RunOptions& o) { return std::to_string(o.components); }});
  table.push_back({"isomers", "together", "together, or apart: a column density for each spin isomer",
                   [](RunOptions& o, const std::string& text) {
                     o.isomers_apart = one_of(text, {"together", "apart"}) == "apart";
                   },
                   [](const RunOptions& o) { return std::string(o.isomers_apart ? "apart" : "together"); }});
  table.push_back(make_number("column_density", "1e14 cm-2", "take this column density and fit T only",
                              Dimension::column_density, &RunOptions::column_density_per_cm2, 1e4, "cm-2"));
  table.push_back(make_range("temperature_range", "5 K..300 K", "temperatures that are looked at",
                             Dimension::temperature, &RunOptions::temperature_range_k, 1.0, "K"));
  table.push_back(make_prior("temperature_prior", "40 K +/- 5 K", "what is known of T beforehand",
                             Dimension::temperature, &RunOptions::temperature_prior_k, 1.0, "K"));
  table.push_back(make_range("source_size_range", "0.5 arcsec..30 arcsec",
                             "sizes that are looked at, where it is free", Dimension::angle,
                             &RunOptions::source_size_range_rad, kRadPerArcsec, "arcsec"));
  table.push_back(make_prior("source_size_prior", "4 arcsec +/- 1 arcsec",
                             "what is known of a free size beforehand", Dimension::angle,
                             &RunOptions::source_size_prior_rad, kRadPerArcsec, "arcsec"));
  table.push_back({"compare_models", "no", "set the models side by side that these lines allow: yes or no",
                   [](RunOptions& o, const std::string& text) { o.compare_models = yes_or_no(text); },
                   [](const RunOptions& o) { return std::string(o.compare_models ? "yes" : "no"); }});
  table.push_back(
      {"collisions", "FILE", "file of collision rates, for critical densities",
       [](RunOptions& o, const std::string& text) { o.collisions = std::string(trimmed(text)); },
       [](const RunOptions& o) { return o.collisions.empty() ? std::string("not given") : o.collisions; }});
  table.push_back(make_number("density", "1e5 cm-3",
                              "density of the collision partner, to hold against critical densities",
                              Dimension::number_density, &RunOptions::density_per_cm3, 1e6, "cm-3"));
}

std::vector<RunOption> make_table() {
  std::vector<RunOption> table;
  table.push_back(make_words("method", "line",
                             "how N and T are estimated: line, opacity-line, likelihood, robust",
                             {"line", "opacity-line", "likelihood", "robust"}, &RunOptions::method));
  table.push_back(make({"temperature", "45 K", "take this temperature and fit N only", Dimension::temperature,
                        &RunOptions::temperature_k, 1.0, "K"}));
  table.push_back({"background", "2.7255 K",
                   "temperature of the background behind the lines; 0 K for none, or free", set_background,
                   [](const RunOptions& o) {
                     return o.background_free ? std::string("free") : show_number(o.background_k, "K");
                   }});
  table.push_back({"source_size", "8 arcsec",
                   "size of the source, for beam filling: a size, free or none (f = 1)", set_source_size,
                   show_source_size});
  table.push_back({"source_shape", "gaussian", "gaussian (size is the FWHM) or disc (size is the diameter)",
                   [](RunOptions& o, const std::string& text) {
                     o.source_shape = one_of(text, {"gaussian", "disc"}) == "disc" ? SourceShape::disc
                                                                                   : SourceShape::gaussian;
                   },
                   [](const RunOptions& o) {
                     return std::string(o.source_shape == SourceShape::disc ? "disc" : "gaussian");
                   }});
  table.push_back(make({"beam", "27 arcsec", "FWHM of the beam, for rows that give none", Dimension::angle,
                        &RunOptions::beam_fwhm_rad, kRadPerArcsec, "arcsec"}));
  table.push_back(make({"line_width", "3.2 km/s", "FWHM of the lines, for rows that give none; for opacities",
                        Dimension::velocity, &RunOptions::fwhm_km_s, 1.0, "km/s"}));
  table.push_back({"calibration_error", "10 %", "calibration error, for rows that give none",
                   set_calibration_error, show_calibration_error});
  table.push_back({"calibration_shared", "yes",
                   "rows without a calibration group share one factor: yes or no",
                   [](RunOptions& o, const std::string& text) { o.calibration_shared = yes_or_no(text); },
                   [](const RunOptions& o) { return std::string(o.calibration_shared ? "yes" : "no"); }});
  table.push_back(make({"forward_efficiency", "0.95", "for antenna temperatures in rows that give none",
                        Dimension::dimensionless, &RunOptions::forward_efficiency, 1.0, ""}));
  table.push_back(make({"main_beam_efficiency", "0.78", "for antenna temperatures in rows that give none",
                        Dimension::dimensionless, &RunOptions::main_beam_efficiency, 1.0, ""}));
  table.push_back(make_labels("only", "fit these transitions only", &RunOptions::only_lines));
  table.push_back(make_labels("without", "leave these transitions out", &RunOptions::without_lines));
  table.push_back(make_range("upper_energy", "0 K..300 K", "fit lines with E_u/k in this range only",
                             Dimension::temperature, &RunOptions::upper_energy_k, 1.0, "K"));
  table.push_back(make_range("frequency", "80 GHz..116 GHz", "fit lines in this range only",
                             Dimension::frequency, &RunOptions::frequency_hz, 1e9, "GHz"));
  table.push_back({"least_snr", "3", "leave out lines with W/sigma below this", set_least_snr,
                   [](const RunOptions& o) { return show_number(o.least_snr, ""); }});
  table.push_back({"frequency_tolerance", "0.5 MHz", "how far a frequency in the table may be off",
                   set_tolerance,
                   [](const RunOptions& o) { return show_number(o.frequency_tolerance_hz / 1e6, "MHz"); }});
  add_model_options(table);
  table.push_back({"source", "NAME", "which source of a table that holds several",
                   [](RunOptions& o, const std::string& text) { o.source = text; },
                   [](const RunOptions& o) { return o.source ? *o.source : std::string("not given"); }});
  return table;
}

}  // namespace

const std::vector<RunOption>& run_option_table() {
  static const std::vector<RunOption> table = make_table();
  return table;
}

const RunOption* find_run_option(const std::string& key) {
  for (const RunOption& option : run_option_table()) {
    if (option.key == key) return &option;
  }
  return nullptr;
}

void set_run_option(RunOptions& options, const std::string& key, const std::string& value) {
  const RunOption* option = find_run_option(key);
  if (option == nullptr) {
    std::vector<std::string> keys;
    for (const RunOption& known : run_option_table()) keys.push_back(known.key);
    throw InputError({fmt::format("there is no option '{}'", printable(key)),
                      "one of: " + listed(keys, keys.size()), did_you_mean(key, keys)});
  }
  try {
    option->set(options, value);
  } catch (const InputError& error) {
    const Complaint& complaint = error.complaint();
    throw InputError({key + ": " + complaint.found, complaint.expected, complaint.advice});
  }
}

std::vector<std::pair<std::string, std::string>> shown(const RunOptions& options) {
  std::vector<std::pair<std::string, std::string>> pairs;
  for (const RunOption& option : run_option_table()) pairs.emplace_back(option.key, option.show(options));
  return pairs;
}

}  // namespace trotline
