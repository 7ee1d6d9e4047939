#pragma once

#include <Eigen/Dense>

namespace trotline {

/// A linear least-squares fit y = X b + noise.
struct LeastSquaresFit {
  Eigen::VectorXd coefficients;  ///< b, shape (n_columns)
  Eigen::MatrixXd covariance;    ///< (X^T C^-1 X)^-1, shape (n_columns, n_columns); not scaled by chi2/dof
  Eigen::VectorXd residuals;     ///< y - X b, shape (n_rows)
  double chi2 = 0.0;             ///< residuals^T C^-1 residuals
  int dof = 0;                   ///< n_rows - n_columns
  int rank = 0;                  ///< of the whitened design
  bool usable = false;           ///< full rank; when false, coefficients and covariance are NaN
};

/// Generalised least squares with a full covariance matrix C of the observations.
///
/// Solved by a Cholesky factor of C and a column-pivoted QR of the whitened design, so that the condition
/// number enters once and not squared.
/// @param design      X, shape (n_rows, n_columns), n_rows >= n_columns >= 1, finite
/// @param observed    y, shape (n_rows), finite
/// @param covariance  C, shape (n_rows, n_rows), symmetric and positive definite
/// @throws DomainError if shapes disagree, a number is not finite or C is not positive definite
/// Reference: [Aitken1936]; checked against NIST StRD Norris and against statsmodels.
[[nodiscard]] LeastSquaresFit generalised_least_squares(const Eigen::MatrixXd& design,
                                                        const Eigen::VectorXd& observed,
                                                        const Eigen::MatrixXd& covariance);

/// Weighted least squares: C diagonal. @param sigma  standard errors, shape (n_rows), > 0
[[nodiscard]] LeastSquaresFit weighted_least_squares(const Eigen::MatrixXd& design,
                                                     const Eigen::VectorXd& observed,
                                                     const Eigen::VectorXd& sigma);

/// The design of a straight line: a column of ones and x.
[[nodiscard]] Eigen::MatrixXd straight_line_design(const Eigen::VectorXd& x);

/// Probability that chi2 with `dof` degrees of freedom exceeds the value given; NaN for dof < 1.
[[nodiscard]] double chi2_survival(double chi2, int dof);

}  // namespace trotline
