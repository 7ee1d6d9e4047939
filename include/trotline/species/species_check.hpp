#pragma once

#include <string>
#include <string_view>
#include <vector>

#include <trotline/species/species.hpp>

namespace trotline {

enum class Verdict {
  in_order,  ///< as it should be
  doubtful,  ///< may be right; its user should know
  wrong      ///< contradicts itself: do not use it
};

/// "in order", "doubtful", "wrong".
[[nodiscard]] std::string_view name_of(Verdict verdict);

/// One test of a species: what was looked at, what was found, and what follows.
struct SpeciesCheck {
  std::string name;
  std::string figure;  ///< with its unit
  Verdict verdict = Verdict::in_order;
  std::string meaning;
};

/// Every test of consistency that needs nothing but the species itself, in the order in which a reader would
/// make them: frequencies against energies, spin isomers, Q at low and at high temperature and its slope, its
/// completeness, vibration, dipole moment, coincident lines, sources, and what the reader of the file warned
/// of. What agrees with itself may still be wrong: see compare() and a second file for that.
[[nodiscard]] std::vector<SpeciesCheck> check_species(const Species& species);

}  // namespace trotline
