#pragma once

#include <Eigen/Dense>

#include <trotline/species/partition_function.hpp>

namespace trotline {

/// The straight line of a rotation diagram, as a question: which intercept and which temperature?
///
///     y_i = a - E_i / T + ln(1 - J(nu_i, T_bg) / J(nu_i, T)) + noise,   a = ln(N / Q(T))
///
/// y_i is ln(N_u/g_u) as it follows from the intensity without regard to the background, N_u in cm^-2.
/// Without a background this is a linear regression; with one, the last term bends with T and is fitted
/// exactly, not applied beforehand.
struct DiagramData {
  Eigen::VectorXd ln_nu_over_gu;   ///< y, shape (n_lines)
  Eigen::VectorXd upper_energy_k;  ///< E_u/k [K], shape (n_lines)
  Eigen::VectorXd frequency_hz;    ///< nu [Hz], shape (n_lines)
  Eigen::MatrixXd covariance;      ///< of y, shape (n_lines, n_lines); positive definite
  double background_k = 0.0;       ///< T_bg [K], >= 0
};

enum class ThermalStatus {
  done,
  not_thermal,   ///< the best 1/T is not above 0: populations do not fall with energy
  one_energy,    ///< all lines have the same upper energy: N_u is known, T is not
  no_minimum     ///< the best T is at T_bg, where lines vanish: these intensities fit no emission
};

struct ThermalLineFit {
  ThermalStatus status = ThermalStatus::no_minimum;
  double intercept = 0.0;               ///< a, ln of cm^-2
  double inverse_temperature_per_k = 0.0;  ///< beta = 1/T; <= 0 or NaN where status is not done
  double intercept_variance = 0.0;
  double inverse_temperature_variance = 0.0;
  double covariance = 0.0;    ///< of a and beta
  Eigen::VectorXd model;      ///< y at the fit, shape (n_lines)
  Eigen::VectorXd residuals;  ///< observed y - model, shape (n_lines)
  double chi2 = 0.0;
  int dof = 0;
};

/// The least-squares solution, with the whole covariance of the lines.
///
/// With a background the profile of chi2 over T is scanned from just above T_bg to kHottestDiagramK and the
/// deepest minimum refined by Gauss-Newton steps, so the answer does not hang on a first guess.
/// @throws DomainError if shapes disagree, there are fewer than two lines, or C is not positive definite
[[nodiscard]] ThermalLineFit fit_thermal_line(const DiagramData& data);

/// The same with the temperature given: only the intercept is fitted. One line is enough.
/// @param temperature_k  T [K], above the background
[[nodiscard]] ThermalLineFit fit_thermal_line_at(const DiagramData& data, double temperature_k);

/// Above this temperature [K] a minimum counts as 1/T = 0: no rotation diagram reaches it.
inline constexpr double kHottestDiagramK = 1e5;

/// y of the model at intercept a and beta = 1/T. @return shape (n_lines)
[[nodiscard]] Eigen::VectorXd diagram_model(const DiagramData& data, double intercept,
                                            double inverse_temperature_per_k);

/// T and N with their errors, from the fitted line and Q(T).
///
///     sigma_T = T^2 sigma_beta;   dlnN = da - <E>/k dbeta,   so that
///     sigma(ln N) is the uncertainty of the fitted line at E = <E>(T).
struct ThermalState {
  double temperature_k = 0.0;
  double temperature_sigma_k = 0.0;
  double ln_column_per_cm2 = 0.0;
  double ln_column_sigma = 0.0;
  double correlation = 0.0;  ///< of ln N and T; 0 where T was given
  PartitionValue partition;
};

/// @throws DomainError if the temperature lies outside the range of Q
[[nodiscard]] ThermalState thermal_state(const ThermalLineFit& fit, const PartitionFunction& partition);

/// An interval; an end is NaN where the data (or the range of Q) set no bound on that side.
struct Interval {
  double low;
  double high;
};

struct ThermalIntervals {
  Interval temperature_k;
  Interval ln_column_per_cm2;
};

/// Intervals from the profile of chi2: all values of T (of ln N) that some ln N (some T) brings to within
/// z^2 of the minimum. Not symmetric about the best value, and unbounded above where 1/T = 0 is within z.
/// @param z  1 for 68.27 %, 1.959964 for 95 %
/// Reference: [Wilks1938]; exact for Gaussian noise in y when there is no background.
[[nodiscard]] ThermalIntervals thermal_intervals(const DiagramData& data, const ThermalLineFit& fit,
                                                 const PartitionFunction& partition, double z);

}  // namespace trotline
