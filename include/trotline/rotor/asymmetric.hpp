#pragma once

#include <cstdint>
#include <limits>
#include <string>
#include <vector>

#include <trotline/rotor/asymmetric_hamiltonian.hpp>
#include <trotline/rotor/rotor.hpp>

namespace trotline {

/// The levels of an asymmetric rotor, as columns, by J, then Wang block (E+, E-, O+, O-), then Ka.
struct AsymmetricLevels {
  std::vector<std::int16_t> j;
  std::vector<std::int16_t> ka;
  std::vector<std::int16_t> kc;
  std::vector<std::uint8_t> block;  ///< 0 E+, 1 E-, 2 O+, 3 O-, of the representation used
  std::vector<double> energy_hz;    ///< above 0(0,0)
  std::vector<std::string> warnings;
  double complete_to_hz = std::numeric_limits<double>::infinity();  ///< as in RotorModel

  [[nodiscard]] std::size_t size() const { return j.size(); }
};

/// All levels up to a J.
///
/// A ladder (the levels of one Ka, or of one Kc where z is c, on the same side of their pair) ends where the
/// distortion series stops rising: where HamiltonianAtJ::rising_k() falls below its K, or where its
/// energies do not rise with J. Levels beyond are left out, and `warnings` says how many and from where on.
/// A truncated series is no longer accurate some way before it turns over.
///
/// Accuracy: an energy is off by a few times eps times the largest energy of the same J.
/// @param highest_j  0 to kHighestJ
/// @throws DomainError for constants that make no asymmetric rotor (see require_valid) or such a J
/// Reference: Watson 1977; Gordy & Cook 1984, ch. VII and VIII; labels as King, Hainer & Cross 1943, J. Chem.
/// Phys. 11, 27.
[[nodiscard]] AsymmetricLevels asymmetric_levels(const AsymmetricConstants& constants, int highest_j);

/// Levels, and lines of all three kinds, with line strengths from the eigenvectors.
///
/// S of a line is 3 sum |<upper|Phi_Zg|lower>|^2 over both M; each line belongs to one component g of
/// the dipole. Only pairs that symmetry and Delta J = 0, +-1 allow are computed. Property (tested): the S of
/// all lines that begin at a level add up to 2J+1 for each component of the dipole.
/// options.least_line_strength cuts the long tail of lines with large changes of Ka: 1e-6 keeps about a
/// fifth.
/// @throws DomainError  as above; if a dipole component is not finite; as finished_model
[[nodiscard]] RotorModel asymmetric_model(const AsymmetricConstants& constants, const DipoleMoment& dipole,
                                          const SpinRule& spin, const RotorOptions& options);

}  // namespace trotline
