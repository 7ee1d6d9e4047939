// One descent of a likelihood's cost from one start.
#pragma once

#include <Eigen/Dense>

#include <trotline/inference/intensity_likelihood.hpp>

namespace trotline {

struct CostMinimum {
  Eigen::VectorXd free;
  double cost = 0.0;
  bool converged = false;
};

/// The minimum that lies downhill of `start`, by Levenberg & Marquardt (Eigen's port of MINPACK lmder).
///
/// Bounds are kept by x = low + (high - low)(1 + sin u)/2, minimised over u (James & Roos 1975, Comput. Phys.
/// Commun. 10, 343). A start outside is moved inside.
/// @param pinned  a free entry that is held at its start; -1: none
[[nodiscard]] CostMinimum minimise_cost(const IntensityLikelihood& likelihood, const Eigen::VectorXd& start,
                                        LikelihoodWorkspace& workspace, Eigen::Index pinned = -1);

}  // namespace trotline
