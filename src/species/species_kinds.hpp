// The kinds of species file. Each kind has a reader in a file of its own; the table in species_file.cpp
// names them. A reader asks the file's map for its keys and fills levels, transitions and partition.
#pragma once

#include <memory>
#include <string>
#include <vector>

#include <trotline/rotor/rotor.hpp>
#include <trotline/rotor/spin.hpp>
#include <trotline/species/partition_function.hpp>
#include <trotline/species/species.hpp>

#include "file_map.hpp"

namespace trotline {

void read_linear(const FileMap& file, Species& species);
void read_symmetric(const FileMap& file, Species& species);
void read_asymmetric(const FileMap& file, Species& species);
void read_triplet_sigma(const FileMap& file, Species& species);
void read_inversion(const FileMap& file, Species& species);
void read_structure(const FileMap& file, Species& species);
void read_levels(const FileMap& file, Species& species);
void read_line_list(const FileMap& file, Species& species);

// ---- what several kinds share (species_file_parts.cpp)

/// Takes the `from` of a group of numbers into the species' citations.
void cite(const FileMap& group, const std::string& what, Species& species);

/// The key `vibration`: fundamentals that multiply Q. Empty without it.
[[nodiscard]] std::vector<VibrationalMode> read_vibration(const FileMap& file, Species& species);

/// The key `spin`; every level has weight 1 without it.
[[nodiscard]] std::shared_ptr<const SpinRule> read_spin(const FileMap& file, Species& species);

/// The key `holds`: how far the constants of a rotor hold.
struct Validity {
  int largest_j = 0;                   ///< lines above are left out; levels above serve Q alone
  int largest_k = 0;                   ///< the same for K or Ka
  double highest_frequency_hz = 0.0;   ///< lines above are left out; infinity where nothing is said
  double highest_temperature_k = 0.0;  ///< for which Q must be complete
};
[[nodiscard]] Validity read_validity(const FileMap& file);

/// How far the levels of a rotor go, so that Q is complete at the highest temperature.
[[nodiscard]] RotorOptions options_for(const Validity& validity);

/// Lines of an asymmetric rotor with S below are left out: they are too faint to be observed, and many.
inline constexpr double kFaintestLineStrength = 1e-4;

/// The same for a rotor of which no level of J lies below smallest_hz J(J+1), but for distortion: no J is
/// asked for whose levels are all too high.
[[nodiscard]] RotorOptions options_for(const Validity& validity, double smallest_hz);

/// Levels above the lowest in kelvin, lines as far as the constants hold, Q from all levels.
void take_model(const RotorModel& model, const Validity& validity, std::vector<VibrationalMode> modes,
                Species& species);

// ---- the key `partition` of kinds that list levels (partition_block.cpp)

/// Q as the file states it, before it is known whether it goes with the levels.
struct StatedPartition {
  std::vector<std::pair<double, double>> table;  ///< (T [K], Q) by rising T; empty where the file has none
  double q_300k = 0.0;                           ///< 0 where the file does not state it
  bool prefer_levels = false;                    ///< the file says `use: levels`
};
[[nodiscard]] StatedPartition read_partition(const FileMap& file, Species& species);

/// Sets species.partition from what was stated and from the levels, and checks one against the other:
///
/// - Where the table is a constant multiple of the sum, spins are counted otherwise than in the
///   degeneracies of the levels: the table is divided by the factor, with a warning.
/// - Where both agree at every temperature of the table, the sum is used, as it needs no interpolation.
/// - Otherwise the table is used, with a warning that says by how much they differ.
///
/// A stated Q(300 K) that is not the sum's is a warning.
void settle_partition(StatedPartition& stated, const LevelSumOptions& options, Species& species);

}  // namespace trotline
