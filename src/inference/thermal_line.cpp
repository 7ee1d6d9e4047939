#include <trotline/inference/thermal_line.hpp>

#include <cmath>
#include <limits>

#include <trotline/base/errors.hpp>
#include <trotline/excitation/thin_line.hpp>
#include <trotline/inference/least_squares.hpp>

#include "diagram_profile.hpp"

namespace trotline {
namespace {

constexpr int kScanPoints = 120;
constexpr int kMostSteps = 60;

/// dy/d(a, beta) of the model, shape (n_lines, 2).
Eigen::MatrixXd jacobian(const DiagramData& data, double beta) {
  Eigen::MatrixXd design = straight_line_design(-data.upper_energy_k);
  if (data.background_k == 0.0) return design;
  for (Eigen::Index i = 0; i < design.rows(); ++i) {
    const double temperature_k = 1.0 / beta;
    design(i, 1) += background_contrast_slope_k(data.frequency_hz[i], temperature_k, data.background_k) /
                    background_contrast(data.frequency_hz[i], temperature_k, data.background_k);
  }
  return design;
}

bool all_energies_equal(const Eigen::VectorXd& energy_k) {
  const double span = energy_k.maxCoeff() - energy_k.minCoeff();
  return span <= 1e-9 * std::max(1.0, std::abs(energy_k.maxCoeff()));
}

void take(ThermalLineFit& fit, const DiagramData& data, const LeastSquaresFit& step, double intercept,
          double beta) {
  fit.intercept = intercept;
  fit.inverse_temperature_per_k = beta;
  fit.intercept_variance = step.covariance(0, 0);
  fit.inverse_temperature_variance = step.covariance(1, 1);
  fit.covariance = step.covariance(0, 1);
  fit.model = diagram_model(data, intercept, beta);
  fit.residuals = data.ln_nu_over_gu - fit.model;
  fit.dof = step.dof;
}

/// Without a background the model is linear: one regression is the answer.
ThermalLineFit fit_straight(const DiagramData& data) {
  ThermalLineFit fit;
  const LeastSquaresFit line =
      generalised_least_squares(straight_line_design(-data.upper_energy_k), data.ln_nu_over_gu, data.covariance);
  take(fit, data, line, line.coefficients[0], line.coefficients[1]);
  fit.chi2 = line.chi2;
  fit.status = fit.inverse_temperature_per_k > 1.0 / kHottestDiagramK ? ThermalStatus::done
                                                                     : ThermalStatus::not_thermal;
  return fit;
}

struct ScanResult {
  double beta;
  bool at_hot_end;
  bool at_cold_end;
};

/// The deepest point of chi2 on a grid of temperatures, even in the logarithm of T - T_bg.
ScanResult scan(const DiagramProfile& profile, double background_k) {
  const double coldest = 1e-3 * background_k;
  const double ratio = std::pow((kHottestDiagramK - background_k) / coldest, 1.0 / (kScanPoints - 1));
  ScanResult best{0.0, false, false};
  double lowest = std::numeric_limits<double>::infinity();
  double above_background_k = coldest;
  for (int i = 0; i < kScanPoints; ++i, above_background_k *= ratio) {
    const double beta = 1.0 / (background_k + above_background_k);
    const double chi2 = profile.at(beta).chi2;
    if (chi2 < lowest) {
      lowest = chi2;
      best = {beta, i == kScanPoints - 1, i == 0};
    }
  }
  return best;
}

/// Gauss-Newton in (a, beta), each step halved until chi2 does not rise.
ThermalLineFit refine(const DiagramData& data, const DiagramProfile& profile, double beta) {
  ThermalLineFit fit;
  DiagramProfile::Point here = profile.at(beta);
  LeastSquaresFit step;
  for (int i = 0; i < kMostSteps; ++i) {
    const Eigen::VectorXd residuals = data.ln_nu_over_gu - diagram_model(data, here.intercept, beta);
    step = generalised_least_squares(jacobian(data, beta), residuals, data.covariance);
    double change = step.coefficients[1];
    const double hottest = 1.0 / kHottestDiagramK;
    const double coldest = 1.0 / data.background_k;
    DiagramProfile::Point next = here;
    bool moved = false;
    for (int halvings = 0; halvings < 40 && !moved; ++halvings, change *= 0.5) {
      if (beta + change <= hottest || beta + change >= coldest) continue;
      next = profile.at(beta + change);
      moved = next.chi2 <= here.chi2;
      if (moved) beta += change;
    }
    if (!moved) break;
    here = next;
    if (std::abs(step.coefficients[1]) <= 1e-13 * beta) break;
  }
  take(fit, data, step, here.intercept, beta);
  fit.chi2 = here.chi2;
  fit.status = ThermalStatus::done;
  return fit;
}

}  // namespace

Eigen::VectorXd diagram_model(const DiagramData& data, double intercept, double inverse_temperature_per_k) {
  const Eigen::VectorXd straight = (intercept - inverse_temperature_per_k * data.upper_energy_k.array()).matrix();
  return straight + ln_contrast(data, inverse_temperature_per_k);
}

ThermalLineFit fit_thermal_line(const DiagramData& data) {
  const Eigen::Index lines = data.ln_nu_over_gu.size();
  if (lines < 2) throw DomainError("lines", static_cast<double>(lines), "at least 2 for a temperature");
  const DiagramProfile profile(data);
  if (all_energies_equal(data.upper_energy_k)) {
    ThermalLineFit fit;
    fit.status = ThermalStatus::one_energy;
    fit.inverse_temperature_per_k = std::numeric_limits<double>::quiet_NaN();
    return fit;
  }
  if (data.background_k == 0.0) return fit_straight(data);
  const ScanResult start = scan(profile, data.background_k);
  if (start.at_hot_end || start.at_cold_end) {
    // The line without the background's bend shows the numbers; it is no temperature.
    DiagramData bare = data;
    bare.background_k = 0.0;
    ThermalLineFit fit = fit_straight(bare);
    fit.status = start.at_hot_end ? ThermalStatus::not_thermal : ThermalStatus::no_minimum;
    return fit;
  }
  return refine(data, profile, start.beta);
}

ThermalLineFit fit_thermal_line_at(const DiagramData& data, double temperature_k) {
  if (!(std::isfinite(temperature_k) && temperature_k > data.background_k && temperature_k > 0.0)) {
    throw DomainError("temperature_k", temperature_k, "finite, above 0 and above the background");
  }
  const DiagramProfile profile(data);
  const double beta = 1.0 / temperature_k;
  const DiagramProfile::Point point = profile.at(beta);
  ThermalLineFit fit;
  fit.status = ThermalStatus::done;
  fit.intercept = point.intercept;
  fit.inverse_temperature_per_k = beta;
  fit.intercept_variance = 1.0 / profile.intercept_weight();
  fit.model = diagram_model(data, point.intercept, beta);
  fit.residuals = data.ln_nu_over_gu - fit.model;
  fit.chi2 = point.chi2;
  fit.dof = static_cast<int>(data.ln_nu_over_gu.size()) - 1;
  return fit;
}

ThermalState thermal_state(const ThermalLineFit& fit, const PartitionFunction& partition) {
  ThermalState state;
  const double t = 1.0 / fit.inverse_temperature_per_k;
  state.temperature_k = t;
  state.partition = partition.at(t);
  const double mean_energy_k = t * t * state.partition.dlnq_dt;
  state.ln_column_per_cm2 = fit.intercept + state.partition.ln_q;
  const double variance = fit.intercept_variance - 2.0 * mean_energy_k * fit.covariance +
                          mean_energy_k * mean_energy_k * fit.inverse_temperature_variance;
  state.ln_column_sigma = std::sqrt(std::max(0.0, variance));
  state.temperature_sigma_k = t * t * std::sqrt(fit.inverse_temperature_variance);
  const double covariance = -t * t * (fit.covariance - mean_energy_k * fit.inverse_temperature_variance);
  const double product = state.ln_column_sigma * state.temperature_sigma_k;
  state.correlation = product > 0.0 ? std::clamp(covariance / product, -1.0, 1.0) : 0.0;
  return state;
}

}  // namespace trotline
