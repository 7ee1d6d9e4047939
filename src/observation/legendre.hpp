// Legendre polynomials: a basis that stays well conditioned up to the orders that a baseline may have.
#pragma once

#include <Eigen/Core>

namespace trotline {

/// P_0(x) ... P_order(x), by Bonnet's recursion.
[[nodiscard]] inline Eigen::RowVectorXd legendre_row(double x, int order) {
  Eigen::RowVectorXd row(order + 1);
  row(0) = 1.0;
  if (order > 0) row(1) = x;
  for (int k = 1; k < order; ++k) row(k + 1) = ((2.0 * k + 1.0) * x * row(k) - k * row(k - 1)) / (k + 1.0);
  return row;
}

}  // namespace trotline
