#include <fmt/format.h>
#include <nlohmann/json.hpp>

#include <cmath>
#include <limits>

#include <trotline/base/errors.hpp>
#include <trotline/excitation/thin_line.hpp>
#include <trotline/report/display_text.hpp>
#include <trotline/report/species_report.hpp>

namespace trotline {
namespace {

using Json = nlohmann::ordered_json;

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
  text += fmt::format("file       {}\n", display_text(species.file));
  for (const Citation& citation : species.citations) {
    text += fmt::format("source     {}: {}\n", citation.what, display_text(citation.from));
  }
  for (const std::string& warning : species.warnings) {
    text += fmt::format("note       {}\n", display_text(warning));
  }
  return text;
}

std::string levels_text(const Species& species) {
  std::string text = fmt::format("{:<16}{:>16}{:>10}  {}\n", "level", "E/k [K]", "g", "spin");
  for (const Level& level : species.levels) {
    text += fmt::format("{:<16}{:>16.6f}{:>10g}  {}\n", level.label, level.energy_k, level.degeneracy,
                        level.spin);
  }
  return text;
}

/// What the column of intensities holds, for the head of a table.
std::string strength_text(const LineStrengthQuery& strength) {
  return fmt::format(
      "W: thin line in LTE that fills the beam, without background, T = {:g} K, N = {:.4g} cm-2\n",
      strength.temperature_k, strength.column_density_per_cm2);
}

std::string lines_text(const Species& species, const SpeciesQuery& query) {
  std::string text = query.strength ? strength_text(*query.strength) : "";
  text += fmt::format("{:<22}{:>18}{:>14}{:>8}{:>14}{}\n", "transition", "frequency [MHz]", "E_u/k [K]",
                      "g_u", "A [1/s]", query.strength ? "    W [K km/s]" : "");
  for (const ListedLine& listed : listed_lines(species, query)) {
    const Transition& line = *listed.transition;
    const Level& upper = species.levels[line.upper];
    text += fmt::format("{:<22}{:>18.4f}{:>14.4f}{:>8g}{:>14.4e}", transition_label(species, line),
                        line.frequency_hz / 1e6, upper.energy_k, upper.degeneracy, line.einstein_a_per_s);
    text += query.strength ? fmt::format("{:>14.4g}\n", listed.intensity_k_km_s) : "\n";
  }
  return text;
}

std::string partition_text(const Species& species, const SpeciesQuery& query) {
  std::string text = fmt::format("{:>12}{:>16}{:>10}{:>18}\n", "T [K]", "Q", "lg Q", "dlnQ/dT [1/K]");
  for (const double t : query.partition_temperatures_k) {
    const PartitionValue value = partition_at(species, t);
    text +=
        fmt::format("{:>12g}{:>16.6g}{:>10.4f}{:>18.6e}\n", t, value.q, std::log10(value.q), value.dlnq_dt);
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
  for (const ListedLine& listed : listed_lines(species, query)) {
    const Transition& line = *listed.transition;
    const Level& upper = species.levels[line.upper];
    lines.push_back({{"transition", transition_label(species, line)},
                     {"frequency_mhz", line.frequency_hz / 1e6},
                     {"upper_energy_k", upper.energy_k},
                     {"upper_degeneracy", upper.degeneracy},
                     {"einstein_a_s1", line.einstein_a_per_s}});
    if (query.strength) lines.back()["intensity_k_km_s"] = listed.intensity_k_km_s;
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

SpeciesTable levels_table(const Species& species) {
  SpeciesTable table{
      "levels",
      {{"level", CellType::text, "", "quantum numbers"},
       {"energy", CellType::number, "K", "energy over k, from the lowest level of the species"},
       {"degeneracy", CellType::number, "", "statistical weight, spin included"},
       {"spin", CellType::text, "", "spin isomer; empty where the species has one"}},
      {}};
  for (const Level& level : species.levels) {
    table.rows.push_back({level.label, level.energy_k, level.degeneracy, level.spin});
  }
  return table;
}

SpeciesTable lines_table(const Species& species, const SpeciesQuery& query) {
  SpeciesTable table{
      "lines",
      {{"transition", CellType::text, "", "labels of the upper and the lower level"},
       {"frequency", CellType::number, "MHz", "rest frequency"},
       {"upper_energy", CellType::number, "K", "energy of the upper level over k"},
       {"upper_degeneracy", CellType::number, "", "statistical weight of the upper level"},
       {"einstein_a", CellType::number, "s-1", "Einstein coefficient of spontaneous emission"}},
      {}};
  if (query.strength) {
    table.columns.push_back(
        {"intensity", CellType::number, "K km s-1",
         fmt::format("thin line in LTE that fills the beam, without background, T = {:g} K, "
                     "N = {:.4g} cm-2",
                     query.strength->temperature_k, query.strength->column_density_per_cm2)});
  }
  for (const ListedLine& listed : listed_lines(species, query)) {
    const Transition& line = *listed.transition;
    const Level& upper = species.levels[line.upper];
    table.rows.push_back({transition_label(species, line), line.frequency_hz / 1e6, upper.energy_k,
                          upper.degeneracy, line.einstein_a_per_s});
    if (query.strength) table.rows.back().emplace_back(listed.intensity_k_km_s);
  }
  return table;
}

SpeciesTable partition_table(const Species& species, const SpeciesQuery& query) {
  SpeciesTable table{
      "partition",
      {{"temperature", CellType::number, "K", "temperature"},
       {"partition_function", CellType::number, "", "Q, in the convention of the degeneracies"},
       {"dlnq_dt", CellType::number, "K-1", "slope of ln Q"}},
      {}};
  for (const double t : query.partition_temperatures_k) {
    const PartitionValue value = partition_at(species, t);
    table.rows.push_back({t, value.q, value.dlnq_dt});
  }
  return table;
}

bool asks_nothing(const SpeciesQuery& query) {
  return !query.levels && !query.lines && query.partition_temperatures_k.empty();
}

}  // namespace

std::vector<ListedLine> listed_lines(const Species& species, const SpeciesQuery& query) {
  const double q = query.strength ? partition_at(species, query.strength->temperature_k).q : 1.0;
  std::vector<ListedLine> lines;
  for (const Transition& line : species.transitions) {
    const double f = line.frequency_hz;
    if (query.frequency_hz && (f < query.frequency_hz->low || f > query.frequency_hz->high)) continue;
    ListedLine listed{&line, std::numeric_limits<double>::quiet_NaN()};
    if (query.strength) {
      const Level& upper = species.levels[line.upper];
      const LineConstants constants{f, upper.energy_k, upper.degeneracy, line.einstein_a_per_s};
      const double share = upper.degeneracy / q * std::exp(-upper.energy_k / query.strength->temperature_k);
      listed.intensity_k_km_s =
          query.strength->column_density_per_cm2 * share * intensity_per_upper_column_k_km_s_cm2(constants);
      if (listed.intensity_k_km_s < query.strength->least_intensity_k_km_s) continue;
    }
    lines.push_back(listed);
  }
  return lines;
}

std::vector<SpeciesTable> species_tables(const Species& species, const SpeciesQuery& query) {
  std::vector<SpeciesTable> tables;
  if (query.levels) tables.push_back(levels_table(species));
  if (query.lines) tables.push_back(lines_table(species, query));
  if (!query.partition_temperatures_k.empty()) tables.push_back(partition_table(species, query));
  return tables;
}

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
  return quiet_json(document.dump(2)) + "\n";
}

}  // namespace trotline
