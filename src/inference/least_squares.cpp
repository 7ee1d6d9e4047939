#include <trotline/inference/least_squares.hpp>

#include <boost/math/distributions/chi_squared.hpp>
#include <cmath>
#include <limits>

#include <trotline/base/errors.hpp>

namespace trotline {
namespace {

void require(bool condition, const char* argument, double value, const char* allowed) {
  if (!condition) throw DomainError(argument, value, allowed);
}

void require_shapes(const Eigen::MatrixXd& design, const Eigen::VectorXd& observed) {
  require(design.cols() >= 1, "design.cols()", static_cast<double>(design.cols()), "at least 1");
  require(design.rows() >= design.cols(), "design.rows()", static_cast<double>(design.rows()),
          "not below design.cols()");
  require(observed.size() == design.rows(), "observed.size()", static_cast<double>(observed.size()),
          "design.rows()");
  require(design.allFinite(), "design", std::nan(""), "finite");
  require(observed.allFinite(), "observed", std::nan(""), "finite");
}

/// The fit of a design and observations that were divided by their errors.
LeastSquaresFit fit_whitened(const Eigen::MatrixXd& design, const Eigen::VectorXd& observed) {
  LeastSquaresFit fit;
  const Eigen::Index columns = design.cols();
  // Columns scaled to norm 1, so that the rank does not hang on the units of x.
  Eigen::VectorXd norms = design.colwise().norm();
  norms = (norms.array() > 0.0).select(norms, 1.0);
  const Eigen::VectorXd scale = norms.cwiseInverse();
  const Eigen::ColPivHouseholderQR<Eigen::MatrixXd> qr(design * scale.asDiagonal());
  fit.rank = static_cast<int>(qr.rank());
  fit.dof = static_cast<int>(design.rows() - columns);
  fit.usable = qr.rank() == columns;
  if (!fit.usable) {
    const double nan = std::numeric_limits<double>::quiet_NaN();
    fit.coefficients = Eigen::VectorXd::Constant(columns, nan);
    fit.covariance = Eigen::MatrixXd::Constant(columns, columns, nan);
    fit.chi2 = nan;
    return fit;
  }
  fit.coefficients = scale.asDiagonal() * qr.solve(observed);
  const Eigen::MatrixXd r_inverse = qr.matrixR()
                                        .topLeftCorner(columns, columns)
                                        .triangularView<Eigen::Upper>()
                                        .solve(Eigen::MatrixXd::Identity(columns, columns));
  const Eigen::MatrixXd half = scale.asDiagonal() * (qr.colsPermutation() * r_inverse);
  fit.covariance = half * half.transpose();
  fit.chi2 = (observed - design * fit.coefficients).squaredNorm();
  return fit;
}

}  // namespace

LeastSquaresFit generalised_least_squares(const Eigen::MatrixXd& design, const Eigen::VectorXd& observed,
                                          const Eigen::MatrixXd& covariance) {
  require_shapes(design, observed);
  require(covariance.rows() == observed.size() && covariance.cols() == observed.size(), "covariance.rows()",
          static_cast<double>(covariance.rows()), "observed.size(), and square");
  const Eigen::LLT<Eigen::MatrixXd> cholesky(covariance);
  require(covariance.allFinite() && cholesky.info() == Eigen::Success, "covariance", std::nan(""),
          "finite, symmetric and positive definite");
  const auto lower = cholesky.matrixL();
  LeastSquaresFit fit = fit_whitened(lower.solve(design), lower.solve(observed));
  fit.residuals = observed - design * fit.coefficients;
  return fit;
}

LeastSquaresFit weighted_least_squares(const Eigen::MatrixXd& design, const Eigen::VectorXd& observed,
                                       const Eigen::VectorXd& sigma) {
  require_shapes(design, observed);
  require(sigma.size() == observed.size(), "sigma.size()", static_cast<double>(sigma.size()), "observed.size()");
  require(sigma.allFinite() && (sigma.array() > 0.0).all(), "sigma", sigma.minCoeff(), "finite and above 0");
  const Eigen::VectorXd weight = sigma.cwiseInverse();
  LeastSquaresFit fit = fit_whitened(weight.asDiagonal() * design, weight.asDiagonal() * observed);
  fit.residuals = observed - design * fit.coefficients;
  return fit;
}

Eigen::MatrixXd straight_line_design(const Eigen::VectorXd& x) {
  Eigen::MatrixXd design(x.size(), 2);
  design.col(0).setOnes();
  design.col(1) = x;
  return design;
}

double chi2_survival(double chi2, int dof) {
  if (dof < 1 || !std::isfinite(chi2) || chi2 < 0.0) return std::numeric_limits<double>::quiet_NaN();
  // Without long doubles: a p-value needs no more digits, and takes a tenth of the time.
  using Doubles = boost::math::policies::policy<boost::math::policies::promote_double<false>>;
  const boost::math::chi_squared_distribution<double, Doubles> distribution(dof);
  return boost::math::cdf(boost::math::complement(distribution, chi2));
}

}  // namespace trotline
