#pragma once

namespace trotline {

/// How the opacity of a line enters its integrated intensity.
enum class Opacity {
  thin,            ///< not at all
  line_centre,     ///< by the correction at the centre of the line: line_centre_correction
  curve_of_growth  ///< exactly, for a Gaussian line: curve_of_growth_correction
};

/// The factor by which opacity hides column density, and how it grows.
struct OpacityCorrection {
  double factor = 1.0;              ///< C >= 1: thin intensity over true intensity
  double dln_factor_dln_tau = 0.0;  ///< d ln C / d ln tau0, in [0, 1)
};

/// C of an integrated Gaussian line, exactly:
///
///     C(tau0) = sqrt(pi) tau0 / integral of (1 - exp(-tau0 exp(-x^2))) dx
///
/// by piecewise polynomials. This is the factor for integrated intensities; the one of
/// line_centre_correction belongs to intensities at the centre of the line.
/// @param tau0  optical depth at line centre, in [0, kMostOpticalDepth]
/// @throws DomainError outside of that range
///
/// Properties (each tested): C -> 1 + tau0/sqrt(8) for tau0 -> 0; C sqrt(ln tau0) / tau0 -> sqrt(pi)/2 for
///     tau0 -> infinity; C rises, and stays below the factor at line centre.
/// Accuracy: relative error below kCurveOfGrowthError, of d ln C / d ln tau0 an absolute error below
///     kCurveOfGrowthSlopeError, against 50-digit sums and quadrature for 1e-12 <= tau0 <= 1e6 (a million
///     random values).
/// Reference: the curve of growth of a Gaussian line is common knowledge, e.g. [Spitzer1978] section 3.4.
[[nodiscard]] OpacityCorrection curve_of_growth_correction(double tau0);

/// C of the intensity at the centre of a line: tau0 / (1 - exp(-tau0)).
///
/// Over-corrects an integrated Gaussian line: by 15 % at tau0 = 1, 41 % at 3, 87 % at 10. Offered because
/// published work uses it; curve_of_growth_correction is right for integrated intensities.
/// @param tau0  in [0, kMostOpticalDepth]
/// @throws DomainError outside of that range
/// Reference: [GoldsmithLanger1999] eq. 17 and following.
[[nodiscard]] OpacityCorrection line_centre_correction(double tau0);

/// Whichever `opacity` names.
[[nodiscard]] OpacityCorrection opacity_correction(Opacity opacity, double tau0);

inline constexpr double kMostOpticalDepth = 1e12;
inline constexpr double kCurveOfGrowthError = 5e-14;
inline constexpr double kCurveOfGrowthSlopeError = 5e-11;

}  // namespace trotline
