#include <algorithm>
#include <cmath>
#include <limits>

#include <trotline/base/errors.hpp>
#include <trotline/inference/least_squares.hpp>
#include <trotline/inference/model_choice.hpp>

namespace trotline {

ModelScore score_of(const IntensityLikelihood& likelihood, const LikelihoodFit& fit) {
  ModelScore score;
  score.free_count = static_cast<int>(likelihood.free_count());
  score.data_count = static_cast<int>(likelihood.data_count());
  score.minus_ln_likelihood = fit.cost + likelihood.constant();
  const double k = score.free_count;
  const double n = score.data_count;
  const bool defined = n > k + 1.0;
  score.aicc = defined ? 2.0 * k + 2.0 * score.minus_ln_likelihood + 2.0 * k * (k + 1.0) / (n - k - 1.0)
                       : std::numeric_limits<double>::infinity();
  score.bic = k * std::log(n) + 2.0 * score.minus_ln_likelihood;
  return score;
}

ModelComparison compare(const ModelScore& smaller, const ModelScore& larger, bool on_boundary) {
  ModelComparison comparison;
  comparison.extra_parameters = larger.free_count - smaller.free_count;
  if (comparison.extra_parameters < 1) {
    throw DomainError("larger.free_count", larger.free_count, "above that of the smaller model");
  }
  if (larger.data_count != smaller.data_count) {
    throw DomainError("larger.data_count", larger.data_count, "that of the smaller model");
  }
  comparison.delta_aicc = larger.aicc - smaller.aicc;
  comparison.delta_bic = larger.bic - smaller.bic;
  comparison.likelihood_ratio =
      std::max(0.0, 2.0 * (smaller.minus_ln_likelihood - larger.minus_ln_likelihood));
  comparison.p_value = chi2_survival(comparison.likelihood_ratio, comparison.extra_parameters);
  comparison.on_boundary = on_boundary;
  return comparison;
}

}  // namespace trotline
