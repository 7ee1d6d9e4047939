#include <trotline/report/species_report.hpp>

#include <fmt/format.h>

#include <nlohmann/json.hpp>

#include <trotline/base/errors.hpp>

namespace trotline {
namespace {

using Json = nlohmann::ordered_json;

std::vector<const Transition*> chosen_lines(const Species& species, const SpeciesQuery& query) {
  std::vector<const Transition*> lines;
  for (const Transition& transition : species.transitions) {
    const double f = transition.frequency_hz;
    if (!query.frequency_hz || (f >= query.frequency_hz->low && f <= query.frequency_hz->high)) {
      lines.push_back(&transition);
    }
  }
  return lines;
}

PartitionValue partition_at(const Species& species, double temperature_k) {
  const PartitionFunction& q = *species.partition;
  if (!(temperature_k >= q.lowest_k() && temperature_k <= q.highest_k())) {
    throw InputError({fmt::format("Q of {} at {:g} K is not known", species.name, temperature_k),
                      fmt::format("a temperature from {:g} K to {:g} K", q.lowest_k(), q.highest_k())});
  }
  return q.at(temperature_k);
}

std::string summary_text(const Species& species) {
  std::string text = fmt::format("{}   {} species, {} levels, {} transitions\n", species.name,
                                 name_of(species.kind), species.levels.size(), species.transitions.size());
  if (!species.transitions.empty()) {
    text += fmt::format("lines      {:.3f} to {:.3f} GHz\n", species.transitions.front().frequency_hz / 1e9,
                        species.transitions.back().frequency_hz / 1e9);
  }
  text += fmt::format("Q(T)       {}, for {:.4g} K to {:.4g} K\n", species.partition->description(),
                      species.partition->lowest_k(), species.partition->highest_k());
  text += fmt::format("file       {}\n", species.file);
  for (const Citation& citation : species.citations) {
    text += fmt::format("source     {}: {}\n", citation.what, citation.from);
  }
  for (const std::string& warning : species.warnings) text += fmt::format("note       {}\n", warning);
  return text;
}

std::string levels_text(const Species& species) {
  std::string text = fmt::format("{:<16}{:>16}{:>10}  {}\n", "level", "E/k [K]", "g", "spin");
  for (const Level& level : species.levels) {
    text += fmt::format("{:<16}{:>16.6f}{:>10g}  {}\n", level.label, level.energy_k, level.degeneracy, level.spin);
  }
  return text;
}

std::string lines_text(const Species& species, const SpeciesQuery& query) {
  std::string text = fmt::format("{:<22}{:>18}{:>14}{:>8}{:>14}\n", "transition", "frequency [MHz]", "E_u/k [K]",
                                 "g_u", "A [1/s]");
  for (const Transition* line : chosen_lines(species, query)) {
    const Level& upper = species.levels[line->upper];
    text += fmt::format("{:<22}{:>18.4f}{:>14.4f}{:>8g}{:>14.4e}\n", transition_label(species, *line),
                        line->frequency_hz / 1e6, upper.energy_k, upper.degeneracy, line->einstein_a_per_s);
  }
  return text;
}

std::string partition_text(const Species& species, const SpeciesQuery& query) {
  std::string text = fmt::format("{:>12}{:>16}{:>10}{:>18}\n", "T [K]", "Q", "lg Q", "dlnQ/dT [1/K]");
  for (const double t : query.partition_temperatures_k) {
    const PartitionValue value = partition_at(species, t);
    text += fmt::format("{:>12g}{:>16.6g}{:>10.4f}{:>18.6e}\n", t, value.q, std::log10(value.q), value.dlnq_dt);
  }
  return text;
}

Json levels_json(const Species& species) {
  Json levels = Json::array();
  for (const Level& level : species.levels) {
    levels.push_back({{"label", level.label},
                      {"energy_k", level.energy_k},
                      {"degeneracy", level.degeneracy},
                      {"spin", level.spin}});
  }
  return levels;
}

Json lines_json(const Species& species, const SpeciesQuery& query) {
  Json lines = Json::array();
  for (const Transition* line : chosen_lines(species, query)) {
    const Level& upper = species.levels[line->upper];
    lines.push_back({{"transition", transition_label(species, *line)},
                     {"frequency_mhz", line->frequency_hz / 1e6},
                     {"upper_energy_k", upper.energy_k},
                     {"upper_degeneracy", upper.degeneracy},
                     {"einstein_a_s1", line->einstein_a_per_s}});
  }
  return lines;
}

Json partition_json(const Species& species, const SpeciesQuery& query) {
  Json partition = Json::array();
  for (const double t : query.partition_temperatures_k) {
    const PartitionValue value = partition_at(species, t);
    partition.push_back({{"temperature_k", t}, {"q", value.q}, {"dlnq_dt", value.dlnq_dt}});
  }
  return partition;
}

bool asks_nothing(const SpeciesQuery& query) {
  return !query.levels && !query.lines && query.partition_temperatures_k.empty();
}

}  // namespace

std::string species_text(const Species& species, const SpeciesQuery& query) {
  if (asks_nothing(query)) return summary_text(species);
  std::string text;
  const auto add = [&](const std::string& part) { text += (text.empty() ? "" : "\n") + part; };
  if (query.levels) add(levels_text(species));
  if (query.lines) add(lines_text(species, query));
  if (!query.partition_temperatures_k.empty()) add(partition_text(species, query));
  return text;
}

std::string species_json(const Species& species, const SpeciesQuery& query) {
  const bool everything = asks_nothing(query);
  Json document = {{"name", species.name}, {"kind", name_of(species.kind)}};
  if (query.levels || everything) document["levels"] = levels_json(species);
  if (query.lines || everything) document["lines"] = lines_json(species, query);
  if (!query.partition_temperatures_k.empty()) document["partition"] = partition_json(species, query);
  return document.dump(2) + "\n";
}

}  // namespace trotline
