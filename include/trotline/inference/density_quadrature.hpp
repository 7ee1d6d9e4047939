#pragma once

#include <Eigen/Dense>

#include <cstdint>
#include <functional>
#include <vector>

#include <trotline/inference/marginal_density.hpp>

namespace trotline {

/// -ln of a probability density up to a constant; infinite or NaN where there is none.
using DensityCost = std::function<double(const Eigen::VectorXd&)>;

/// A density over a box and what is known of its shape.
struct BoundedDensity {
  DensityCost cost;
  Eigen::VectorXd lower;  ///< bounds; may be infinite where the density falls off by itself
  Eigen::VectorXd upper;
  std::vector<Eigen::VectorXd> peaks;  ///< where it is large; at least one
  Eigen::MatrixXd information;         ///< second derivatives of cost at the first peak, roughly
};

struct DensityIntegral {
  bool usable = false;    ///< false: the density neither falls off nor meets a bound within kMostNodes, has
                          ///< structure finer than the nodes could be made, or orders of the parameters
                          ///< disagree, as where a line crosses the density twice
  double ln_total = 0.0;  ///< ln of the integral of exp(-cost) over the box
  std::vector<MarginalDensity> marginals;
  Eigen::VectorXd mean;
  Eigen::MatrixXd covariance;
  std::int64_t evaluations = 0;
};

/// Integrals and marginals of a density of one to three parameters, by nested sums over even nodes.
///
/// Each parameter is outermost once. Along each line of nodes the sum goes from the peak outward until the
/// density has fallen by exp(-kLnDensityDrop), and starts anew from the peak of the line beside it, so that
/// it follows any bent ridge. Nodes stand half a standard error apart; where sums over every node and over
/// every other disagree they are set closer. For densities that are smooth and fall off on both sides such
/// sums converge faster than any power of the spacing; where a bound cuts, Gregory's end weights make them of
/// fourth order. The same bits come out at every call.
/// @throws DomainError for more than three parameters or none, sizes that disagree, bounds that cross, no
/// peak
///         inside the bounds where cost is finite
/// Accuracy: quantiles of Gaussians within 1e-4 standard errors, ln_total within 1e-6; where a bound cuts,
/// within
///     1e-3 each (tests).
/// Reference: [TrefethenWeideman2014] for the sums, [DavisRabinowitz1984] section 2.8 for the end weights.
[[nodiscard]] DensityIntegral integrate_density(const BoundedDensity& density);

inline constexpr Eigen::Index kMostQuadratureParameters = 3;
inline constexpr double kLnDensityDrop = 18.0;
inline constexpr int kMostNodes = 2000;  ///< along one line

}  // namespace trotline
