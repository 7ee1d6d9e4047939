#pragma once

#include <Eigen/Dense>

#include <cstdint>
#include <functional>
#include <vector>

namespace trotline {

/// -ln of a density, up to a constant, at many points at once: points of shape (n_parameters, n_points), one
/// cost for each. Infinite or NaN where there is no density. Called for points inside the bounds only.
using EnsembleCost =
    std::function<void(const Eigen::Ref<const Eigen::MatrixXd>& points, Eigen::Ref<Eigen::VectorXd> cost)>;

struct EnsembleTarget {
  std::function<EnsembleCost()>
      make_cost;          ///< called once for each ensemble: each gets its own scratch space
  Eigen::VectorXd lower;  ///< bounds; may be infinite
  Eigen::VectorXd upper;
  std::vector<Eigen::VectorXd> peaks;  ///< walkers start around these, in equal shares; at least one
  Eigen::MatrixXd covariance;          ///< of the cloud they start in; NaN or not positive: 0.1 in each entry
};

struct EnsembleOptions {
  std::uint64_t seed = 1;
  int ensembles = 4;                      ///< independent of one another
  int walkers = 0;                        ///< of each ensemble, even; 0: 8 a parameter, at least 32
  double wanted_effective = 4000.0;       ///< run until every parameter has as many independent draws, and
  double wanted_autocorrelations = 50.0;  ///< each walker has gone so many autocorrelation times
  int most_steps = 20000;                 ///< of each walker, burn-in included
  int kept_draws = 4000;                  ///< evenly thinned
  int threads = 1;                        ///< do not change a bit of the result
};

enum class SampleStatus {
  done,
  too_short,  ///< most_steps came before the wanted lengths
  not_mixed   ///< split R-hat above kMostSplitRHat: walkers disagree on where the density lies
};

struct EnsembleSample {
  SampleStatus status = SampleStatus::too_short;
  Eigen::MatrixXd draws;  ///< shape (n_parameters, n_kept), in the order of the walk
  Eigen::MatrixXd all;    ///< every state after burn-in, shape (n_parameters, steps * walkers * ensembles)
  Eigen::VectorXd autocorrelation_steps;  ///< integrated autocorrelation time of each parameter
  Eigen::VectorXd effective_size;         ///< independent draws that `all` is worth
  Eigen::VectorXd split_r_hat;
  double acceptance = 0.0;  ///< share of moves taken
  int burn_in_steps = 0;
  int steps = 0;  ///< of each walker after burn-in
  int walkers = 0;
  int ensembles = 0;
  std::int64_t evaluations = 0;
  std::uint64_t seed = 0;

  [[nodiscard]] bool usable() const { return status == SampleStatus::done; }
};

/// Draws from a density by stretch moves of an ensemble of walkers, blind to linear stretching of the
/// density.
///
/// One half of the walkers moves against the other, then the other way about: x' = y + z (x - y), y a walker
/// of the other half, z from g(z) ~ 1/sqrt(z) on [1/2, 2], taken with probability min(1, z^(n-1) p(x')/p(x)).
/// The walk is lengthened until it is long enough by its own autocorrelation time; the first part, ten of
/// these times or a third of the walk, whichever is longer, is left out. What comes of it is not to be
/// reported unless usable(): too short a walk, or walkers that disagree, look like an answer.
/// @throws DomainError for sizes that disagree, an odd number of walkers or fewer than 2 n + 2, no peak with
/// a
///         finite cost
/// Reference: [GoodmanWeare2010]; autocorrelation time after [Sokal1997], split R-hat after [Gelman2013].
[[nodiscard]] EnsembleSample sample_density(const EnsembleTarget& target,
                                            const EnsembleOptions& options = {});

/// The integrated autocorrelation time of series (one a column), averaged over them; the sum ends at the
/// first lag of 5 times itself or more. Infinite where that lag is not reached within half the length.
[[nodiscard]] double autocorrelation_time(const Eigen::MatrixXd& series);

/// Split R-hat of series (one a column): each halved, the spread between halves against that within.
[[nodiscard]] double split_r_hat(const Eigen::MatrixXd& series);

inline constexpr double kMostSplitRHat = 1.05;

}  // namespace trotline
