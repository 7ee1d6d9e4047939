// Errors of the entries of a fitted state.
#pragma once

#include <Eigen/Dense>

#include "likelihood_method.hpp"

namespace trotline {

/// Which free entry an entry of the state is; -1 for a fixed one.
[[nodiscard]] Eigen::Index free_index(const FittedModel& fitted, int entry);

/// The exact curvature where it is positive; it heeds limits and outliers, which the expected one does not.
[[nodiscard]] const Eigen::MatrixXd& covariance_of(const LikelihoodFit& fit);

/// Covariance of two entries of the state; 0 where either is fixed.
[[nodiscard]] double covariance_between(const FittedModel& fitted, int entry, int other);

}  // namespace trotline
