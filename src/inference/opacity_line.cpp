#include <boost/math/tools/minima.hpp>
#include <boost/math/tools/roots.hpp>

#include <algorithm>
#include <cmath>
#include <cstdint>
#include <functional>
#include <limits>

#include <trotline/base/errors.hpp>
#include <trotline/inference/opacity_line.hpp>
#include <trotline/physics/planck.hpp>

#include "diagram_profile.hpp"

namespace trotline {
namespace {

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();
constexpr int kScanPoints = 240;
constexpr int kMostSteps = 200;
constexpr double kColdestK = 0.5;  // without a background, where the scan of temperatures begins

/// The coupled equations at one 1/T.
class CoupledLine {
 public:
  explicit CoupledLine(const OpacityLineData& data)
      : data_(data),
        cholesky_(data.diagram.covariance),
        depth_per_population_(data.diagram.ln_nu_over_gu.size()) {
    weights_ = cholesky_.solve(Eigen::VectorXd::Ones(size()));
    for (Eigen::Index i = 0; i < size(); ++i) {
      const LineConstants& line = data.lines[static_cast<std::size_t>(i)];
      // tau0 = this * N_u/g * expm1(T0/T): the thin area over J, per T0
      depth_per_population_[i] = std::sqrt(4.0 * std::numbers::ln2 / std::numbers::pi) *
                                 intensity_per_upper_column_k_km_s_cm2(line) * line.upper_degeneracy /
                                 (photon_energy_k(line.frequency_hz) * data.fwhm_km_s[i]);
    }
  }

  [[nodiscard]] Eigen::Index size() const { return data_.diagram.ln_nu_over_gu.size(); }

  /// Takes a new 1/T.
  void set_beta(double beta) {
    beta_ = beta;
    ln_contrast_ = ln_contrast(data_.diagram, beta);
    base_ = data_.diagram.ln_nu_over_gu + beta * data_.diagram.upper_energy_k - ln_contrast_;
    ln_depth_.resize(size());
    for (Eigen::Index i = 0; i < size(); ++i) {
      const double photon_k = photon_energy_k(data_.diagram.frequency_hz[i]);
      ln_depth_[i] = std::log(depth_per_population_[i] * std::expm1(std::min(photon_k * beta, 700.0))) -
                     beta * data_.diagram.upper_energy_k[i];
    }
  }

  /// Corrected points less the line, at intercept a.
  [[nodiscard]] Eigen::VectorXd residuals(double a) const {
    Eigen::VectorXd r = base_;
    for (Eigen::Index i = 0; i < size(); ++i) {
      r[i] += std::log(opacity_correction(data_.opacity, depth(i, a)).factor) - a;
    }
    return r;
  }

  /// The a at which the corrected points scatter about the line with mean 0; NaN where there is none below
  /// the largest optical depth.
  ///
  /// ln C is convex in a, so Newton's steps from the thin side never pass the solution.
  [[nodiscard]] double intercept() const {
    if (!base_.allFinite()) return kNaN;
    const double most = std::log(kMostOpticalDepth) - ln_depth_.maxCoeff();
    double a = weights_.dot(base_) / weights_.sum();  // as for thin lines: corrections only add
    for (int step = 0; step < kMostSteps && a < most; ++step) {
      double excess = 0.0;
      double slope = 0.0;
      for (Eigen::Index i = 0; i < size(); ++i) {
        const OpacityCorrection correction = opacity_correction(data_.opacity, depth(i, a));
        excess += weights_[i] * (base_[i] + std::log(correction.factor) - a);
        slope += weights_[i] * (correction.dln_factor_dln_tau - 1.0);
      }
      const double change = -excess / slope;
      a += change;
      if (std::abs(change) <= 1e-14 * (1.0 + std::abs(a))) return a;
    }
    return kNaN;
  }

  /// dy/dbeta of the line without corrections.
  [[nodiscard]] Eigen::VectorXd slope_column() const {
    Eigen::VectorXd column = -data_.diagram.upper_energy_k;
    for (Eigen::Index i = 0; i < size() && data_.diagram.background_k > 0.0; ++i) {
      column[i] += background_contrast_slope_k(data_.diagram.frequency_hz[i], 1.0 / beta_,
                                               data_.diagram.background_k) /
                   std::exp(ln_contrast_[i]);
    }
    return column;
  }

