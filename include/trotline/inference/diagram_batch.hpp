#pragma once

#include <Eigen/Dense>

namespace trotline {

/// Rotation diagrams of the same lines toward many positions, one column a line: what a map or a survey has.
struct DiagramBatch {
  Eigen::VectorXd upper_energy_k;  ///< E_u/k [K], shape (n_lines)
  Eigen::ArrayXXd ln_nu_over_gu;   ///< shape (n_positions, n_lines); finite where the weight is not 0
  Eigen::ArrayXXd sigma;           ///< its standard error, same shape, > 0; infinity leaves a line out
};

/// Of each position, shape (n_positions). Without two lines of different energy: NaN or infinite.
struct DiagramBatchFit {
  Eigen::ArrayXd intercept;                  ///< a = ln(N/Q(T)), ln of cm^-2
  Eigen::ArrayXd inverse_temperature_per_k;  ///< beta = 1/T; <= 0 is no temperature
  Eigen::ArrayXd intercept_variance;
  Eigen::ArrayXd inverse_temperature_variance;
  Eigen::ArrayXd covariance;  ///< of a and beta
  Eigen::ArrayXd chi2;
};

/// Straight lines y = a - beta E through all positions: fit_thermal_line without background and with a
/// diagonal covariance, in vectors over positions, each datum read once from memory.
///
/// @param threads  do not change a bit of the result
/// @throws DomainError if shapes disagree or there are no lines
/// Accuracy: within 1e-11 of fit_thermal_line, relative to each error, for diagrams whose energies spread
/// over
///     a tenth of their size or more (test).
[[nodiscard]] DiagramBatchFit fit_thermal_lines(const DiagramBatch& batch, int threads = 1);

/// The same into arrays that are there from the batch before, so that nothing is allocated.
void fit_thermal_lines(const DiagramBatch& batch, DiagramBatchFit& fit, int threads = 1);

}  // namespace trotline
