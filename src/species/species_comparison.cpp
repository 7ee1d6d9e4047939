#include <algorithm>
#include <cmath>
#include <limits>
#include <unordered_map>
#include <vector>

#include <trotline/species/species_comparison.hpp>

namespace trotline {
namespace {

using LinesByLabel = std::unordered_map<std::string, const Transition*>;

/// Lines whose label stands for two are left out: which is which cannot be told.
LinesByLabel lines_by_label(const Species& species) {
  LinesByLabel lines;
  for (const Transition& line : species.transitions) {
    const auto [place, is_new] = lines.emplace(normalised_label(transition_label(species, line)), &line);
    if (!is_new) place->second = nullptr;
  }
  std::erase_if(lines, [](const auto& entry) { return entry.second == nullptr; });
  return lines;
}

/// The frequencies that both cover.
struct Overlap {
  double low_hz;
  double high_hz;
  [[nodiscard]] bool holds(const Transition& line) const {
    return line.frequency_hz >= low_hz && line.frequency_hz <= high_hz;
  }
};

Overlap overlap_of(const Species& first, const Species& second) {
  if (first.transitions.empty() || second.transitions.empty()) return {1.0, 0.0};
  return {std::max(first.transitions.front().frequency_hz, second.transitions.front().frequency_hz),
          std::min(first.transitions.back().frequency_hz, second.transitions.back().frequency_hz)};
}

std::size_t missing_from(const LinesByLabel& lines, const LinesByLabel& others, const Overlap& overlap) {
  return static_cast<std::size_t>(std::count_if(lines.begin(), lines.end(), [&](const auto& entry) {
    return overlap.holds(*entry.second) && !others.contains(entry.first);
  }));
}

void settle_ratios(std::vector<double> ratios, SpeciesComparison& result) {
  if (ratios.empty()) {
    result.a_factor = std::numeric_limits<double>::quiet_NaN();
    return;
  }
  const auto middle = ratios.begin() + static_cast<std::ptrdiff_t>(ratios.size() / 2);
  std::nth_element(ratios.begin(), middle, ratios.end());
  result.a_factor = *middle;
  for (const double ratio : ratios) {
    result.a_spread = std::max(result.a_spread, std::abs(ratio / result.a_factor - 1.0));
  }
}

}  // namespace

SpeciesComparison compare(const Species& first, const Species& second) {
  SpeciesComparison result;
  result.partition = compare(*first.partition, *second.partition,
                             {2.725, 5.0, 9.375, 18.75, 37.5, 75.0, 150.0, 225.0, 300.0, 500.0, 1000.0});
  const LinesByLabel ours = lines_by_label(first);
  const LinesByLabel others = lines_by_label(second);
  const Overlap overlap = overlap_of(first, second);
  result.only_in_first = missing_from(ours, others, overlap);
  result.only_in_second = missing_from(others, ours, overlap);
  std::vector<double> ratios;
  for (const Transition& line : first.transitions) {
    const std::string label = transition_label(first, line);
    const auto match = others.find(normalised_label(label));
    if (match == others.end() || !ours.contains(match->first)) continue;
    const Transition& other = *match->second;
    ++result.common_lines;
    const double off_hz = std::abs(line.frequency_hz - other.frequency_hz);
    if (off_hz >= result.largest_frequency_step_hz) {
      result.largest_frequency_step_hz = off_hz;
      result.largest_frequency_label = label;
    }
    result.largest_energy_step_k =
        std::max(result.largest_energy_step_k,
                 std::abs(first.levels[line.upper].energy_k - second.levels[other.upper].energy_k));
    ratios.push_back(line.einstein_a_per_s / other.einstein_a_per_s);
  }
  settle_ratios(std::move(ratios), result);
  return result;
}

}  // namespace trotline
