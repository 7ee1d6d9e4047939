// Tests of parameters that a fit did not have, from its linearised problem.
#pragma once

#include <Eigen/Dense>

#include <trotline/inference/likelihood_fit.hpp>

namespace trotline {

struct ScoreTest {
  Eigen::VectorXd estimate;  ///< of the added parameters
  Eigen::MatrixXd covariance;
  double chi2 = 0.0;  ///< by how much they would lower chi2
  int dof = 0;  ///< how many of them the data can tell from the fitted ones; 0: none, nothing else is set
  double p_value = 0.0;
};

class ScoreTester {
 public:
  ScoreTester(const IntensityLikelihood& likelihood, const LikelihoodFit& fit);

  /// @param columns  dW/d(added parameter) of every datum, calibration left out, shape (n_data, n_added)
  [[nodiscard]] ScoreTest test(const Eigen::MatrixXd& columns) const;

  /// (datum - model) over the standard error that this difference should have; NaN for a datum that the fit
  /// follows wherever it goes.
  [[nodiscard]] double standardised_residual(Eigen::Index datum) const;

  /// dW/d ln N and dW/d ln T of every datum, all isomers together, calibration left out.
  [[nodiscard]] const Eigen::VectorXd& column_slope() const { return column_slope_; }
  [[nodiscard]] const Eigen::VectorXd& temperature_slope() const { return temperature_slope_; }

 private:
  Eigen::VectorXd residuals_;  // whitened, model less datum
  Eigen::VectorXd whitening_;  // of every datum, calibration included
  Eigen::MatrixXd basis_;      // orthonormal, of the fitted columns
  Eigen::VectorXd column_slope_;
  Eigen::VectorXd temperature_slope_;
};

}  // namespace trotline
