#pragma once

#include <trotline/inference/likelihood_fit.hpp>

namespace trotline {

/// What a fitted model is worth next to others of the same data.
struct ModelScore {
  int free_count = 0;                ///< k
  int data_count = 0;                ///< n, limits included
  double minus_ln_likelihood = 0.0;  ///< with its constants, so that noise models may be compared
  double aicc = 0.0;                 ///< 2k + 2(-ln L) + 2k(k+1)/(n-k-1); infinite for n <= k + 1
  double bic = 0.0;                  ///< k ln n + 2(-ln L)
};

/// Reference: [HurvichTsai1989] for AICc, [Schwarz1978] for BIC.
[[nodiscard]] ModelScore score_of(const IntensityLikelihood& likelihood, const LikelihoodFit& fit);

/// A smaller model inside of a larger one.
struct ModelComparison {
  double delta_aicc = 0.0;  ///< larger less smaller: below 0 speaks for the larger
  double delta_bic = 0.0;
  double likelihood_ratio = 0.0;  ///< 2 (ln L of the larger - ln L of the smaller), not below 0
  int extra_parameters = 0;

  /// Probability of such a ratio if the smaller model holds, chi2 with extra_parameters. Where the smaller is
  /// the larger at the edge of its parameters (a second component of no column density) chi2 does not hold:
  /// the ratio is then smaller than chi2 by and large and this is an upper bound for most cases, no exact
  /// number; on_boundary says so.
  double p_value = 0.0;
  bool on_boundary = false;
};

/// @param on_boundary  see ModelComparison
/// @throws DomainError if the larger has no more parameters, or the data differ in number
/// Reference: [Wilks1938]; [SelfLiang1987] and [Protassov2002] for the boundary.
[[nodiscard]] ModelComparison compare(const ModelScore& smaller, const ModelScore& larger, bool on_boundary);

}  // namespace trotline
