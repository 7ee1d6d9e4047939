#pragma once

#include <optional>
#include <string>
#include <vector>

#include <trotline/base/table.hpp>
#include <trotline/physics/quantity.hpp>
#include <trotline/species/species.hpp>
#include <trotline/species/species_check.hpp>
#include <trotline/species/species_comparison.hpp>

namespace trotline {

/// How strong lines are: W of a thin line in LTE that fills the beam, without background.
struct LineStrengthQuery {
  double temperature_k = 0.0;            ///< T [K], in the range of Q
  double column_density_per_cm2 = 1e14;  ///< N of all spin isomers together [cm^-2]
  double least_intensity_k_km_s = 0.0;   ///< fainter lines are left out
};

/// Which parts of a species are asked for.
struct SpeciesQuery {
  bool levels = false;
  bool lines = false;
  std::optional<QuantityRange> frequency_hz;  ///< lines in this range only
  std::optional<LineStrengthQuery> strength;
  std::vector<double> partition_temperatures_k;  ///< Q at these temperatures
};

/// A line that is asked for.
struct ListedLine {
  const Transition* transition = nullptr;
  double intensity_k_km_s = 0.0;  ///< NaN where no temperature is asked for
};

/// The lines asked for, by rising frequency. @throws InputError when the temperature lies outside Q's range
[[nodiscard]] std::vector<ListedLine> listed_lines(const Species& species, const SpeciesQuery& query);

/// The parts as text for a terminal; without any part, a summary with the sources of the numbers.
/// @throws InputError when a temperature lies outside the range of Q
[[nodiscard]] std::string species_text(const Species& species, const SpeciesQuery& query);

/// The parts as one JSON document:
/// `{name, kind, levels: [{label, energy_k, degeneracy, spin}], lines: [{transition, frequency_mhz,
/// upper_energy_k, upper_degeneracy, einstein_a_s1, intensity_k_km_s}], partition: [{temperature_k, q,
/// dlnq_dt}]}`; an intensity only where a temperature is asked for.
/// Without any part: levels and lines. @throws InputError as species_text
[[nodiscard]] std::string species_json(const Species& species, const SpeciesQuery& query);

/// A table of a species, for any of the writers of tables.
struct SpeciesTable {
  std::string name;  ///< "levels", "lines" or "partition"
  std::vector<TableColumn> columns;
  std::vector<std::vector<Cell>> rows;
};

/// The parts that are asked for, as tables. @throws InputError as species_text
[[nodiscard]] std::vector<SpeciesTable> species_tables(const Species& species, const SpeciesQuery& query);

/// What check_species() found, as a reviewer would write it: the verdict first, then each test with what was
/// found and what it means, what is wrong before what is doubtful.
[[nodiscard]] std::string check_text(const Species& species, const std::vector<SpeciesCheck>& checks);
[[nodiscard]] std::string check_json(const Species& species, const std::vector<SpeciesCheck>& checks);

/// Two species side by side.
[[nodiscard]] std::string comparison_text(const Species& first, const Species& second);
[[nodiscard]] std::string comparison_json(const Species& first, const Species& second);

}  // namespace trotline
