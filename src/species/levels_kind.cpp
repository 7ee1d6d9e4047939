#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>
#include <set>
#include <unordered_map>

#include <trotline/base/text.hpp>
#include <trotline/physics/constants.hpp>

#include "species_kinds.hpp"

namespace trotline {
namespace {

using LevelIndex = std::unordered_map<std::string, std::uint32_t>;

Level read_level(const FileMap& map) {
  Level level;
  level.label = printable(map.text("label"));
  level.energy_k = map.energy_k("energy");
  if (level.energy_k < 0.0)
    map.refuse("energy", {"the energy is below 0", "energies above the lowest level"});
  level.degeneracy = map.number("degeneracy");
  if (!(level.degeneracy > 0.0))
    map.refuse("degeneracy", {"the degeneracy is not above 0", "a number above 0"});
  level.spin = printable(map.optional_text("spin", ""));
  map.finish();
  return level;
}

/// Labels must stay apart when they are compared, not only when they are printed.
LevelIndex index_of(const std::vector<Level>& levels, const FileMap& group) {
  LevelIndex index;
  for (std::uint32_t i = 0; i < levels.size(); ++i) {
    if (!index.emplace(normalised_label(levels[i].label), i).second) {
      group.refuse(
          "list", {fmt::format("two levels have the label '{}'", levels[i].label), "a label for each level"});
    }
  }
  return index;
}

LevelSumOptions read_level_list(const FileMap& file, Species& species) {
  const FileMap group = file.map("levels");
  for (const FileMap& map : group.maps("list")) species.levels.push_back(read_level(map));
  std::stable_sort(species.levels.begin(), species.levels.end(),
                   [](const Level& a, const Level& b) { return a.energy_k < b.energy_k; });
  const double lowest_k = species.levels.front().energy_k;
  if (lowest_k != 0.0) {
    group.refuse("list", {fmt::format("the lowest level has the energy {:g} K", lowest_k),
                          "energies that count from the lowest level, which has 0 K"});
  }
  LevelSumOptions options;
  if (group.has("complete_to")) {
    const bool all = group.text("complete_to") == "all";
    options.complete_to_k = all ? std::numeric_limits<double>::infinity() : group.energy_k("complete_to");
    if (!(*options.complete_to_k > 0.0))
      group.refuse("complete_to", {"the energy is not above 0", "e.g. '300 K'"});
  }
  cite(group, "levels", species);
  group.finish();
  return options;
}

std::uint32_t find_level(const FileMap& map, const std::string& key, const LevelIndex& index) {
  const std::string label = map.text(key);
  const auto found = index.find(normalised_label(label));
  if (found != index.end()) return found->second;
  std::vector<std::string> known;
  for (const auto& entry : index) known.push_back(entry.first);
  std::sort(known.begin(), known.end());
  map.refuse(key, {fmt::format("there is no level '{}'", printable(label)),
                   fmt::format("one of {}", listed(known)), did_you_mean(label, known)});
}

/// The frequency must be that of the two energies, but for the digits with which energies are printed.
void check_frequency(const FileMap& map, const Transition& line, const std::vector<Level>& levels) {
  constexpr double kDigitsOfEnergyK = 0.05;
  const double photon_k = line.frequency_hz * constants::kKelvinPerHz;
  const double step_k = levels[line.upper].energy_k - levels[line.lower].energy_k;
  if (std::abs(photon_k - step_k) <= 0.01 * photon_k + kDigitsOfEnergyK) return;
  map.refuse("frequency",
             {fmt::format("the frequency is that of a step of {:.4g} K, but level '{}' lies {:.4g} K "
                          "above '{}'",
                          photon_k, levels[line.upper].label, step_k, levels[line.lower].label),
              "a frequency and energies that agree within 1 % and 0.05 K"});
}

Transition read_transition(const FileMap& map, const Species& species, const LevelIndex& index) {
  Transition line;
  line.upper = find_level(map, "upper", index);
  line.lower = find_level(map, "lower", index);
  line.frequency_hz = map.quantity("frequency", Dimension::frequency);
  if (!(line.frequency_hz > 0.0))
    map.refuse("frequency", {"the frequency is not above 0", "e.g. '115.2712 GHz'"});
  line.frequency_sigma_hz = map.optional_quantity("uncertainty", Dimension::frequency, 0.0);
  if (line.frequency_sigma_hz < 0.0)
    map.refuse("uncertainty", {"the uncertainty is below 0", "e.g. '0.5 kHz'"});
  line.einstein_a_per_s = map.quantity("einstein_a", Dimension::rate);
  if (!(line.einstein_a_per_s > 0.0)) map.refuse("einstein_a", {"A is not above 0", "e.g. '7.2e-8 s-1'"});
  check_frequency(map, line, species.levels);
  map.finish();
  return line;
}

void read_transitions(const FileMap& file, const LevelIndex& index, Species& species) {
  const FileMap group = file.map("transitions");
  std::set<std::pair<std::uint32_t, std::uint32_t>> seen;
  for (const FileMap& map : group.maps("list")) {
    const Transition line = read_transition(map, species, index);
    if (!seen.emplace(line.upper, line.lower).second) {
      map.refuse("upper",
                 {fmt::format("the transition {} stands in the list twice", transition_label(species, line)),
                  "each transition once"});
    }
    species.transitions.push_back(line);
  }
  std::stable_sort(species.transitions.begin(), species.transitions.end(),
                   [](const Transition& a, const Transition& b) { return a.frequency_hz < b.frequency_hz; });
  cite(group, "transitions", species);
  group.finish();
}

}  // namespace

void read_levels(const FileMap& file, Species& species) {
  LevelSumOptions options = read_level_list(file, species);
  read_transitions(file, index_of(species.levels, file.map("levels")), species);
  options.modes = read_vibration(file, species);
  StatedPartition stated = read_partition(file, species);
  settle_partition(stated, options, species);
}

}  // namespace trotline
