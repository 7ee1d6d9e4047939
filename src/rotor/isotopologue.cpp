#include <fmt/format.h>

#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/rotor/isotopologue.hpp>

namespace trotline {
namespace {

/// Largest share of B that zero-point motion takes in molecules of the trade: HCl has 1.45 percent.
constexpr double kZeroPointShare = 0.015;

void require_positive(const char* name, double value_hz) {
  if (!(std::isfinite(value_hz) && value_hz > 0.0)) throw DomainError(name, value_hz, "finite and above 0");
}

/// Vibration does not vanish where a substituted atom lies near the centre of mass and the ratio near 1: in
/// OCS, 13C moves B by 0.3 percent and the rule misses by 4e-5.
constexpr double kLeastError = 5e-5;

/// @param misfit  of the structure: |B0/Be - 1| of the parent
Estimated scaled(double parent_hz, double ratio, double misfit) {
  if (ratio == 1.0) return {parent_hz, 0.0};
  const double error =
      std::max(kZeroPointShare * std::abs(1.0 - std::sqrt(ratio)), misfit * std::abs(1.0 - ratio));
  return {parent_hz * ratio, std::max(error, kLeastError)};
}

Estimated scaled(const char* name, double parent_hz, double structure_hz, double isotopologue_hz) {
  require_positive(name, parent_hz);
  return scaled(parent_hz, isotopologue_hz / structure_hz, std::abs(parent_hz / structure_hz - 1.0));
}

}  // namespace

EstimatedConstants isotopologue_constants(const ParentConstants& parent, const std::vector<Atom>& structure,
                                          const std::vector<std::string>& isotopes) {
  if (isotopes.size() != structure.size()) {
    throw InputError(
        {fmt::format("an isotopologue of {} atoms for a parent of {}", isotopes.size(), structure.size()),
         "the same atoms in the same order"});
  }
  std::vector<Atom> substituted = structure;
  for (std::size_t i = 0; i < isotopes.size(); ++i) substituted[i].isotope = isotopes[i];
  const RigidRotor before = rigid_rotor(structure);
  const RigidRotor after = rigid_rotor(substituted);
  const Estimated b = scaled("B [Hz]", parent.b_hz, before.b_hz, after.b_hz);
  if (before.rotor_class == RotorClass::linear) return {{before.a_hz, 0.0}, b, b};
  return {scaled("A [Hz]", parent.a_hz, before.a_hz, after.a_hz), b,
          scaled("C [Hz]", parent.c_hz, before.c_hz, after.c_hz)};
}

Estimated diatomic_isotopologue_b(double parent_b_hz, const std::vector<std::string>& parent,
                                  const std::vector<std::string>& isotopologue) {
  require_positive("B [Hz]", parent_b_hz);
  if (parent.size() != 2 || isotopologue.size() != 2) {
    throw InputError(
        {fmt::format("{} and {} atoms for a diatomic molecule", parent.size(), isotopologue.size()),
         "two and two"});
  }
  const double ratio =
      reduced_mass_kg(parent[0], parent[1]) / reduced_mass_kg(isotopologue[0], isotopologue[1]);
  return scaled(parent_b_hz, ratio, 0.0);
}

double scaled_distortion_hz(double parent_hz, double ratio, int power) {
  return parent_hz * std::pow(ratio, power);
}

}  // namespace trotline
