#include "score_test.hpp"

#include <cmath>
#include <limits>

#include <trotline/inference/least_squares.hpp>

namespace trotline {
namespace {

constexpr double kIndependent = 1e-7;  // a column keeps this much of its length, or the fit has it already
constexpr double kOwnLeverage = 1e-6;

}  // namespace

ScoreTester::ScoreTester(const IntensityLikelihood& likelihood, const LikelihoodFit& fit) {
  LikelihoodWorkspace workspace = likelihood.workspace();
  Eigen::MatrixXd design = likelihood.full_design(fit.free, workspace);
  residuals_ = workspace.residuals;
  whitening_ = workspace.residual_slopes.cwiseProduct(fit.calibration);
  const StateLayout& layout = likelihood.model().layout();
  const auto& slopes = workspace.model.slopes;
  column_slope_ = Eigen::VectorXd::Zero(likelihood.data_count());
  for (int isomer = 0; isomer < layout.isomers; ++isomer) {
    column_slope_ += slopes.col(layout.ln_column(0, isomer)).matrix();
  }
  temperature_slope_ = slopes.col(layout.ln_temperature(0)).matrix();
  Eigen::VectorXd norms = design.colwise().norm();
  norms = (norms.array() > 0.0).select(norms, 1.0);
  design *= norms.cwiseInverse().asDiagonal();
  const Eigen::ColPivHouseholderQR<Eigen::MatrixXd> qr(design);
  basis_ = qr.householderQ() * Eigen::MatrixXd::Identity(design.rows(), qr.rank());
}

ScoreTest ScoreTester::test(const Eigen::MatrixXd& columns) const {
  ScoreTest result;
  Eigen::MatrixXd added = Eigen::MatrixXd::Zero(residuals_.size(), columns.cols());
  added.topRows(columns.rows()) = whitening_.asDiagonal() * columns;
  const Eigen::VectorXd before = added.colwise().norm();
  added -= basis_ * (basis_.transpose() * added);
  added -= basis_ * (basis_.transpose() * added);  // again, for what rounding left
  const Eigen::VectorXd after = added.colwise().norm();
  for (Eigen::Index k = 0; k < columns.cols(); ++k) {
    if (!(after[k] > kIndependent * before[k])) added.col(k).setZero();
  }
  const Eigen::VectorXd scale = (after.array() > 0.0).select(after, 1.0);
  const Eigen::CompleteOrthogonalDecomposition<Eigen::MatrixXd> solver(added *
                                                                       scale.cwiseInverse().asDiagonal());
  if (solver.rank() < 1) return result;
  const Eigen::MatrixXd inverse = scale.cwiseInverse().asDiagonal() * solver.pseudoInverse();
  result.dof = static_cast<int>(solver.rank());
  result.estimate = -inverse * residuals_;
  result.covariance = inverse * inverse.transpose();
  result.chi2 = (added * result.estimate).squaredNorm();
  result.p_value = chi2_survival(result.chi2, result.dof);
  return result;
}

double ScoreTester::standardised_residual(Eigen::Index datum) const {
  const double own = 1.0 - basis_.row(datum).squaredNorm();
  if (own < kOwnLeverage) return std::numeric_limits<double>::quiet_NaN();
  return -residuals_[datum] / std::sqrt(own);
}

}  // namespace trotline
