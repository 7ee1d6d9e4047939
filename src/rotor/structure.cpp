#include <Eigen/Eigenvalues>
#include <fmt/format.h>

#include <cmath>
#include <numbers>

#include <trotline/base/errors.hpp>
#include <trotline/physics/constants.hpp>
#include <trotline/rotor/isotope.hpp>
#include <trotline/rotor/structure.hpp>

namespace trotline {
namespace {

constexpr double kAngstromM = 1e-10;
// The shortest bond is that of H2, 0.74 Angstrom; the longest ones of molecules in space are near 3.
constexpr double kNearestM = 0.3 * kAngstromM;
constexpr double kFarthestM = 6.0 * kAngstromM;

std::string described(const std::vector<Atom>& atoms, std::size_t i) {
  return fmt::format("atom {} ({})", i + 1, atoms[i].isotope);
}

void require_finite(const std::vector<Atom>& atoms, const Eigen::Vector3d& dipole_c_m) {
  for (std::size_t i = 0; i < atoms.size(); ++i) {
    if (!atoms[i].position_m.allFinite()) {
      throw InputError({described(atoms, i) + " has a coordinate that is no finite number", "three lengths"});
    }
  }
  if (!dipole_c_m.allFinite()) throw InputError({"the dipole is no finite vector", "three dipole moments"});
}

/// Distance from atom i to the nearest other one; refuses atoms on top of each other.
double nearest_m(const std::vector<Atom>& atoms, std::size_t i) {
  double nearest = std::numeric_limits<double>::infinity();
  for (std::size_t other = 0; other < atoms.size(); ++other) {
    if (other == i) continue;
    const double distance = (atoms[other].position_m - atoms[i].position_m).norm();
    if (distance < kNearestM) {
      throw InputError({fmt::format("{} and {} are {:.3g} Angstrom apart", described(atoms, i),
                                    described(atoms, other), distance / kAngstromM),
                        "atoms at least 0.3 Angstrom apart"});
    }
    nearest = std::min(nearest, distance);
  }
  return nearest;
}

void require_molecule(const std::vector<Atom>& atoms, const Eigen::Vector3d& dipole_c_m) {
  if (atoms.size() < 2) {
    throw InputError(
        {fmt::format("a structure of {} atoms", atoms.size()), "at least two, as only they can rotate"});
  }
  require_finite(atoms, dipole_c_m);
  for (std::size_t i = 0; i < atoms.size(); ++i) {
    const double nearest = nearest_m(atoms, i);
    if (nearest > kFarthestM) {
      throw InputError({fmt::format("{} is {:.3g} Angstrom from its nearest neighbour", described(atoms, i),
                                    nearest / kAngstromM),
                        "at most 6 Angstrom", "check the unit of the coordinates"});
    }
  }
}

double constant_hz(double moment_kg_m2) {
  return constants::kPlanckJS / (8.0 * std::numbers::pi * std::numbers::pi * moment_kg_m2);
}

bool are_equal(double one, double other) {
  return std::abs(one - other) <= kEqualMoments * std::max(one, other);
}

RotorClass class_of(const Eigen::Vector3d& moments) {
  if (moments[0] <= 1e-6 * moments[2]) return RotorClass::linear;  // rounding of coordinates off the axis
  const bool prolate = are_equal(moments[1], moments[2]);
  const bool oblate = are_equal(moments[0], moments[1]);
  if (prolate && oblate) return RotorClass::spherical;
  return prolate ? RotorClass::prolate : oblate ? RotorClass::oblate : RotorClass::asymmetric;
}

Eigen::Matrix3d inertia_tensor(const std::vector<Atom>& atoms, const Eigen::Vector3d& centre) {
  Eigen::Matrix3d tensor = Eigen::Matrix3d::Zero();
  for (const Atom& atom : atoms) {
    const Eigen::Vector3d r = atom.position_m - centre;
    tensor +=
        isotope_mass_kg(atom.isotope) * (r.squaredNorm() * Eigen::Matrix3d::Identity() - r * r.transpose());
  }
  return tensor;
}

/// Signs that do not depend on the eigenvalue solver.
Eigen::Matrix3d with_fixed_signs(Eigen::Matrix3d axes) {
  for (const Eigen::Index column : {0, 1}) {
    Eigen::Index largest = 0;
    axes.col(column).cwiseAbs().maxCoeff(&largest);
    if (axes(largest, column) < 0.0) axes.col(column) = -axes.col(column);
  }
  axes.col(2) = axes.col(0).cross(axes.col(1));
  return axes;
}

}  // namespace

const char* name_of(RotorClass rotor_class) {
  switch (rotor_class) {
    case RotorClass::linear:
      return "linear";
    case RotorClass::prolate:
      return "prolate symmetric";
    case RotorClass::oblate:
      return "oblate symmetric";
    case RotorClass::spherical:
      return "spherical";
    case RotorClass::asymmetric:
      break;
  }
  return "asymmetric";
}

RigidRotor rigid_rotor(const std::vector<Atom>& atoms, const Eigen::Vector3d& dipole_c_m) {
  require_molecule(atoms, dipole_c_m);
  RigidRotor rotor;
  for (const Atom& atom : atoms) {
    const double mass_kg = isotope_mass_kg(atom.isotope);
    rotor.mass_kg += mass_kg;
    rotor.centre_of_mass_m += mass_kg * atom.position_m;
  }
  rotor.centre_of_mass_m /= rotor.mass_kg;
  const Eigen::SelfAdjointEigenSolver<Eigen::Matrix3d> solver(inertia_tensor(atoms, rotor.centre_of_mass_m));
  rotor.moments_kg_m2 = solver.eigenvalues().cwiseMax(0.0);
  rotor.axes = with_fixed_signs(solver.eigenvectors());
  rotor.rotor_class = class_of(rotor.moments_kg_m2);
  const bool is_linear = rotor.rotor_class == RotorClass::linear;
  rotor.a_hz = is_linear ? std::numeric_limits<double>::infinity() : constant_hz(rotor.moments_kg_m2[0]);
  rotor.b_hz = constant_hz(rotor.moments_kg_m2[1]);
  rotor.c_hz = constant_hz(rotor.moments_kg_m2[2]);
  const Eigen::Vector3d dipole = rotor.axes.transpose() * dipole_c_m;
  rotor.dipole = {dipole[0], dipole[1], dipole[2]};
  return rotor;
}

double reduced_mass_kg(const std::string& isotope1, const std::string& isotope2) {
  const double m1 = isotope_mass_kg(isotope1);
  const double m2 = isotope_mass_kg(isotope2);
  return m1 / (m1 + m2) * m2;
}

double diatomic_b_hz(const std::string& isotope1, const std::string& isotope2, double bond_length_m) {
  if (!(bond_length_m >= kNearestM && bond_length_m <= kFarthestM)) {
    throw InputError(
        {fmt::format("a bond of {:.3g} Angstrom", bond_length_m / kAngstromM), "0.3 to 6 Angstrom"});
  }
  return constant_hz(reduced_mass_kg(isotope1, isotope2) * bond_length_m * bond_length_m);
}

}  // namespace trotline
