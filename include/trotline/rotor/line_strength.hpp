#pragma once

namespace trotline {

/// Einstein coefficient A_ul [1/s] of an electric-dipole line.
///
///     A_ul = 16 pi^3 nu^3 / (3 eps0 h c^3) * S mu^2 / (2 J_u + 1)
///
/// @param frequency_hz          nu [Hz], > 0
/// @param line_strength_mu2_c2m2  S mu^2 [C2 m2], >= 0, without spin weights; for a linear rotor S = J_u
/// @param rotational_degeneracy  2 J_u + 1 (doubled when S mu^2 is summed over +K and -K), > 0
/// @throws DomainError naming the argument
/// Reference: Gordy & Cook 1984, Microwave Molecular Spectra, 3rd ed., ch. II, in SI form.
[[nodiscard]] double einstein_a_per_s(double frequency_hz, double line_strength_mu2_c2m2,
                                      double rotational_degeneracy);

}  // namespace trotline
