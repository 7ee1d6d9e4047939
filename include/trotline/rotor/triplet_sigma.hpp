#pragma once

#include <Eigen/Core>

#include <trotline/rotor/rotor.hpp>

namespace trotline {

/// Constants of a linear molecule in a triplet-Sigma state, such as SO or O2 [Hz].
///
///     H = B N^2 - D N^4 + H N^6 + (2/3)(lambda + lambda_D N^2 + lambda_H N^4)(3 Sz^2 - S^2)
///         + (gamma + gamma_D N^2) N.S
///
/// with products of N^2 and the others taken as half their anticommutators.
/// Reference: Miller & Townes 1953, Phys. Rev. 90, 537; Gordy & Cook 1984, ch. IV.
struct TripletSigmaConstants {
  double b_hz = 0.0;
  double d_hz = 0.0;
  double h_hz = 0.0;
  double lambda_hz = 0.0;  ///< spin-spin coupling
  double lambda_d_hz = 0.0;
  double lambda_h_hz = 0.0;
  double gamma_hz = 0.0;  ///< spin-rotation coupling
  double gamma_d_hz = 0.0;
};

/// The levels of one J: N = J - 1 and N = J + 1, which mix, and N = J, which does not.
///
/// The two mixed states are given on Hund's case (a) states Omega = 0 and |Omega| = 1 of their parity. The
/// lower one is N = J - 1, as it is when lambda is small against B N. J = 0 has N = 1 only.
struct TripletSigmaJ {
  double lower_hz = 0.0;                              ///< N = J - 1; NaN for J = 0
  double middle_hz = 0.0;                             ///< N = J; NaN for J = 0
  double upper_hz = 0.0;                              ///< N = J + 1
  Eigen::Matrix2d vectors = Eigen::Matrix2d::Zero();  ///< columns lower, upper; rows Omega = 0, |Omega| = 1
};

/// @param constants  see require_valid  @param j  >= 0
[[nodiscard]] TripletSigmaJ triplet_sigma_levels(const TripletSigmaConstants& constants, int j);

/// @throws DomainError naming the constant: B not positive, |D| not below B, or one that is not finite
void require_valid(const TripletSigmaConstants& constants);

/// Levels N(J), J up to options.highest_j, and electric-dipole lines with S from the eigenvectors.
///
/// Energies count from the zero of H, so that the lowest level may lie below 0. A series N - J = -1, 0, +1
/// ends where its energies stop rising with J. Magnetic-dipole lines (those of O2) are not computed. Property
/// (tested): the S of all lines that begin at a level add up to 2J+1.
/// @throws DomainError  as require_valid; if the dipole is not finite; as finished_model
[[nodiscard]] RotorModel triplet_sigma_model(const TripletSigmaConstants& constants, double dipole_c_m,
                                             const SpinRule& spin, const RotorOptions& options);

}  // namespace trotline
