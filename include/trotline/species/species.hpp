#pragma once

#include <memory>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

#include <trotline/species/level.hpp>
#include <trotline/species/partition_function.hpp>

namespace trotline {

enum class SpeciesKind {
  linear,
  symmetric,
  asymmetric,
  triplet_sigma,
  inversion,
  structure,
  levels,
  line_list
};

[[nodiscard]] std::string_view name_of(SpeciesKind kind);

/// Where a number of a species comes from.
struct Citation {
  std::string what;  ///< e.g. "B, D, H"
  std::string from;  ///< the paper
};

/// A species ready for use: levels, transitions and partition function, all in one convention of spin
/// weights. Energies count from the lowest level.
struct Species {
  std::string name;     ///< ASCII, as a person types it: "13CO", "c-C3H2", "HCO+"
  std::string formula;  ///< the same, for print; often equal
  SpeciesKind kind = SpeciesKind::levels;
  std::vector<Level> levels;            ///< by rising energy; the first has energy 0, but in a line list that has its own zero
  std::vector<Transition> transitions;  ///< by rising frequency
  std::shared_ptr<const PartitionFunction> partition;
  std::vector<Citation> citations;
  std::string note;                   ///< a remark of the file's author, on one line; often empty
  std::vector<std::string> warnings;  ///< what a user of these numbers must know
  std::string file;                   ///< where it was read from
  std::string file_fingerprint;       ///< see fingerprint()
};

/// "upper-lower" from the labels of the levels, e.g. "2-1" or "12(3)-11(3)".
[[nodiscard]] std::string transition_label(const Species& species, const Transition& transition);

/// A label as it is compared: no white space, any Unicode dash or "->" or "<-" as "-", "J=" dropped,
/// brackets "_{..}" flattened.
[[nodiscard]] std::string normalised_label(std::string_view label);

/// Indices of the transitions whose label is `label` once both are normalised; by rising frequency.
[[nodiscard]] std::vector<std::size_t> transitions_labelled(const Species& species, std::string_view label);

/// Indices of the transitions with |frequency - frequency_hz| <= tolerance_hz; by rising frequency.
[[nodiscard]] std::vector<std::size_t> transitions_near(const Species& species, double frequency_hz,
                                                        double tolerance_hz);

}  // namespace trotline
