#pragma once

#include <Eigen/Core>

#include <string>
#include <vector>

namespace trotline {

/// What a fit of Gaussians with one common velocity and width starts from: the data and where each line's
/// zero is.
struct GaussianProblem {
  Eigen::ArrayXd intensity;       ///< baseline taken off; one value a channel, all finite
  Eigen::ArrayXXd velocity_km_s;  ///< of each channel (rows) in the scale of each line (columns)
  double start_velocity_km_s = 0.0;
  double start_fwhm_km_s = 1.0;
  double narrowest_km_s = 0.0;  ///< no width below this is accepted: the width of a channel
};

/// Gaussians T_k(v) = A_k / (s sqrt(2 pi)) exp(-(v - V)^2 / 2 s^2), fwhm = sqrt(8 ln 2) s, V and s common to
/// all.
struct GaussianSolution {
  bool converged = false;
  std::string trouble;  ///< why the solution should not be used; empty when it may be
  Eigen::ArrayXd area;  ///< A_k, intensity times km/s
  double velocity_km_s = 0.0;
  double fwhm_km_s = 0.0;
  Eigen::ArrayXd model;  ///< at each channel
  /// How the parameters (areas, then velocity, then fwhm) follow the data: d parameter / d intensity, one row
  /// each.
  Eigen::MatrixXd response;
};

/// Least squares with all channels weighing the same: with correlated noise not the narrowest estimate, but
/// one whose error follows exactly from `response` and the noise.
///
/// Levenberg-Marquardt in the implementation of Eigen (after MINPACK).
[[nodiscard]] GaussianSolution fit_gaussians(const GaussianProblem& problem);

}  // namespace trotline
