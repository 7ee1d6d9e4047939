#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>

#include <trotline/base/text.hpp>
#include <trotline/physics/constants.hpp>

#include "species_kinds.hpp"

namespace trotline {
namespace {

constexpr double kUsualHighestTemperatureK = 1000.0;

VibrationalMode read_mode(const FileMap& map) {
  VibrationalMode mode;
  mode.energy_k = map.energy_k("energy");
  if (!(mode.energy_k > 0.0)) {
    map.refuse("energy", {"the energy of a vibrational mode is not above 0", "e.g. '520.4 cm-1'"});
  }
  mode.degeneracy = static_cast<int>(map.optional_whole("degeneracy", {1, 12}, 1));
  map.finish();
  return mode;
}

std::vector<double> read_spins(const FileMap& spin) {
  std::vector<double> spins;
  if (!spin.has("spins")) return spins;
  for (const std::string& text : spin.texts("spins")) {
    const bool halves = text.ends_with("/2");
    const auto value = parse_number(halves ? text.substr(0, text.size() - 2) : text);
    if (!value)
      spin.refuse("spins", {fmt::format("'{}' is no nuclear spin", printable(text)), "e.g. '1/2' or '1'"});
    spins.push_back(halves ? *value / 2.0 : *value);
  }
  return spins;
}

bool read_yes_or_no(const FileMap& map, const std::string& key) {
  const std::string written = map.optional_text(key, "no");
  if (written == "yes" || written == "true") return true;
  if (written == "no" || written == "false") return false;
  map.refuse(key, {fmt::format("'{}' is '{}'", key, printable(written)), "yes or no"});
}

}  // namespace

void cite(const FileMap& group, const std::string& what, Species& species) {
  species.citations.push_back({what, group.text("from")});
}

std::vector<VibrationalMode> read_vibration(const FileMap& file, Species& species) {
  std::vector<VibrationalMode> modes;
  if (!file.has("vibration")) return modes;
  const FileMap vibration = file.map("vibration");
  for (const FileMap& mode : vibration.maps("modes")) modes.push_back(read_mode(mode));
  cite(vibration, "vibrational fundamentals", species);
  vibration.finish();
  return modes;
}

std::shared_ptr<const SpinRule> read_spin(const FileMap& file, Species& species) {
  if (!file.has("spin")) return make_spin_rule({});
  const FileMap spin = file.map("spin");
  SpinRequest request;
  request.rule = spin.text("rule");
  const std::string axis = spin.optional_text("axis", "");
  if (axis.size() > 1) spin.refuse("axis", {fmt::format("the axis is '{}'", printable(axis)), "a, b or c"});
  request.axis = axis.empty() ? '\0' : axis.front();
  request.spins = read_spins(spin);
  request.state_is_antisymmetric = read_yes_or_no(spin, "state_is_antisymmetric");
  cite(spin, "spin weights", species);
  spin.finish();
  try {
    return make_spin_rule(request);
  } catch (const InputError& error) {
    spin.refuse("rule", error.complaint());
  }
}

Validity read_validity(const FileMap& file) {
  const FileMap holds = file.map("holds");
  Validity validity;
  validity.largest_j = static_cast<int>(holds.whole("largest_j", {1, kHighestJ}));
  validity.largest_k = static_cast<int>(holds.optional_whole("largest_k", {0, kHighestJ}, kHighestJ));
  validity.highest_frequency_hz = holds.optional_quantity("highest_frequency", Dimension::frequency,
                                                          std::numeric_limits<double>::infinity());
  if (!(validity.highest_frequency_hz > 0.0)) {
    holds.refuse("highest_frequency", {"the highest frequency is not above 0", "e.g. '1000 GHz'"});
  }
  validity.highest_temperature_k =
      holds.optional_quantity("highest_temperature", Dimension::temperature, kUsualHighestTemperatureK);
  if (!(validity.highest_temperature_k > kLowestTemperatureK)) {
    holds.refuse("highest_temperature", {"the highest temperature is not above 0.001 K", "e.g. '1000 K'"});
  }
  holds.finish();
  return validity;
}

RotorOptions options_for(const Validity& validity) {
  constexpr double kEnergyOverTemperature = 21.0;  // what lies above adds less than 1e-8 of Q
  RotorOptions options;
  options.highest_j = kHighestJ;
  options.highest_line_j = validity.largest_j;
  options.highest_frequency_hz = validity.highest_frequency_hz;
  options.highest_energy_hz =
      kEnergyOverTemperature * validity.highest_temperature_k / constants::kKelvinPerHz;
  return options;
}

RotorOptions options_for(const Validity& validity, double smallest_hz) {
  constexpr double kDistortion = 1.3;  // how far distortion may stretch J; a ladder that ends sooner says so
  RotorOptions options = options_for(validity);
  if (!(smallest_hz > 0.0)) return options;  // the model refuses such a constant by name
  const double j = kDistortion * std::sqrt(options.highest_energy_hz / smallest_hz);
  options.highest_j =
      std::min(std::max(static_cast<int>(std::min(j, 1e6)) + 2, validity.largest_j + 1), kHighestJ);
  return options;
}

void take_model(const RotorModel& model, const Validity& validity, std::vector<VibrationalMode> modes,
                Species& species) {
  const double zero_hz = model.levels.at(0).energy_hz;
  species.levels.reserve(model.levels.size());
  for (const RotorLevel& level : model.levels) {
    species.levels.push_back({label_of(level.quanta), (level.energy_hz - zero_hz) * constants::kKelvinPerHz,
                              level.degeneracy(), level.isomer});
  }
  for (const RotorTransition& line : model.transitions) {
    const int k = std::max(model.levels[line.upper].quanta.k, model.levels[line.lower].quanta.k);
    if (k > validity.largest_k || !(line.einstein_a_per_s > 0.0)) continue;
    species.transitions.push_back({line.upper, line.lower, line.frequency_hz, 0.0, line.einstein_a_per_s});
  }
  species.warnings.insert(species.warnings.end(), model.warnings.begin(), model.warnings.end());
  LevelSumOptions options;
  options.modes = std::move(modes);
  options.highest_k = validity.highest_temperature_k;
  options.complete_to_k = (model.complete_to_hz - zero_hz) * constants::kKelvinPerHz;
  species.partition = partition_function_from_levels(species.levels, options);
}

}  // namespace trotline
