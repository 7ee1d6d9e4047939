// Levels thinned out for sums of g f(E) at temperatures that are high against their spacing.
#pragma once

#include <Eigen/Dense>

namespace trotline {

/// Energies [K], rising, and the degeneracy of each.
struct LevelArrays {
  Eigen::ArrayXd energies_k;
  Eigen::ArrayXd degeneracies;
};

/// Replaces the levels of every window of `width_k` by at most three that have the same moments of energy
/// up to the fifth: the Gauss rule of the window's own degeneracies. A window of up to three levels stays as
/// it is. Every sum over g stays the same.
///
/// The sum of g exp(-E/T) changes by less than a fraction 1.4e-6 (w/T)^6 exp(w/T), w being the width: the
/// error term of a Gauss rule, f''''''/6! times the integral of the square of the monic orthogonal
/// polynomial, which is at most that of the Chebyshev polynomial, 4 (w/4)^6. At w/T = 1/15 that is 1.3e-13.
/// Reference: Golub & Welsch 1969, Math. Comp. 23, 221.
[[nodiscard]] LevelArrays compressed(const LevelArrays& levels, double width_k);

inline constexpr double kTemperatureOverWindow = 15.0;

}  // namespace trotline
