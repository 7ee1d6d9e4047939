#pragma once

#include <Eigen/Core>

#include <string>
#include <vector>

#include <trotline/rotor/rotor.hpp>

namespace trotline {

struct Atom {
  std::string isotope;         ///< as isotope_mass_kg() knows it
  Eigen::Vector3d position_m;  ///< in any frame [m]
};

/// What kind of rotor three principal moments make.
enum class RotorClass { linear, prolate, oblate, spherical, asymmetric };

/// "linear", "prolate symmetric" ...
[[nodiscard]] const char* name_of(RotorClass rotor_class);

/// Two moments of inertia count as equal when they differ by less than this part of the larger. Coordinates
/// with four decimals in Angstrom leave about 1e-4.
inline constexpr double kEqualMoments = 3e-4;

/// A rigid body's rotational constants and axes.
struct RigidRotor {
  RotorClass rotor_class = RotorClass::asymmetric;
  double a_hz = 0.0;  ///< h / (8 pi^2 I_a); infinite for a linear rotor
  double b_hz = 0.0;
  double c_hz = 0.0;
  double mass_kg = 0.0;
  Eigen::Vector3d moments_kg_m2 = Eigen::Vector3d::Zero();  ///< I_a <= I_b <= I_c
  Eigen::Vector3d centre_of_mass_m = Eigen::Vector3d::Zero();
  Eigen::Matrix3d axes =
      Eigen::Matrix3d::Identity();  ///< columns: a, b, c in the frame of the atoms; right-handed,
                                    ///< the largest part of a and of b positive
  DipoleMoment dipole;              ///< on the axes
};

/// Masses and coordinates to moments of inertia, rotational constants, class of rotor and dipole components.
///
///     I = sum m (r^2 1 - r r^T) about the centre of mass,    A = h / (8 pi^2 I_a) ...
///
/// The constants are those of the structure: an equilibrium structure gives A_e, B_e, C_e, which differ from
/// the ground-state constants that lines show by 0.5 to 1 percent, in light hydrides by more (C of water
/// by 2.6 percent). Use them for classes, ratios and
/// estimates, not for frequencies.
/// @param dipole_c_m  dipole vector in the frame of the atoms [C m]
/// @throws InputError naming the atom: fewer than two atoms, an isotope that is not known, a position or
///         dipole that is not finite, two atoms less than 0.3 Angstrom apart, an atom more than 6 Angstrom
///         from every other one (as when a unit is wrong)
/// Reference: Gordy & Cook 1984, ch. XIII.
[[nodiscard]] RigidRotor rigid_rotor(const std::vector<Atom>& atoms,
                                     const Eigen::Vector3d& dipole_c_m = Eigen::Vector3d::Zero());

/// Reduced mass of two atoms [kg].
[[nodiscard]] double reduced_mass_kg(const std::string& isotope1, const std::string& isotope2);

/// B = h / (8 pi^2 mu r^2) of a diatomic molecule [Hz]. With r_e it gives B_e: see rigid_rotor() on what that
/// is good for.
/// @throws InputError  for an isotope that is not known or a bond length outside of 0.3 to 6 Angstrom
[[nodiscard]] double diatomic_b_hz(const std::string& isotope1, const std::string& isotope2,
                                   double bond_length_m);

}  // namespace trotline
