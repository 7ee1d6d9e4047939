#include <fmt/format.h>

#include <cmath>

#include <trotline/rotor/linear.hpp>

#include "rotor_constants.hpp"
#include "species_kinds.hpp"

namespace trotline {
namespace {

LinearConstants read_constants(const FileMap& file, Species& species) {
  const FileMap map = file.map("constants");
  LinearConstants constants;
  constants.b_hz = map.quantity("B", Dimension::frequency);
  constants.d_hz = map.optional_quantity("D", Dimension::frequency, 0.0);
  constants.h_hz = map.optional_quantity("H", Dimension::frequency, 0.0);
  constants.l_hz = map.optional_quantity("L", Dimension::frequency, 0.0);
  if (!(constants.b_hz > 0.0))
    map.refuse("B", {"'constants.B' is not above 0", "a rotational constant above 0"});
  // D = 4 B^3 / omega^2, which is at most 8e-4 of B (in H2): more is a slip of unit.
  constexpr double kLargestDistortion = 2e-3;
  if (std::abs(constants.d_hz) > kLargestDistortion * constants.b_hz) {
    map.refuse("D", {fmt::format("'constants.D' is {:.2g} of B", std::abs(constants.d_hz) / constants.b_hz),
                     fmt::format("a distortion constant below {:g} of B", kLargestDistortion),
                     "check its unit: it is often printed in kHz"});
  }
  cite(map, "rotational constants", species);
  map.finish();
  return constants;
}

LinearDipole read_dipole(const FileMap& file, Species& species) {
  const FileMap map = file.map("dipole");
  LinearDipole dipole;
  dipole.mu0_c_m = map.quantity("mu0", Dimension::dipole_moment);
  dipole.mu2_c_m = map.optional_quantity("mu2", Dimension::dipole_moment, 0.0);
  dipole.mu4_c_m = map.optional_quantity("mu4", Dimension::dipole_moment, 0.0);
  if (dipole.mu0_c_m == 0.0) map.refuse("mu0", {"'dipole.mu0' is 0", "the dipole moment of the species"});
  cite(map, "dipole moment", species);
  map.finish();
  return dipole;
}

}  // namespace

void read_linear(const FileMap& file, Species& species) {
  const LinearConstants constants = read_constants(file, species);
  const LinearDipole dipole = read_dipole(file, species);
  const auto spin = read_spin(file, species);
  auto modes = read_vibration(file, species);
  const Validity validity = read_validity(file);
  const int turnover = linear_highest_j(constants, kHighestJ);
  if (turnover < validity.largest_j) {
    file.map("holds").refuse("largest_j",
                             {fmt::format("'holds.largest_j' is {}, but the energies stop rising at J = {}",
                                          validity.largest_j, turnover),
                              "a J up to which the constants hold"});
  }
  const auto make = [&] { return linear_model(constants, dipole, *spin, options_for(validity)); };
  take_model(made_from(file, "constants", make), validity, std::move(modes), species);
}

}  // namespace trotline
