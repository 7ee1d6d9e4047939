#include <fmt/format.h>

#include <trotline/base/text.hpp>
#include <trotline/rotor/asymmetric.hpp>
#include <trotline/rotor/isotopologue.hpp>
#include <trotline/rotor/linear.hpp>
#include <trotline/rotor/structure.hpp>
#include <trotline/rotor/symmetric.hpp>

#include "rotor_constants.hpp"

namespace trotline {
namespace {

Eigen::Vector3d read_vector(const FileMap& map, Dimension dimension) {
  const auto part = [&](const char* key) { return map.optional_quantity(key, dimension, 0.0); };
  return {part("x"), part("y"), part("z")};
}

struct Structure {
  std::vector<Atom> atoms;
  Eigen::Vector3d dipole_c_m;
};

Structure read_atoms_and_dipole(const FileMap& file, Species& species) {
  Structure structure;
  const FileMap group = file.map("structure");
  for (const FileMap& atom : group.maps("atoms")) {
    structure.atoms.push_back({atom.text("isotope"), read_vector(atom, Dimension::length)});
    atom.finish();
  }
  cite(group, "structure", species);
  group.finish();
  const FileMap dipole = file.map("dipole");
  structure.dipole_c_m = read_vector(dipole, Dimension::dipole_moment);
  cite(dipole, "dipole moment", species);
  dipole.finish();
  return structure;
}

/// rigid_rotor(), whose complaints name the atom but not the place.
RigidRotor rotor_of(const FileMap& file, const Structure& structure) {
  try {
    return rigid_rotor(structure.atoms, structure.dipole_c_m);
  } catch (const InputError& error) {
    file.refuse("structure", error.complaint());
  }
}

std::string warning_of(const RigidRotor& rotor) {
  return fmt::format(
      "{} rotor from a structure, without centrifugal distortion: frequencies are off by 1 % or more and "
      "must not be used to identify lines",
      name_of(rotor.rotor_class));
}

/// Replaces the constants of the structure by those of a measured parent times the ratio of both structures.
void scale_to_parent(const FileMap& file, const Structure& structure, RigidRotor& rotor, Species& species) {
  const FileMap map = file.map("parent");
  const bool linear = rotor.rotor_class == RotorClass::linear;
  ParentConstants measured;
  measured.b_hz = map.quantity("B", Dimension::frequency);
  measured.a_hz = linear ? 0.0 : map.quantity("A", Dimension::frequency);
  measured.c_hz = linear ? measured.b_hz : map.quantity("C", Dimension::frequency);
  std::vector<Atom> parent = structure.atoms;
  const std::vector<std::string> isotopes = map.texts("isotopes");
  if (isotopes.size() != parent.size()) {
    map.refuse("isotopes", {fmt::format("'parent.isotopes' has {} names", isotopes.size()),
                            fmt::format("one for each of the {} atoms, in their order", parent.size())});
  }
  std::vector<std::string> own;
  for (std::size_t i = 0; i < parent.size(); ++i) {
    own.push_back(parent[i].isotope);
    parent[i].isotope = isotopes[i];
  }
  const EstimatedConstants estimated = made_from(file, "parent", [&] {
    try {
      return isotopologue_constants(measured, parent, own);
    } catch (const InputError& error) {
      map.refuse("isotopes", error.complaint());
    }
  });
  if (!linear) rotor.a_hz = estimated.a.value_hz;
  rotor.b_hz = estimated.b.value_hz;
  rotor.c_hz = estimated.c.value_hz;
  species.warnings.push_back(
      fmt::format("B = {:.3f} MHz is estimated from a parent's, with an expected error of {:.2g} %",
                  rotor.b_hz * 1e-6, 100.0 * estimated.b.relative_error));
  cite(map, "constants of the parent", species);
  map.finish();
}

/// The model of a rigid rotor of whatever class.
RotorModel model_of(const RigidRotor& rotor, const SpinRule& spin, const Validity& validity) {
  const RotorOptions options = options_for(validity, rotor.c_hz);
  const DipoleMoment& mu = rotor.dipole;
  switch (rotor.rotor_class) {
    case RotorClass::linear:
      return linear_model({.b_hz = rotor.b_hz}, {.mu0_c_m = mu.a_c_m}, spin, options);
    case RotorClass::prolate:
      return symmetric_model({.axial_hz = rotor.a_hz, .b_hz = 0.5 * (rotor.b_hz + rotor.c_hz)}, mu.a_c_m,
                             spin, options);
    case RotorClass::oblate:
      return symmetric_model({.axial_hz = rotor.c_hz, .b_hz = 0.5 * (rotor.a_hz + rotor.b_hz)}, mu.c_c_m,
                             spin, options);
    case RotorClass::spherical:
      return spherical_model({.b_hz = rotor.b_hz}, options);
    case RotorClass::asymmetric:
      break;
  }
  AsymmetricConstants constants;
  constants.a_hz = rotor.a_hz;
  constants.b_hz = rotor.b_hz;
  constants.c_hz = rotor.c_hz;
  RotorOptions faint = options;
  faint.least_line_strength = kFaintestLineStrength;
  return asymmetric_model(constants, mu, spin, faint);
}

}  // namespace

void read_structure(const FileMap& file, Species& species) {
  const Structure structure = read_atoms_and_dipole(file, species);
  RigidRotor rotor = rotor_of(file, structure);
  species.warnings.push_back(warning_of(rotor));
  if (file.has("parent")) scale_to_parent(file, structure, rotor, species);
  const auto spin = read_spin(file, species);
  auto modes = read_vibration(file, species);
  const Validity validity = read_validity(file);
  take_model(made_from(file, "structure", [&] { return model_of(rotor, *spin, validity); }), validity,
             std::move(modes), species);
}

}  // namespace trotline
