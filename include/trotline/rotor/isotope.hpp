#pragma once

#include <string>
#include <string_view>
#include <vector>

namespace trotline {

/// Mass of a neutral atom [kg].
///
/// Masses are those of the Atomic Mass Evaluation 2020 (Wang et al. 2021, Chinese Physics C 45, 030003),
/// written down from memory and checked against the edition of 2003 (test Isotope.*): they differ from it by
/// less than three of its standard errors, which is below 1e-7 of the mass. Electrons of ions are not
/// subtracted: HCO+ as neutral atoms is 2e-5 too heavy at most, far below what a structure is known to.
/// @param isotope  mass number and symbol, "12C", "18O"; "H" and "D" for 1H and 2H. Case matters.
/// @throws InputError naming the isotope and, for an element that is known, which isotopes are
[[nodiscard]] double isotope_mass_kg(std::string_view isotope);

/// The same in unified atomic mass units.
[[nodiscard]] double isotope_mass_u(std::string_view isotope);

/// The isotopes whose masses are known, by element and mass number.
[[nodiscard]] std::vector<std::string> known_isotopes();

}  // namespace trotline
