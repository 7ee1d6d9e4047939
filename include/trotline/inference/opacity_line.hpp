#pragma once

#include <Eigen/Dense>

#include <vector>

#include <trotline/excitation/curve_of_growth.hpp>
#include <trotline/excitation/thin_line.hpp>
#include <trotline/inference/thermal_line.hpp>

namespace trotline {

/// The straight line of a rotation diagram whose points are corrected for opacity:
///
///     y_i + ln C(tau_i) = a - E_i/T + ln(1 - J(nu_i, T_bg)/J(nu_i, T)) + noise,
///     tau_i from N_u/g = exp(a - E_i/T), the same a and T.
///
/// The corrections hang on the answer, so these are coupled equations. The textbook iteration (correct with
/// the last T and N, refit, repeat) is no way to solve them: past some opacity it leaves the solution even
/// when it starts there. Here a is solved at every T, where it is unique (the corrected level rises slower
/// than a), and every T at which the whole is consistent is then found by its change of sign.
struct OpacityLineData {
  DiagramData diagram;               ///< y as for thin lines, filling corrected
  std::vector<LineConstants> lines;  ///< one for each point
  Eigen::VectorXd fwhm_km_s;         ///< of the lines, shape (n_lines)
  Opacity opacity = Opacity::curve_of_growth;
};

enum class OpacityLineStatus {
  done,
  no_solution,  ///< no a and T agree with the corrections that they imply
  not_thermal,  ///< and the uncorrected populations do not fall with energy either
  one_energy    ///< all lines have the same upper energy
};

struct OpacityLineFit {
  OpacityLineStatus status = OpacityLineStatus::no_solution;
  ThermalLineFit line;            ///< of the corrected points; covariance with the corrections' own slope
  Eigen::VectorXd optical_depth;  ///< at line centre, shape (n_lines)
  Eigen::VectorXd ln_correction;  ///< ln C, shape (n_lines)
  int other_solutions = 0;        ///< further consistent pairs of a and T; the one of least chi2 is given
};

/// Solves the coupled equations; of several solutions the one of least chi2.
///
/// The covariance of a and 1/T propagates the noise through corrections that move with the answer:
/// A^-1 (X' V^-1 X) A^-T with A = X' V^-1 (X - d ln C/d(a, 1/T)). Holding C fixed understates it.
/// @throws DomainError as fit_thermal_line; if sizes disagree or a width is not above 0
/// Reference: [GoldsmithLanger1999] for the corrected diagram.
[[nodiscard]] OpacityLineFit fit_opacity_line(const OpacityLineData& data);

/// The same with the temperature given: only a is solved for. @param temperature_k  above the background
[[nodiscard]] OpacityLineFit fit_opacity_line_at(const OpacityLineData& data, double temperature_k);

}  // namespace trotline
