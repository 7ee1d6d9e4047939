#include <trotline/analysis/line_matching.hpp>

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <set>

#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>

namespace trotline {
namespace {

std::string described(const Species& species, std::size_t index) {
  const Transition& transition = species.transitions[index];
  return fmt::format("{} at {:.6f} GHz", transition_label(species, transition), transition.frequency_hz / 1e9);
}

std::string candidates(const Species& species, const std::vector<std::size_t>& indices) {
  std::vector<std::string> names;
  for (const std::size_t index : indices) names.push_back(described(species, index));
  return listed(names, 6);
}

/// The transition nearest in frequency; species has at least one.
std::size_t nearest_transition(const Species& species, double frequency_hz) {
  const auto distance = [&](const Transition& t) { return std::abs(t.frequency_hz - frequency_hz); };
  const auto nearest = std::min_element(species.transitions.begin(), species.transitions.end(),
                                        [&](const auto& a, const auto& b) { return distance(a) < distance(b); });
  return static_cast<std::size_t>(nearest - species.transitions.begin());
}

std::size_t match_frequency(const IntensityRow& row, const Place& place, const Species& species,
                            double tolerance_hz) {
  const double frequency_hz = *row.frequency_hz;
  const auto found = transitions_near(species, frequency_hz, tolerance_hz);
  if (found.size() == 1) return found.front();
  const std::string where = fmt::format("{:g} MHz of {:.6f} GHz", tolerance_hz / 1e6, frequency_hz / 1e9);
  if (found.empty()) {
    const std::size_t nearest = nearest_transition(species, frequency_hz);
    const double away_mhz = (species.transitions[nearest].frequency_hz - frequency_hz) / 1e6;
    throw InputError(place, {fmt::format("{} has no transition within {}", species.name, where),
                             "a rest frequency of the species",
                             fmt::format("the nearest is {}, {:+.3f} MHz away", described(species, nearest),
                                         away_mhz)});
  }
  throw InputError(place, {fmt::format("{} has {} transitions within {}", species.name, found.size(), where),
                           "one", "name it in a column 'transition': " + candidates(species, found)});
}

std::size_t match_label(const IntensityRow& row, const Place& place, const Species& species,
                        double tolerance_hz) {
  auto found = transitions_labelled(species, *row.transition);
  if (found.empty()) {
    std::vector<std::string> labels;
    for (const Transition& transition : species.transitions) {
      if (labels.size() < 2000) labels.push_back(transition_label(species, transition));
    }
    throw InputError(place, {fmt::format("{} has no transition '{}'", species.name, printable(*row.transition)),
                             fmt::format("a label such as '{}'", labels.front()),
                             did_you_mean(normalised_label(*row.transition), labels)});
  }
  if (!row.frequency_hz) {
    if (found.size() == 1) return found.front();
    throw InputError(place, {fmt::format("{} has {} transitions '{}'", species.name, found.size(),
                                         printable(*row.transition)),
                             "one", "give the frequency too: " + candidates(species, found)});
  }
  const auto distance_hz = [&](std::size_t i) {
    return std::abs(species.transitions[i].frequency_hz - *row.frequency_hz);
  };
  const std::size_t best = *std::min_element(found.begin(), found.end(), [&](std::size_t a, std::size_t b) {
    return distance_hz(a) < distance_hz(b);
  });
  if (distance_hz(best) <= tolerance_hz) return best;
  throw InputError(place, {fmt::format("transition '{}' and frequency {:.6f} GHz do not belong together",
                                       printable(*row.transition), *row.frequency_hz / 1e9),
                           fmt::format("{} (within {:g} MHz)", described(species, best), tolerance_hz / 1e6)});
}

bool is_same_species(const std::string& name, const Species& species) {
  return lower_case(trimmed(name)) == lower_case(species.name) ||
         lower_case(trimmed(name)) == lower_case(species.formula);
}

/// The rows of the one source that is meant, and its name.
std::vector<const IntensityRow*> rows_of_source(const IntensityTable& table,
                                                const std::vector<const IntensityRow*>& rows,
                                                const std::optional<std::string>& wanted, std::string& source) {
  std::vector<std::string> sources;
  for (const IntensityRow* row : rows) {
    const std::string name = row->source.value_or("");
    if (std::find(sources.begin(), sources.end(), name) == sources.end()) sources.push_back(name);
  }
  std::vector<std::string> readable;
  for (const std::string& name : sources) readable.push_back(name.empty() ? "(no name)" : printable(name));
  if (!wanted && sources.size() > 1) {
    throw InputError(Place{table.file}, {fmt::format("holds {} sources", sources.size()), "one",
                                         "choose one with the option 'source': " + listed(readable)});
  }
  source = wanted.value_or(sources.empty() ? "" : sources.front());
  std::vector<const IntensityRow*> chosen;
  const bool nameless = sources.size() == 1 && sources.front().empty();  // then the option gives the name
  for (const IntensityRow* row : rows) {
    if (nameless || row->source.value_or("") == source) chosen.push_back(row);
  }
  if (chosen.empty()) {
    throw InputError(Place{table.file}, {fmt::format("holds no row of the source '{}'", printable(source)),
                                         "one of: " + listed(readable)});
  }
  return chosen;
}

}  // namespace

MatchedTable match_rows(const IntensityTable& table, const Species& species, double frequency_tolerance_hz,
                        const std::optional<std::string>& wanted_source) {
  if (species.transitions.empty()) {
    throw InputError(Place{species.file}, {"the species has no transition", "at least one"});
  }
  MatchedTable matched;
  std::vector<const IntensityRow*> rows;
  std::set<std::string> others;
  for (const IntensityRow& row : table.rows) {
    if (row.species && !is_same_species(*row.species, species)) {
      others.insert(printable(*row.species));
    } else {
      rows.push_back(&row);
    }
  }
  if (rows.empty()) {
    throw InputError(Place{table.file}, {fmt::format("holds no row of the species {}", species.name),
                                         "at least one", "species there: " + listed({others.begin(), others.end()})});
  }
  if (!others.empty()) {
    matched.warnings.push_back(fmt::format("{} rows of other species were passed over ({})",
                                           table.rows.size() - rows.size(), listed({others.begin(), others.end()})));
  }
  const auto chosen = rows_of_source(table, rows, wanted_source, matched.source);
  if (chosen.size() > kMostRowsOfASource) {
    throw InputError(Place{table.file}, {fmt::format("holds {} rows of one source and species", chosen.size()),
                                         fmt::format("at most {}", kMostRowsOfASource),
                                         "name the sources in a column 'source' if there are several"});
  }
  for (const IntensityRow* row : chosen) {
    const Place place{table.file, row->line_number};
    const std::size_t transition = row->transition ? match_label(*row, place, species, frequency_tolerance_hz)
                                                   : match_frequency(*row, place, species, frequency_tolerance_hz);
    matched.rows.push_back({*row, transition});
  }
  return matched;
}

}  // namespace trotline
