#pragma once

#include <Eigen/Dense>

#include <trotline/inference/thermal_line.hpp>

namespace trotline {

/// What a posterior says of one parameter alone.
///
/// Intervals hold equal tails. Where the density has not fallen off at a bound of the parameter, the bound
/// and not the data ends it there: `cut_low`, `cut_high`; intervals of that side are then those of the
/// prior's choice.
struct MarginalDensity {
  Eigen::VectorXd value;    ///< rising
  Eigen::VectorXd density;  ///< at `value`; its integral is 1
  double mean = 0.0;
  double sigma = 0.0;  ///< standard deviation
  double median = 0.0;
  double mode = 0.0;
  Interval central68{};  ///< holds 68.27 %
  Interval central95{};  ///< holds 95 %
  bool cut_low = false;
  bool cut_high = false;
};

/// The density over evenly spaced values, from its logarithm up to a constant.
///
/// Between values the logarithm is cubic, so that a Gaussian comes out exactly.
/// @param first, step  value[j] = first + j step
/// @param ln_density   -infinity where the density is negligible; at least 3 numbers above that
[[nodiscard]] MarginalDensity marginal_of(double first, double step, const Eigen::VectorXd& ln_density);

/// The same from draws: quantiles of the sorted draws, the density from a histogram of about sqrt(n)/2 bins.
/// @param draws  at least 2, finite
[[nodiscard]] MarginalDensity marginal_of(Eigen::VectorXd draws);

/// Where the density at a bound is more than this fraction of its largest, the bound cuts it.
inline constexpr double kCutDensity = 0.01;

}  // namespace trotline
