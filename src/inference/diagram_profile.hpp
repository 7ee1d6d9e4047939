#pragma once

#include <trotline/inference/thermal_line.hpp>

namespace trotline {

/// chi2 of a diagram as a function of beta = 1/T alone: for every beta the best intercept is known in
/// closed form. Whitened once, so that one evaluation costs a triangular solve.
class DiagramProfile {
 public:
  /// @throws DomainError as fit_thermal_line
  explicit DiagramProfile(const DiagramData& data);

  struct Point {
    double intercept;
    double chi2;
  };

  [[nodiscard]] Point at(double beta_per_k) const;

  /// 1 / variance of the intercept at fixed beta.
  [[nodiscard]] double intercept_weight() const { return intercept_weight_; }

 private:
  const DiagramData& data_;
  Eigen::LLT<Eigen::MatrixXd> cholesky_;
  Eigen::VectorXd whitened_ones_;
  double intercept_weight_ = 0.0;
};

/// ln of the background contrast of every line at beta = 1/T; beta <= 0 only without a background.
[[nodiscard]] Eigen::VectorXd ln_contrast(const DiagramData& data, double beta_per_k);

}  // namespace trotline