  /// The second equation: what is left of the residuals' slope with energy. NaN where there is no a.
  [[nodiscard]] double slope_equation() const {
    const double a = intercept();
    if (std::isnan(a)) return kNaN;
    return slope_column().dot(cholesky_.solve(residuals(a)));
  }

  [[nodiscard]] double chi2(double a) const {
    const Eigen::VectorXd r = residuals(a);
    return r.dot(cholesky_.solve(r));
  }

  void fill(OpacityLineFit& fit, bool temperature_is_free) const {
    const double a = intercept();
    fit.line.status = ThermalStatus::done;
    fit.line.intercept = a;
    fit.line.inverse_temperature_per_k = beta_;
    fit.line.residuals = residuals(a);
    fit.line.chi2 = chi2(a);
    fit.line.dof = static_cast<int>(size()) - (temperature_is_free ? 2 : 1);
    fit.optical_depth.resize(size());
    fit.ln_correction.resize(size());
    Eigen::MatrixXd design(size(), 2);
    Eigen::MatrixXd moving(size(), 2);
    design.col(0).setOnes();
    design.col(1) = slope_column();
    for (Eigen::Index i = 0; i < size(); ++i) {
      fit.optical_depth[i] = depth(i, a);
      const OpacityCorrection correction = opacity_correction(data_.opacity, fit.optical_depth[i]);
      fit.ln_correction[i] = std::log(correction.factor);
      const double photon_k = photon_energy_k(data_.diagram.frequency_hz[i]);
      const double depth_slope = photon_k / -std::expm1(-photon_k * beta_) - data_.diagram.upper_energy_k[i];
      moving(i, 0) = correction.dln_factor_dln_tau;
      moving(i, 1) = correction.dln_factor_dln_tau * depth_slope;
    }
    fit.line.model = data_.diagram.ln_nu_over_gu + fit.ln_correction - fit.line.residuals;
    const Eigen::Index free = temperature_is_free ? 2 : 1;
    const Eigen::MatrixXd weighted = cholesky_.solve(design.leftCols(free));
    const Eigen::MatrixXd a_matrix = weighted.transpose() * (design - moving).leftCols(free);
    const Eigen::MatrixXd a_inverse = a_matrix.inverse();
    const Eigen::MatrixXd covariance =
        a_inverse * (weighted.transpose() * design.leftCols(free)) * a_inverse.transpose();
    fit.line.intercept_variance = covariance(0, 0);
    if (!temperature_is_free) return;
    fit.line.inverse_temperature_variance = covariance(1, 1);
    fit.line.covariance = covariance(0, 1);
  }

 private:
  [[nodiscard]] double depth(Eigen::Index i, double a) const {
    return std::min(std::exp(std::min(ln_depth_[i] + a, 700.0)), kMostOpticalDepth);
  }

