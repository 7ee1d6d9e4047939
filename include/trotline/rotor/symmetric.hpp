#pragma once

#include <trotline/rotor/distortion.hpp>
#include <trotline/rotor/rotor.hpp>

namespace trotline {

/// Constants of a symmetric rotor [Hz]: prolate where the axial one is the larger, oblate where it is the
/// smaller.
///
///     E(J,K)/h = B x + (axial - B) y + distortion(x, y),    x = J(J+1), y = K^2
///
/// Reference: Gordy & Cook 1984, Microwave Molecular Spectra, 3rd ed., ch. VI.
struct SymmetricConstants {
  double axial_hz = 0.0;  ///< A of a prolate rotor, C of an oblate one
  double b_hz = 0.0;
  DiagonalDistortion distortion = {};
};

/// @throws DomainError naming the constant: not finite, not positive, both equal (a spherical rotor), an
/// oblate
///         rotor with C < B/2 (no arrangement of masses has it), a quartic constant not below the rigid one
void require_valid(const SymmetricConstants& constants);

/// E(J,K)/h [Hz] above (0,0). @param j, k  0 <= k <= j
[[nodiscard]] double symmetric_energy_hz(const SymmetricConstants& constants, int j, int k);

/// S of the line (J,K)-(J-1,K): (J^2 - K^2)/J for one sign of K. @param j  >= 1
[[nodiscard]] double symmetric_line_strength(int j, int k);

/// Levels J(K) and lines J(K)-J-1(K).
///
/// +K and -K are one level of rotational degeneracy 2(2J+1). The S mu^2 of its lines is the sum over both
/// signs, and A that of either. A list that prints the two apart must be summed before it is compared.
///
/// A level is left out, with all that follow in its ladders, where it does not lie above (J-1,K) and
/// (J-1,K-1): there the distortion series has turned over. `warnings` says how many.
/// @param dipole_c_m  along the axis [C m]; finite
/// @throws DomainError  as require_valid; for options or a spin rule that do not fit
[[nodiscard]] RotorModel symmetric_model(const SymmetricConstants& constants, double dipole_c_m,
                                         const SpinRule& spin, const RotorOptions& options);

/// Constants of a spherical rotor [Hz]: E(J)/h = B x - D x^2 + H x^3, x = J(J+1).
struct SphericalConstants {
  double b_hz = 0.0;
  double d_hz = 0.0;
  double h_hz = 0.0;
};

/// Levels of a spherical rotor, of degeneracy (2J+1)^2. It has no dipole and so no lines.
///
/// The levels of one J are not told apart by symmetry, so spin weights are those of high temperature: all
/// equal. `warnings` says so.
/// @throws DomainError  if B is not positive, D not below B, or a constant not finite; as finished_model
[[nodiscard]] RotorModel spherical_model(const SphericalConstants& constants, const RotorOptions& options);

}  // namespace trotline
