#pragma once

#include <Eigen/Dense>

#include <cstdint>
#include <optional>
#include <vector>

#include <trotline/inference/ensemble_sampler.hpp>
#include <trotline/inference/likelihood_fit.hpp>
#include <trotline/inference/marginal_density.hpp>

namespace trotline {

struct PosteriorOptions {
  EnsembleOptions ensemble;  ///< seed and lengths of the sampler
  bool with_draws = false;   ///< draws even where quadrature gives the marginals
};

enum class PosteriorStatus {
  done,
  unbounded,  ///< a free entry has an infinite bound and no prior: there need be no posterior
  too_short,  ///< the sampler did not reach the wanted lengths
  not_mixed   ///< its walkers disagree
};

/// The posterior of the free entries: likelihood, calibration integrated out, times priors, over the bounds.
struct Posterior {
  PosteriorStatus status = PosteriorStatus::too_short;
  bool by_quadrature = false;
  std::vector<MarginalDensity> marginals;  ///< one for each free entry; empty unless done
  Eigen::VectorXd mean;
  Eigen::MatrixXd covariance;
  double ln_evidence =
      0.0;  ///< ln of the integral of likelihood times prior density; quadrature only, else NaN
  std::optional<EnsembleSample> sample;  ///< where the sampler ran

  [[nodiscard]] bool usable() const { return status == PosteriorStatus::done; }
};

/// Quadrature for up to three free entries, the ensemble sampler above that or where quadrature does not
/// resolve.
///
/// Flat priors are flat in what the state holds, ln N and ln T and ln size: no scale is preferred. They
/// matter where the data say little: then intervals follow the bounds (MarginalDensity::cut_low, cut_high).
/// Components of a source are told apart by their temperatures, which keep the order that the fit has.
/// @param fit  of the same likelihood: where the density is large, and its other minima
/// @throws DomainError if the fit is none (no free values)
[[nodiscard]] Posterior posterior(const IntensityLikelihood& likelihood, const LikelihoodFit& fit,
                                  const PosteriorOptions& options = {});

/// Draws by the sampler, whatever the number of free entries.
[[nodiscard]] EnsembleSample sample_posterior(const IntensityLikelihood& likelihood, const LikelihoodFit& fit,
                                              const EnsembleOptions& options = {});

/// What draws say of a rotation diagram: quantiles of ln(N_u/g_u), summed over components, at energies.
struct DiagramBand {
  Eigen::VectorXd energy_k;
  Eigen::VectorXd low95;
  Eigen::VectorXd low68;
  Eigen::VectorXd median;
  Eigen::VectorXd high68;
  Eigen::VectorXd high95;
};

/// @param draws     of the free entries, shape (n_free, n_draws), n_draws >= 2
/// @param energy_k  upper energies [K], any number
/// @param isomer    whose column density and partition function
[[nodiscard]] DiagramBand diagram_band(const IntensityLikelihood& likelihood, const Eigen::MatrixXd& draws,
                                       const Eigen::VectorXd& energy_k, int isomer = 0);

}  // namespace trotline