  const OpacityLineData& data_;
  Eigen::LLT<Eigen::MatrixXd> cholesky_;
  Eigen::VectorXd depth_per_population_;
  Eigen::VectorXd weights_;
  double beta_ = 0.0;
  Eigen::VectorXd ln_contrast_;
  Eigen::VectorXd base_;
  Eigen::VectorXd ln_depth_;
};

void require_lines(const OpacityLineData& data) {
  const auto size = static_cast<std::size_t>(data.diagram.ln_nu_over_gu.size());
  if (data.lines.size() != size) {
    throw DomainError("lines.size()", static_cast<double>(data.lines.size()), "one for each point");
  }
  if (static_cast<std::size_t>(data.fwhm_km_s.size()) != size) {
    throw DomainError("fwhm_km_s.size()", static_cast<double>(data.fwhm_km_s.size()), "one for each point");
  }
  for (const double width : data.fwhm_km_s) {
    if (!(std::isfinite(width) && width > 0.0)) throw DomainError("fwhm_km_s", width, "finite and above 0");
  }
  const DiagramProfile checks_the_rest(data.diagram);
}

using Equation = std::function<double(double)>;

double root_between(const Equation& equation, double low, double high) {
  std::uintmax_t steps = 100;
  const auto root = boost::math::tools::toms748_solve(equation, low, high,
                                                      boost::math::tools::eps_tolerance<double>(50), steps);
  return 0.5 * (root.first + root.second);
}

/// Where the equation comes nearest to 0 between two points of one sign; two solutions that lie close
/// together hide so from the grid. NaN where it does not cross.
double hidden_crossing(const Equation& equation, double low, double high, double sign) {
  const auto toward_zero = [&](double beta) {
    const double value = sign * equation(beta);
    return std::isfinite(value) ? value : std::numeric_limits<double>::max();
  };
  const auto lowest = boost::math::tools::brent_find_minima(toward_zero, low, high, 30);
  return lowest.second < 0.0 ? lowest.first : kNaN;
}

/// Every 1/T at which the equations hold, found by changes of sign on a grid of temperatures.
std::vector<double> consistent_betas(CoupledLine& line, double background_k) {
  const Equation equation = [&](double beta) {
    line.set_beta(beta);
    return line.slope_equation();
  };
  const double coldest_above = background_k > 0.0 ? 1e-3 * background_k : kColdestK;
  const double ratio = std::pow((kHottestDiagramK - background_k) / coldest_above, 1.0 / (kScanPoints - 1));
  std::vector<std::pair<double, double>> scan;  // by falling beta, with the equation's value
  for (int i = 0; i < kScanPoints; ++i) {
    const double beta = 1.0 / (background_k + coldest_above * std::pow(ratio, i));
    scan.emplace_back(beta, equation(beta));
  }
  std::vector<double> betas;
  for (std::size_t i = 1; i < scan.size(); ++i) {
    const auto& [colder, before] = scan[i - 1];
    const auto& [beta, here] = scan[i];
    if (!std::isfinite(before) || !std::isfinite(here)) continue;
    if ((before < 0.0) != (here < 0.0)) betas.push_back(root_between(equation, beta, colder));
    if (i + 1 == scan.size() || !std::isfinite(scan[i + 1].second)) continue;
    const auto& [hotter, after] = scan[i + 1];
    const double sign = here < 0.0 ? -1.0 : 1.0;
    if (sign * before <= sign * here || sign * after <= sign * here || sign * after < 0.0) continue;
    const double between = hidden_crossing(equation, hotter, colder, sign);
    if (std::isnan(between)) continue;
    betas.push_back(root_between(equation, between, colder));
    betas.push_back(root_between(equation, hotter, between));
  }
  return betas;
}

}  // namespace

OpacityLineFit fit_opacity_line(const OpacityLineData& data) {
  require_lines(data);
  OpacityLineFit fit;
  const ThermalLineFit thin = fit_thermal_line(data.diagram);
  fit.line = thin;
  if (thin.status == ThermalStatus::one_energy) {
    fit.status = OpacityLineStatus::one_energy;
    return fit;
  }
  CoupledLine line(data);
  const std::vector<double> betas = consistent_betas(line, data.diagram.background_k);
  if (betas.empty()) {
    const bool falls = thin.status == ThermalStatus::done;
    fit.status = falls ? OpacityLineStatus::no_solution : OpacityLineStatus::not_thermal;
    return fit;
  }
  const auto chi2_of = [&](double beta) {
    line.set_beta(beta);
    return line.chi2(line.intercept());
  };
  const double best = *std::min_element(betas.begin(), betas.end(),
                                        [&](double a, double b) { return chi2_of(a) < chi2_of(b); });
  line.set_beta(best);
  line.fill(fit, true);
  fit.other_solutions = static_cast<int>(betas.size()) - 1;
  fit.status = OpacityLineStatus::done;
  return fit;
}

OpacityLineFit fit_opacity_line_at(const OpacityLineData& data, double temperature_k) {
  require_lines(data);
  OpacityLineFit fit;
  fit.line = fit_thermal_line_at(data.diagram, temperature_k);  // checks the temperature
  CoupledLine line(data);
  line.set_beta(1.0 / temperature_k);
  if (std::isnan(line.intercept())) return fit;
  line.fill(fit, false);
  fit.status = OpacityLineStatus::done;
  return fit;
}

}  // namespace trotline
