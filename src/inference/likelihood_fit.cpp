#include <algorithm>
#include <cmath>
#include <limits>

#include <trotline/base/errors.hpp>
#include <trotline/inference/likelihood_fit.hpp>

#include "cost_minimum.hpp"
#include "datum_term.hpp"
#include "start_states.hpp"

namespace trotline {
namespace {

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();
constexpr double kAtBound = 1e-5;      // of the span between the bounds
constexpr double kSameMinimum = 0.03;  // entries that agree to this are one minimum
constexpr int kPolishingSteps = 3;

/// What counts as a wide error of each free entry.
Eigen::VectorXd wide_errors(const IntensityLikelihood& likelihood) {
  Eigen::VectorXd wide = Eigen::VectorXd::Constant(likelihood.free_count(), kWideErrorEFolds);
  const Eigen::VectorXd span = likelihood.upper_bounds() - likelihood.lower_bounds();
  for (Eigen::Index k = 0; k < wide.size(); ++k) {
    const bool is_background =
        likelihood.free_entries()[static_cast<std::size_t>(k)] == likelihood.model().layout().background();
    if (is_background) wide[k] = std::isfinite(span[k]) ? 0.5 * span[k] : 100.0;
  }
  return wide;
}

std::vector<Eigen::Index> inner_entries(const IntensityLikelihood& likelihood, const Eigen::VectorXd& free) {
  const Eigen::VectorXd lower = likelihood.lower_bounds();
  const Eigen::VectorXd upper = likelihood.upper_bounds();
  std::vector<Eigen::Index> inner;
  for (Eigen::Index k = 0; k < free.size(); ++k) {
    const double span = upper[k] - lower[k];
    const bool bounded = std::isfinite(span);
    if (!bounded || (free[k] - lower[k] > kAtBound * span && upper[k] - free[k] > kAtBound * span))
      inner.push_back(k);
  }
  return inner;
}

/// The inverse of the part of `matrix` that belongs to `inner`; NaN elsewhere and where it is not positive.
Eigen::MatrixXd inverse_of(const Eigen::MatrixXd& matrix, const std::vector<Eigen::Index>& inner) {
  Eigen::MatrixXd inverse = Eigen::MatrixXd::Constant(matrix.rows(), matrix.cols(), kNaN);
  if (inner.empty() || !matrix.allFinite()) return inverse;
  const Eigen::MatrixXd part = matrix(inner, inner);
  // Scaled to a unit diagonal, so that the test for positivity does not hang on units.
  const Eigen::VectorXd scale = part.diagonal().cwiseMax(1e-300).cwiseSqrt().cwiseInverse();
  const Eigen::LLT<Eigen::MatrixXd> cholesky(scale.asDiagonal() * part * scale.asDiagonal());
  if (cholesky.info() != Eigen::Success) return inverse;
  const Eigen::MatrixXd identity = Eigen::MatrixXd::Identity(part.rows(), part.cols());
  inverse(inner, inner) = scale.asDiagonal() * cholesky.solve(identity) * scale.asDiagonal();
  return inverse;
}

Eigen::VectorXd difference_steps(const Eigen::MatrixXd& covariance) {
  constexpr double kFraction = 0.05;
  Eigen::VectorXd steps = covariance.diagonal().cwiseMax(0.0).cwiseSqrt() * kFraction;
  for (auto& step : steps) step = std::isfinite(step) ? std::clamp(step, 1e-6, 0.02) : 1e-3;
  return steps;
}

/// Newton steps with the exact curvature: the last digits, which Gauss & Newton reach slowly.
void polish(const IntensityLikelihood& likelihood, CostMinimum& best, LikelihoodWorkspace& workspace) {
  for (int step = 0; step < kPolishingSteps; ++step) {
    const auto inner = inner_entries(likelihood, best.free);
    const Eigen::MatrixXd covariance = inverse_of(likelihood.information(best.free, workspace), inner);
    const Eigen::MatrixXd exact =
        inverse_of(likelihood.curvature(best.free, difference_steps(covariance), workspace), inner);
    if (inner.empty() || !exact(inner, inner).allFinite()) return;
    const Eigen::VectorXd gradient = likelihood.gradient(best.free, workspace);
    Eigen::VectorXd next = best.free;
    next(inner) -= exact(inner, inner) * gradient(inner);
    next = next.cwiseMax(likelihood.lower_bounds()).cwiseMin(likelihood.upper_bounds());
    const double cost = likelihood.cost(next, workspace);
    if (!(cost <= best.cost + 1e-12 * (1.0 + std::abs(best.cost)))) return;
    best.free = next;
    best.cost = cost;
  }
}

std::vector<CostMinimum> descend(const IntensityLikelihood& likelihood, const FitOptions& options,
                                 LikelihoodWorkspace& workspace) {
  std::vector<Eigen::VectorXd> starts = options.starts;
  if (options.most_grid_starts > 0) {
    const auto grid = start_states(likelihood, workspace, options.most_grid_starts);
    starts.insert(starts.end(), grid.begin(), grid.end());
  }
  if (starts.empty()) throw DomainError("starts.size()", 0.0, "at least 1");
  std::vector<CostMinimum> minima;
  for (const Eigen::VectorXd& start : starts) {
    if (start.size() != likelihood.free_count()) {
      throw DomainError("start.size()", static_cast<double>(start.size()), "one number for each free entry");
    }
    CostMinimum minimum = minimise_cost(likelihood, start, workspace);
    if (std::isfinite(minimum.cost)) minima.push_back(std::move(minimum));
  }
  std::stable_sort(minima.begin(), minima.end(),
                   [](const auto& a, const auto& b) { return a.cost < b.cost; });
  return minima;
}

/// True when cost rises between two minima by more than chance would: they are not ends of one valley.
bool are_parted(const IntensityLikelihood& likelihood, const CostMinimum& a, const CostMinimum& b,
                LikelihoodWorkspace& workspace) {
  const double higher = std::max(a.cost, b.cost);
  for (const double t : {0.2, 0.35, 0.5, 0.65, 0.8}) {
    if (likelihood.cost((1.0 - t) * a.free + t * b.free, workspace) > higher + 0.5) return true;
  }
  return false;
}

std::vector<OtherMinimum> other_minima(const IntensityLikelihood& likelihood,
                                       const std::vector<CostMinimum>& minima,
                                       LikelihoodWorkspace& workspace) {
  std::vector<OtherMinimum> others;
  const CostMinimum& best = minima.front();
  for (const CostMinimum& minimum : minima) {
    const double excess = minimum.cost - best.cost;
    if (excess > kAsGoodCost || !minimum.converged) continue;
    const auto is_near = [&](const Eigen::VectorXd& other) {
      return (minimum.free - other).cwiseAbs().maxCoeff() < kSameMinimum;
    };
    if (is_near(best.free)) continue;
    if (std::any_of(others.begin(), others.end(), [&](const auto& other) { return is_near(other.free); }))
      continue;
    if (are_parted(likelihood, best, minimum, workspace)) others.push_back({minimum.free, excess});
  }
  return others;
}

void find_weakest_direction(const IntensityLikelihood& likelihood, const Eigen::MatrixXd& information,
                            LikelihoodFit& fit) {
  const Eigen::VectorXd wide = wide_errors(likelihood);
  const Eigen::SelfAdjointEigenSolver<Eigen::MatrixXd> eigen(wide.asDiagonal() * information *
                                                             wide.asDiagonal());
  fit.weakest_direction = (wide.asDiagonal() * eigen.eigenvectors().col(0)).normalized();
  const double least = eigen.eigenvalues()[0];
  fit.weakest_sigma = least > 0.0 ? 1.0 / std::sqrt(least) : std::numeric_limits<double>::infinity();
}

void describe_data(const IntensityLikelihood& likelihood, LikelihoodFit& fit,
                   LikelihoodWorkspace& workspace) {
  fit.cost = likelihood.cost(fit.free, workspace);
  fit.intensity_k_km_s = workspace.model.intensity_k_km_s.matrix();
  fit.calibration.setOnes(fit.intensity_k_km_s.size());
  fit.residual_sigma.setZero(fit.intensity_k_km_s.size());
  fit.chi2 = 2.0 * fit.cost;
  for (Eigen::Index i = 0; i < fit.intensity_k_km_s.size(); ++i) {
    const Measurement& datum = likelihood.problem().data[static_cast<std::size_t>(i)];
    if (fit.intensity_k_km_s[i] != 0.0) fit.calibration[i] = workspace.predicted[i] / fit.intensity_k_km_s[i];
    fit.residual_sigma[i] = (datum.intensity_k_km_s - workspace.predicted[i]) / datum.sigma_k_km_s;
    if (datum.is_limit) fit.chi2 -= 2.0 * limit_term(datum, workspace.predicted[i]).cost;
  }
}

int prior_count(const LikelihoodProblem& problem) {
  return static_cast<int>(
      std::count_if(problem.parameters.begin(), problem.parameters.end(),
                    [](const auto& p) { return p.free && p.same_as < 0 && std::isfinite(p.prior_sigma); }));
}

FitStatus status_of(const IntensityLikelihood& likelihood, const LikelihoodFit& fit, bool converged) {
  if (likelihood.measured_count() == 0) return FitStatus::only_limits;
  if (fit.dof < 0) return FitStatus::too_few_data;
  if (!converged) return FitStatus::not_converged;
  if (!fit.at_bound.empty()) return FitStatus::at_bound;
  if (!(fit.weakest_sigma < 1.0)) return FitStatus::degenerate;
  return fit.others.empty() ? FitStatus::converged : FitStatus::multimodal;
}

}  // namespace

LikelihoodFit fit_likelihood(const IntensityLikelihood& likelihood, const FitOptions& options) {
  LikelihoodWorkspace workspace = likelihood.workspace();
  std::vector<CostMinimum> minima = descend(likelihood, options, workspace);
  LikelihoodFit fit;
  fit.dof = static_cast<int>(likelihood.measured_count() - likelihood.free_count()) +
            prior_count(likelihood.problem());
  if (minima.empty()) return fit;
  CostMinimum& best = minima.front();
  polish(likelihood, best, workspace);
  fit.free = best.free;
  fit.state = likelihood.state_of(best.free);
  const auto inner = inner_entries(likelihood, best.free);
  for (Eigen::Index k = 0; k < best.free.size(); ++k) {
    if (std::find(inner.begin(), inner.end(), k) == inner.end()) {
      fit.at_bound.push_back(likelihood.free_entries()[static_cast<std::size_t>(k)]);
    }
  }
  const Eigen::MatrixXd information = likelihood.information(best.free, workspace);
  fit.covariance = inverse_of(information, inner);
  fit.curvature_covariance =
      inverse_of(likelihood.curvature(best.free, difference_steps(fit.covariance), workspace), inner);
  find_weakest_direction(likelihood, information, fit);
  fit.others = other_minima(likelihood, minima, workspace);
  describe_data(likelihood, fit, workspace);
  fit.status = status_of(likelihood, fit, best.converged);
  return fit;
}

}  // namespace trotline
