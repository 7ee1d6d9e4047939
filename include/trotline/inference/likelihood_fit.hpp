#pragma once

#include <Eigen/Dense>

#include <vector>

#include <trotline/inference/intensity_likelihood.hpp>
#include <trotline/inference/thermal_line.hpp>

namespace trotline {

enum class FitStatus {
  converged,
  at_bound,     ///< the best value of a free entry lies on one of its bounds: the data set only a limit there
  degenerate,   ///< the data do not hold some combination of the free entries, see weakest_direction
  multimodal,   ///< another minimum is as good, see others
  only_limits,  ///< no datum is a measurement
  too_few_data,  ///< fewer measurements and priors than free entries
  not_converged
};

struct OtherMinimum {
  Eigen::VectorXd free;
  double excess_cost = 0.0;  ///< -ln L above that of the best fit
};

/// The most likely state. Vectors and matrices of free entries follow IntensityLikelihood::free_entries().
struct LikelihoodFit {
  FitStatus status = FitStatus::not_converged;
  Eigen::VectorXd free;                  ///< the best values
  Eigen::VectorXd state;                 ///< the whole state there
  Eigen::MatrixXd covariance;            ///< inverse of the expected information; NaN for entries at a bound
  Eigen::MatrixXd curvature_covariance;  ///< inverse of the exact curvature; NaN where that is not positive
  double cost = 0.0;                     ///< -ln of likelihood and priors, see IntensityLikelihood
  double chi2 = 0.0;                     ///< twice the cost without the limits' share
  int dof = 0;                           ///< measurements and priors less free entries
  Eigen::VectorXd intensity_k_km_s;      ///< of the model, calibration factor left out, shape (n_data)
  Eigen::VectorXd calibration;           ///< the best calibration factor of every datum
  Eigen::VectorXd residual_sigma;        ///< (datum - calibrated model)/sigma
  std::vector<int> at_bound;             ///< entries of the state
  Eigen::VectorXd weakest_direction;     ///< unit vector of free entries along which the data hold least
  double weakest_sigma = 0.0;            ///< the standard error along it, in multiples of kWideErrorEFolds
  std::vector<OtherMinimum> others;      ///< minima within kAsGoodCost of the best

  [[nodiscard]] bool has_answer() const {
    return status == FitStatus::converged || status == FitStatus::multimodal;
  }
};

struct FitOptions {
  std::vector<Eigen::VectorXd> starts;  ///< further starts, in free entries
  int most_grid_starts = 6;             ///< 0: from `starts` only
};

/// Maximises the likelihood from several starts (a grid of temperatures, sizes and opacities, see
/// start_states.hpp) and keeps the best minimum, so that the answer does not hang on a guess.
/// @throws DomainError if there is no start
[[nodiscard]] LikelihoodFit fit_likelihood(const IntensityLikelihood& likelihood,
                                           const FitOptions& options = {});

/// An interval of one free entry from the profile of the likelihood: all values for which some values of the
/// others bring 2 (cost - best) to z^2 or less. An end is NaN where a bound is reached first: the data set no
/// limit there.
/// @param which  index into free
/// @param z      1 for 68.27 %, 1.959964 for 95 %
/// Reference: [Wilks1938].
[[nodiscard]] Interval profile_interval(const IntensityLikelihood& likelihood, const LikelihoodFit& fit,
                                        int which, double z);

/// Twice the cost above its minimum that the profile adds at one value of an entry.
[[nodiscard]] double profile_excess(const IntensityLikelihood& likelihood, const LikelihoodFit& fit,
                                    int which, double value);

/// A minimum whose cost is less than this above the best is as good: twice it is 4, or two sigma.
inline constexpr double kAsGoodCost = 2.0;

/// A standard error of more than this many e-folds (of N, T or size; half the bounds' span for a background)
/// means that the data do not hold the entry.
inline constexpr double kWideErrorEFolds = 3.0;

}  // namespace trotline
