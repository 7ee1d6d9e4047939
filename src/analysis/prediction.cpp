#include <trotline/analysis/prediction.hpp>

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <numbers>
#include <numeric>

#include <trotline/base/errors.hpp>
#include <trotline/excitation/forward_model.hpp>
#include <trotline/physics/angle.hpp>
#include <trotline/physics/planck.hpp>

namespace trotline {
namespace {

constexpr double kMostLines = 20000;  // in the bands: beyond, a band is meant to be narrower
constexpr std::size_t kSizesBeyond = 3;
constexpr std::size_t kLeastSizes = 8;

[[noreturn]] void refuse(const std::string& found, const std::string& expected) {
  throw InputError({found, expected});
}

void check(const Species& species, const PredictionOptions& options) {
  if (!options.temperature_k) refuse("no temperature is given", "one, as in --temperature \"35 K\"");
  if (!options.column_density_per_cm2) {
    refuse("no column density is given", "one, as in --column-density \"1e14 cm-2\"");
  }
  if (!options.fwhm_km_s) refuse("no width of the lines is given", "one, as in --line-width \"3 km/s\"");
  if (options.beam_fwhm_rad && options.dish_m) refuse("a beam and a dish are given", "one of them");
  if (options.source_size_rad && !options.beam_fwhm_rad && !options.dish_m) {
    refuse("a source size is given without a beam", "--beam or --dish beside it");
  }
  if (options.rms_k && options.time_s) refuse("an rms and a time are given", "one of them");
  const bool has_channel = options.channel_km_s || options.channel_hz;
  if ((options.rms_k || options.time_s) && !has_channel) {
    refuse("noise is given without the width of a channel", "one, as in --channel \"0.5 km/s\"");
  }
  if (options.choose > 0 && !options.rms_k && !options.time_s) {
    refuse("lines cannot be chosen without their noise", "--rms, or --time with --system-temperature");
  }
  const PartitionFunction& q = *species.partition;
  if (*options.temperature_k < q.lowest_k() || *options.temperature_k > q.highest_k()) {
    refuse(fmt::format("Q of {} at {:g} K is not known", species.name, *options.temperature_k),
           fmt::format("a temperature from {:g} K to {:g} K", q.lowest_k(), q.highest_k()));
  }
}

/// A line and the band in which it would be observed.
struct Candidate {
  const Transition* transition;
  std::optional<double> system_temperature_k;
};

std::vector<Candidate> lines_in_bands(const Species& species, const PredictionOptions& options) {
  std::vector<Candidate> found;
  for (const Transition& line : species.transitions) {
    if (!(line.einstein_a_per_s > 0.0)) continue;
    if (options.bands.empty()) found.push_back({&line, options.system_temperature_k});
    for (const ObservingBand& band : options.bands) {
      if (line.frequency_hz < band.frequency_hz.low || line.frequency_hz > band.frequency_hz.high) continue;
      found.push_back({&line, band.system_temperature_k ? band.system_temperature_k : options.system_temperature_k});
      break;
    }
  }
  if (found.empty()) {
    refuse(fmt::format("{} has no line in these bands", species.name),
           fmt::format("a band between {:.4f} and {:.4f} GHz", species.transitions.front().frequency_hz / 1e9,
                       species.transitions.back().frequency_hz / 1e9));
  }
  if (static_cast<double>(found.size()) > kMostLines) {
    refuse(fmt::format("{} has {} lines in these bands", species.name, found.size()),
           fmt::format("at most {:g}; give narrower --bands", kMostLines));
  }
  return found;
}

double beam_arcsec(const PredictionOptions& options, double frequency_hz) {
  if (options.beam_fwhm_rad) return *options.beam_fwhm_rad / kRadPerArcsec;
  if (options.dish_m) {
    return kBeamFactor * constants::kLightMPerS / frequency_hz / *options.dish_m / kRadPerArcsec;
  }
  return 0.0;
}

double km_s_apart(double frequency_hz, double other_hz) {
  return (frequency_hz - other_hz) / other_hz * constants::kLightMPerS * 1e-3;
}

/// The lines as the forward model takes them; neighbours that cannot be told apart share a datum.
std::vector<ModelLine> model_lines(const std::vector<Candidate>& candidates, const Species& species,
                                   const PredictionOptions& options) {
  std::vector<ModelLine> lines;
  int datum = -1;
  double first_hz = 0.0;
  for (std::size_t i = 0; i < candidates.size(); ++i) {
    const Transition& transition = *candidates[i].transition;
    const bool joins = i > 0 && km_s_apart(transition.frequency_hz, candidates[i - 1].transition->frequency_hz) <
                                    kBlendWidths * *options.fwhm_km_s;
    if (!joins) {
      ++datum;
      first_hz = transition.frequency_hz;
    }
    const Level& upper = species.levels.at(transition.upper);
    ModelLine line;
    line.constants = {transition.frequency_hz, upper.energy_k, upper.degeneracy, transition.einstein_a_per_s};
    line.fwhm_km_s = *options.fwhm_km_s;
    line.beam_fwhm_arcsec = beam_arcsec(options, transition.frequency_hz);
    line.offset_km_s = -km_s_apart(transition.frequency_hz, first_hz);
    line.datum = datum;
    lines.push_back(line);
  }
  return lines;
}

ForwardModel model_of(std::vector<ModelLine> lines, const Species& species, const PredictionOptions& options) {
  const PartitionFunction& q = *species.partition;
  // A narrow table: only one temperature is asked for.
  const double low = std::max(q.lowest_k(), *options.temperature_k / 1.2);
  const double high = std::min(q.highest_k(), *options.temperature_k * 1.2);
  ForwardModelOptions model;
  model.source_shape = options.source_shape;
  return {std::move(lines), {std::make_shared<const TabulatedPartition>(q, low, high)}, model};
}

Eigen::VectorXd state_of(const ForwardModel& model, const PredictionOptions& options) {
  const StateLayout& layout = model.layout();
  Eigen::VectorXd state(layout.size());
  state[layout.ln_column(0)] = std::log(*options.column_density_per_cm2);
  state[layout.ln_temperature(0)] = std::log(*options.temperature_k);
  state[layout.ln_size(0)] = options.source_size_rad ? std::log(*options.source_size_rad / kRadPerArcsec)
                                                     : std::numeric_limits<double>::infinity();
  state[layout.background()] = options.background_k;
  return state;
}

double peak_k(const ModelLine& line, const LinePrediction& prediction, const PredictionOptions& options) {
  const double nu = line.constants.frequency_hz;
  return prediction.filling * -std::expm1(-prediction.optical_depth) *
         (planck_equivalent_temperature_k(nu, *options.temperature_k) -
          planck_equivalent_temperature_k(nu, options.background_k));
}

/// Noise and time of one measurement, after the radiometer equation.
void add_noise(PredictedLine& line, const std::optional<double>& system_temperature_k,
               const PredictionOptions& options) {
  if (!options.rms_k && !options.time_s) return;
  const double frequency_hz = line.frequency_mhz * 1e6;
  const double light_km_s = constants::kLightMPerS * 1e-3;
  const double channel_hz =
      options.channel_hz ? *options.channel_hz : *options.channel_km_s / light_km_s * frequency_hz;
  const double channel_km_s = channel_hz / frequency_hz * light_km_s;
  if (options.time_s && !system_temperature_k) {
    refuse("a time is given without the system temperature",
           "--system-temperature, or 'at' in --bands, as in \"84 GHz..116 GHz at 120 K\"");
  }
  if (system_temperature_k) {
    const double scaled_k = options.noise_factor * *system_temperature_k / std::sqrt(channel_hz);
    line.rms_k = options.rms_k ? *options.rms_k : scaled_k / std::sqrt(*options.time_s);
    line.time_s = options.time_s ? *options.time_s : std::pow(scaled_k / *options.rms_k, 2);
  } else {
    line.rms_k = *options.rms_k;
  }
  line.intensity_error_k_km_s = line.rms_k * std::sqrt(channel_km_s * kWindowWidths * *options.fwhm_km_s);
  line.snr = line.intensity_k_km_s / line.intensity_error_k_km_s;
}

std::vector<PredictedLine> predicted_lines(const std::vector<Candidate>& candidates, const ForwardModel& model,
                                           const Species& species, const PredictionOptions& options) {
  const Eigen::VectorXd state = state_of(model, options);
  ModelWorkspace workspace = model.workspace();
  model.evaluate_with_slopes(state, workspace);
  const auto shares = model.predictions(state, 0);
  std::vector<PredictedLine> data(static_cast<std::size_t>(model.data()));
  std::vector<double> strongest(data.size(), -1.0);
  for (std::size_t i = 0; i < candidates.size(); ++i) {
    const ModelLine& line = model.lines()[i];
    const auto datum = static_cast<std::size_t>(line.datum);
    PredictedLine& row = data[datum];
    const Transition& transition = *candidates[i].transition;
    const std::string label = transition_label(species, transition);
    if (std::abs(shares[i].intensity_k_km_s) <= strongest[datum]) {
      row.blended_with.push_back(label);
      continue;
    }
    if (strongest[datum] >= 0.0) row.blended_with.push_back(row.transition);
    strongest[datum] = std::abs(shares[i].intensity_k_km_s);
    row.transition = label;
    row.frequency_mhz = transition.frequency_hz / 1e6;
    row.upper_energy_k = line.constants.upper_energy_k;
    row.upper_degeneracy = line.constants.upper_degeneracy;
    row.einstein_a_s1 = line.constants.einstein_a_per_s;
    if (line.beam_fwhm_arcsec > 0.0) row.beam_fwhm_arcsec = line.beam_fwhm_arcsec;
    row.filling = shares[i].filling;
    row.optical_depth = shares[i].optical_depth;
    row.peak_k = peak_k(line, shares[i], options);
    const auto d = static_cast<Eigen::Index>(datum);
    row.intensity_k_km_s = workspace.intensity_k_km_s[d];
    row.by_ln_column = workspace.slopes(d, model.layout().ln_column(0));
    row.by_ln_temperature = workspace.slopes(d, model.layout().ln_temperature(0));
    add_noise(row, candidates[i].system_temperature_k, options);
  }
  return data;
}

std::vector<Sensitivity> sensitivities(const std::vector<PredictedLine>& lines, const PredictionOptions& options) {
  std::vector<Sensitivity> all;
  for (const PredictedLine& line : lines) {
    const double calibration = options.calibration_error * line.intensity_k_km_s;
    Sensitivity one{line.by_ln_column, line.by_ln_temperature, 0.0, line.intensity_error_k_km_s};
    if (options.calibration_shared) {
      one.by_shared_calibration = calibration;
    } else {
      one.sigma_k_km_s = std::hypot(one.sigma_k_km_s, calibration);
    }
    all.push_back(one);
  }
  return all;
}

ExpectedAnswer answer_of(const ExpectedErrors& errors, const PredictionOptions& options) {
  return {errors.ln_temperature * *options.temperature_k, errors.ln_column / std::numbers::ln10};
}

std::vector<std::size_t> by_brightness(const std::vector<PredictedLine>& lines) {
  std::vector<std::size_t> order(lines.size());
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::stable_sort(order.begin(), order.end(), [&](std::size_t a, std::size_t b) {
    return lines[a].intensity_k_km_s > lines[b].intensity_k_km_s;
  });
  return order;
}

/// The expected answer of all lines, of the best sets of every size, and the set that was asked for.
void choose(Prediction& prediction, const PredictionOptions& options) {
  const std::vector<Sensitivity> all = sensitivities(prediction.lines, options);
  std::vector<std::size_t> order = by_brightness(prediction.lines);
  prediction.all_lines = answer_of(expected_errors(all, order), options);
  const std::size_t most =
      std::min(all.size(), std::max(options.choose > 0 ? options.choose + kSizesBeyond : 0, kLeastSizes));
  for (std::size_t count = 2; count <= most; ++count) {
    const LineChoice best = choose_lines(all, count, options.aim);
    const std::vector<std::size_t> brightest(order.begin(), order.begin() + static_cast<std::ptrdiff_t>(count));
    prediction.sizes.push_back({count, answer_of(best.errors, options),
                                answer_of(expected_errors(all, brightest), options), best.is_exhaustive});
    if (count != options.choose) continue;
    for (const std::size_t i : best.lines) prediction.lines[i].chosen = true;
    for (const std::size_t i : brightest) prediction.lines[i].among_brightest = true;
  }
}

void warn(Prediction& prediction, const PredictionOptions& options, const Species& species) {
  prediction.warnings.insert(prediction.warnings.end(), species.warnings.begin(), species.warnings.end());
  const auto opaque = std::count_if(prediction.lines.begin(), prediction.lines.end(),
                                    [](const PredictedLine& line) { return line.optical_depth > 1.0; });
  if (opaque > 0) {
    prediction.warnings.push_back(fmt::format(
        "{} of the lines shown have an optical depth above 1: they are broader than the width given, and their "
        "noise is somewhat larger than stated", opaque));
  }
  const bool faint = std::any_of(prediction.lines.begin(), prediction.lines.end(), [](const PredictedLine& line) {
    return line.intensity_k_km_s < 0.0;
  });
  if (faint) prediction.warnings.emplace_back("some lines stand in absorption before the background");
  const bool approximate = std::any_of(prediction.sizes.begin(), prediction.sizes.end(),
                                       [&](const ChoiceSize& s) { return s.count == options.choose && !s.is_exhaustive; });
  if (approximate) {
    prediction.warnings.emplace_back(
        "there are too many sets of lines to try them all: the choice is one that no exchange of a line improves");
  }
}

}  // namespace

Prediction predict(const Species& species, const PredictionOptions& options) {
  check(species, options);
  const std::vector<Candidate> candidates = lines_in_bands(species, options);
  const ForwardModel model = model_of(model_lines(candidates, species, options), species, options);
  Prediction prediction;
  prediction.species = species.name;
  prediction.formula = species.formula;
  prediction.temperature_k = *options.temperature_k;
  prediction.column_density_per_cm2 = *options.column_density_per_cm2;
  prediction.partition_function = species.partition->at(*options.temperature_k).q;
  prediction.aim = options.aim;
  prediction.choose = options.choose;
  prediction.has_noise = options.rms_k || options.time_s;
  for (PredictedLine& line : predicted_lines(candidates, model, species, options)) {
    const bool shows = prediction.has_noise ? std::abs(line.snr) >= options.least_snr
                                            : line.intensity_k_km_s != 0.0;
    if (shows) {
      prediction.lines.push_back(std::move(line));
    } else {
      ++prediction.lines_below;
    }
  }
  if (options.choose > prediction.lines.size()) {
    refuse(fmt::format("{} lines are to be chosen, and {} reach S/N {:g}", options.choose, prediction.lines.size(),
                       options.least_snr),
           "fewer lines, wider bands or less noise");
  }
  if (prediction.has_noise && !prediction.lines.empty()) choose(prediction, options);
  warn(prediction, options, species);
  for (const PredictionOption& option : prediction_option_table()) {
    prediction.options.emplace_back(option.key, option.show(options));
  }
  prediction.species_file = species.file;
  for (const Citation& c : species.citations) prediction.data_sources.push_back(c.what + ": " + c.from);
  return prediction;
}

}  // namespace trotline
