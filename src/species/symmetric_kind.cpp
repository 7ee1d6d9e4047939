#include <fmt/format.h>

#include <algorithm>

#include <trotline/rotor/inversion.hpp>
#include <trotline/rotor/symmetric.hpp>

#include "rotor_constants.hpp"

namespace trotline {
namespace {

SymmetricConstants read_top(const FileMap& file, const FileMap& map) {
  SymmetricConstants constants;
  constants.b_hz = map.quantity("B", Dimension::frequency);
  if (map.has("A") == map.has("C")) {
    file.refuse("constants",
                {map.has("A") ? "'constants' has both A and C" : "'constants' has neither A nor C",
                 "B and A for a prolate rotor, B and C for an oblate one"});
  }
  const char* const axial = map.has("A") ? "A" : "C";
  constants.axial_hz = map.quantity(axial, Dimension::frequency);
  if ((constants.axial_hz > constants.b_hz) != map.has("A")) {
    map.refuse(axial, {fmt::format("'constants.{}' is {:g} of B", axial, constants.axial_hz / constants.b_hz),
                       "A above B (prolate) or C below B (oblate)"});
  }
  read_constants(map, distortion_keys(), constants.distortion);
  made_from(file, "constants", [&] {
    require_valid(constants);
    return 0;
  });
  return constants;
}

InversionExpansion read_expansion(const FileMap& file, Species& species) {
  const FileMap map = file.map("inversion");
  InversionExpansion expansion;
  const auto coefficient = [&](const char* key) { return map.has(key) ? map.number(key) : 0.0; };
  expansion.nu0_hz = map.quantity("nu_0", Dimension::frequency);
  expansion.c_j = coefficient("c_J");
  expansion.c_k = coefficient("c_K");
  expansion.c_jj = coefficient("c_JJ");
  expansion.c_jk = coefficient("c_JK");
  expansion.c_kk = coefficient("c_KK");
  expansion.holds_to_j = static_cast<int>(map.whole("holds_to_J", {1, kHighestJ}));
  cite(map, "inversion splitting", species);
  map.finish();
  return expansion;
}

/// The key `measured_inversion`, a list of {J, K, frequency}.
std::vector<MeasuredInversion> read_measured(const FileMap& file, Species& species) {
  std::vector<MeasuredInversion> measured;
  if (!file.has("measured_inversion")) return measured;
  const FileMap group = file.map("measured_inversion");
  for (const FileMap& line : group.maps("list")) {
    measured.push_back({static_cast<int>(line.whole("J", {1, kHighestJ})),
                        static_cast<int>(line.whole("K", {1, kHighestJ})),
                        line.quantity("frequency", Dimension::frequency)});
    line.finish();
  }
  cite(group, "measured inversion lines", species);
  group.finish();
  return measured;
}

SymmetricConstants read_constants_block(const FileMap& file, Species& species) {
  const FileMap map = file.map("constants");
  const SymmetricConstants constants = read_top(file, map);
  cite(map, "rotational constants", species);
  map.finish();
  return constants;
}

}  // namespace

void read_symmetric(const FileMap& file, Species& species) {
  const SymmetricConstants constants = read_constants_block(file, species);
  const double mu_c_m = read_axial_dipole(file, species);
  const auto spin = read_spin(file, species);
  auto modes = read_vibration(file, species);
  const Validity validity = read_validity(file);
  const RotorOptions options = options_for(validity, std::min(constants.b_hz, constants.axial_hz));
  const auto make = [&] { return symmetric_model(constants, mu_c_m, *spin, options); };
  take_model(made_from(file, "constants", make), validity, std::move(modes), species);
}

void read_inversion(const FileMap& file, Species& species) {
  InvertingConstants constants;
  constants.mean = read_constants_block(file, species);
  constants.inversion = read_expansion(file, species);
  constants.measured = read_measured(file, species);
  const double mu_c_m = read_axial_dipole(file, species);
  const auto spin = read_spin(file, species);
  auto modes = read_vibration(file, species);
  const Validity validity = read_validity(file);
  const RotorOptions options = options_for(validity, std::min(constants.mean.b_hz, constants.mean.axial_hz));
  const auto make = [&] { return inverting_model(constants, mu_c_m, *spin, options); };
  take_model(made_from(file, "constants", make), validity, std::move(modes), species);
}

}  // namespace trotline
