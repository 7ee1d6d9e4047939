#include "fitted_covariance.hpp"

#include <algorithm>
#include <cmath>

namespace trotline {

Eigen::Index free_index(const FittedModel& fitted, int entry) {
  const auto& free = fitted.likelihood->free_entries();
  const auto found = std::find(free.begin(), free.end(), entry);
  return found == free.end() ? -1 : found - free.begin();
}

const Eigen::MatrixXd& covariance_of(const LikelihoodFit& fit) {
  for (Eigen::Index k = 0; k < fit.covariance.rows(); ++k) {
    if (std::isfinite(fit.covariance(k, k)) && !std::isfinite(fit.curvature_covariance(k, k)))
      return fit.covariance;
  }
  return fit.curvature_covariance;
}

double covariance_between(const FittedModel& fitted, int entry, int other) {
  const Eigen::Index i = free_index(fitted, entry);
  const Eigen::Index j = free_index(fitted, other);
  return i < 0 || j < 0 ? 0.0 : covariance_of(fitted.fit)(i, j);
}

}  // namespace trotline
