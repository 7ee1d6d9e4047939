#include <fmt/format.h>

#include <cmath>
#include <filesystem>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/base/text.hpp>
#include <trotline/physics/constants.hpp>
#include <trotline/species/line_list.hpp>
#include <trotline/species/line_list_intensity.hpp>

#include "kept_list.hpp"
#include "line_list_levels.hpp"
#include "species_kinds.hpp"

namespace trotline {
namespace {

constexpr double kListTemperatureK = 300.0;

/// What the key `line_list` says.
struct ListBlock {
  std::string path;
  LineListIntensity intensity = LineListIntensity::integrated_300k;
  LineListReading reading;
};

LineListIntensity read_intensity(const FileMap& map) {
  const std::string written = map.text("intensity");
  if (written == "integrated_300k") return LineListIntensity::integrated_300k;
  if (written == "log10_a") return LineListIntensity::einstein_a;
  map.refuse("intensity",
             {fmt::format("'line_list.intensity' is '{}'", printable(written)),
              "integrated_300k (log10 of nm2 MHz at 300 K, as the format has it) or log10_a (log10 of A in "
              "1/s, which some services print instead)"});
}

DoubledRows read_doubled_rows(const FileMap& map) {
  const std::string written = map.optional_text("doubled_rows", "plus_and_minus_k");
  if (written == "plus_and_minus_k") return DoubledRows::plus_and_minus_k;
  if (written == "sum") return DoubledRows::sum;
  if (written == "once") return DoubledRows::once;
  map.refuse("doubled_rows", {fmt::format("'line_list.doubled_rows' is '{}'", printable(written)),
                              "plus_and_minus_k, sum or once"});
}

ListBlock read_block(const FileMap& file, Species& species) {
  const FileMap map = file.map("line_list");
  ListBlock block;
  block.path = (std::filesystem::path(map.file()).parent_path() / map.text("file")).string();
  block.intensity = read_intensity(map);
  block.reading.doubled = read_doubled_rows(map);
  if (map.has("quantum_numbers")) block.reading.quanta = map.texts("quantum_numbers");
  if (map.has("degeneracies")) {
    const FileMap stated = map.map("degeneracies");
    for (const auto& entry : stated.entries()) {
      const double degeneracy = stated.number(entry.first);
      if (!(degeneracy > 0.0))
        stated.refuse(entry.first, {"the degeneracy is not above 0", "a number above 0"});
      block.reading.degeneracies[entry.first] = degeneracy;
    }
  }
  cite(map, "line list", species);
  map.finish();
  return block;
}

/// Q(300 K) of the list's own entry: as stated, or from the table, or from the sum over the levels.
double list_partition(const FileMap& file, const StatedPartition& stated, Species& species) {
  if (stated.q_300k > 0.0) return stated.q_300k;
  const PartitionFunction& partition = *species.partition;
  if (partition.highest_k() < kListTemperatureK || partition.lowest_k() > kListTemperatureK) {
    file.refuse("partition",
                {"neither a table nor the levels give Q at 300 K, which A from an intensity needs",
                 "'partition: {q_300: ...}' with the Q(300 K) of the list's own entry"});
  }
  if (stated.table.empty()) {
    species.warnings.push_back(
        fmt::format("A follows from intensities at 300 K and the sum over the levels, Q(300 K) = {:.6g}: "
                    "state the Q(300 K) of the "
                    "list's own entry (partition: q_300) to check it",
                    partition.at(kListTemperatureK).q));
  }
  return partition.at(kListTemperatureK).q;
}

double einstein_a(const LineListRow& row, double q_300k) {
  ListedIntensity listed;
  listed.intensity_nm2_mhz = std::pow(10.0, row.log10_intensity);
  listed.frequency_hz = row.frequency_mhz * 1e6;
  listed.lower_energy_k = row.lower_energy_per_cm * constants::kKelvinPerWavenumberCm;
  listed.upper_degeneracy = row.upper_degeneracy;
  listed.partition = q_300k;
  listed.temperature_k = kListTemperatureK;
  return einstein_a_from_intensity_per_s(listed);
}

/// What the species file says besides the list.
struct Statements {
  std::vector<VibrationalMode> modes;
  StatedPartition partition;
  bool a_from_intensity = false;
};

/// Q from the levels or as stated, and the Q(300 K) with which intensities become A; 0 where A is listed.
double settle_and_get_q_300(const FileMap& file, const Statements& said, Species& species) {
  StatedPartition stated = said.partition;
  LevelSumOptions options;
  options.modes = said.modes;
  settle_partition(stated, options, species);
  return said.a_from_intensity ? list_partition(file, stated, species) : 0.0;
}

/// A of one row; the largest that a dipole line can have is far below the bound.
double einstein_a_of(const LineList& list, std::size_t index, double q_300k, const std::string& path) {
  constexpr double kMostPerS = 1e12;
  const LineListRow& row = list.rows[index];
  const auto refuse = [&](const std::string& found) {
    throw InputError({path, list.line_numbers[index]},
                     {found, "an intensity and energies that make an A coefficient",
                      "check 'intensity' in the species file: integrated_300k or log10_a"});
  };
  try {
    const double a = q_300k > 0.0 ? einstein_a(row, q_300k) : std::pow(10.0, row.log10_intensity);
    if (!(a >= 0.0 && a <= kMostPerS)) refuse(fmt::format("A would be {:.3g} 1/s", a));
    return a;
  } catch (const DomainError& error) {
    refuse(error.what());
  }
  return 0.0;
}

/// A of every line, from whatever stands in the column of intensities.
void take_einstein_a(double q_300k, const LineList& list, const ListedLevels& rebuilt,
                     const std::string& path, Species& species) {
  species.transitions.reserve(rebuilt.transitions.size());
  for (const ListedTransition& listed : rebuilt.transitions) {
    species.transitions.push_back(listed.transition);
    species.transitions.back().einstein_a_per_s = einstein_a_of(list, listed.row, q_300k, path);
  }
}

/// Whether the list was kept, and Q(300 K) is still what it was then.
bool take_kept(const FileMap& file, const Statements& said, const KeptList& kept, Species& species) {
  auto opened = kept.reopen();
  if (!opened) return false;
  Species reopened = species;
  reopened.levels = std::move(opened->levels);
  reopened.transitions = std::move(opened->transitions);
  reopened.warnings = std::move(opened->warnings);
  if (settle_and_get_q_300(file, said, reopened) != opened->partition_300k) return false;
  species = std::move(reopened);
  return true;
}

}  // namespace

void read_line_list(const FileMap& file, Species& species) {
  const ListBlock block = read_block(file, species);
  Statements said;
  said.modes = read_vibration(file, species);
  said.partition = read_partition(file, species);
  said.a_from_intensity = block.intensity == LineListIntensity::integrated_300k;
  const KeptList kept(block.path, file.file(), species.file_fingerprint);
  if (take_kept(file, said, kept, species)) return;
  const LineList list = parse_line_list(read_file(block.path), block.path);
  ListedLevels rebuilt = rebuild_levels(list, block.reading, block.path);
  species.levels = std::move(rebuilt.levels);
  species.warnings = list.warnings;
  species.warnings.insert(species.warnings.end(), rebuilt.warnings.begin(), rebuilt.warnings.end());
  const std::vector<std::string> warnings_of_list = species.warnings;
  const double q_300k = settle_and_get_q_300(file, said, species);
  take_einstein_a(q_300k, list, rebuilt, block.path, species);
  kept.keep({species.levels, species.transitions, warnings_of_list, q_300k});
}

}  // namespace trotline
