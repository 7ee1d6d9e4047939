#include "cost_minimum.hpp"

#include <unsupported/Eigen/NonLinearOptimization>

#include <algorithm>
#include <cmath>

namespace trotline {
namespace {

constexpr double kTolerance = 1e-13;
constexpr int kMostEvaluations = 400;
constexpr double kInside =
    1e-6;  // how far inside of its bounds a start is moved, as a fraction of their span

/// The free entries of a likelihood as numbers u without bounds, and what Eigen's minimiser asks of them.
class Descent {
 public:
  using Scalar = double;
  using InputType = Eigen::VectorXd;
  using ValueType = Eigen::VectorXd;
  using JacobianType = Eigen::MatrixXd;
  enum { InputsAtCompileTime = Eigen::Dynamic, ValuesAtCompileTime = Eigen::Dynamic };

  Descent(const IntensityLikelihood& likelihood, LikelihoodWorkspace& workspace, const Eigen::VectorXd& start,
          Eigen::Index pinned)
      : likelihood_(likelihood),
        workspace_(workspace),
        lower_(likelihood.lower_bounds()),
        upper_(likelihood.upper_bounds()),
        free_(start) {
    for (Eigen::Index k = 0; k < start.size(); ++k) {
      if (k != pinned) moving_.push_back(k);
    }
  }

  [[nodiscard]] int inputs() const { return static_cast<int>(moving_.size()); }
  [[nodiscard]] int values() const { return static_cast<int>(likelihood_.residual_count()); }

  [[nodiscard]] Eigen::VectorXd unbound(const Eigen::VectorXd& free) const {
    Eigen::VectorXd u(inputs());
    for (Eigen::Index j = 0; j < u.size(); ++j) {
      const Eigen::Index k = moving(j);
      if (!is_bounded(k)) {
        u[j] = free[k];
        continue;
      }
      const double place =
          std::clamp((free[k] - lower_[k]) / (upper_[k] - lower_[k]), kInside, 1.0 - kInside);
      u[j] = std::asin(2.0 * place - 1.0);
    }
    return u;
  }

  [[nodiscard]] const Eigen::VectorXd& bound(const Eigen::VectorXd& u) {
    for (Eigen::Index j = 0; j < u.size(); ++j) {
      const Eigen::Index k = moving(j);
      free_[k] = is_bounded(k) ? lower_[k] + 0.5 * (upper_[k] - lower_[k]) * (1.0 + std::sin(u[j])) : u[j];
    }
    return free_;
  }

  int operator()(const Eigen::VectorXd& u, Eigen::VectorXd& residuals) {
    linearise_at(u);
    residuals = workspace_.residuals;
    return residuals.allFinite() ? 0 : -1;
  }

  int df(const Eigen::VectorXd& u, Eigen::MatrixXd& jacobian) {
    linearise_at(u);
    for (Eigen::Index j = 0; j < u.size(); ++j) {
      const Eigen::Index k = moving(j);
      const double stretch = is_bounded(k) ? 0.5 * (upper_[k] - lower_[k]) * std::cos(u[j]) : 1.0;
      jacobian.col(j) = stretch * workspace_.jacobian.col(k);
    }
    return jacobian.allFinite() ? 0 : -1;
  }

 private:
  [[nodiscard]] Eigen::Index moving(Eigen::Index j) const { return moving_[static_cast<std::size_t>(j)]; }
  [[nodiscard]] bool is_bounded(Eigen::Index k) const {
    return std::isfinite(lower_[k]) && std::isfinite(upper_[k]);
  }

  void linearise_at(const Eigen::VectorXd& u) {
    if (last_.size() == u.size() && last_ == u) return;
    (void)likelihood_.linearise(bound(u), workspace_);
    last_ = u;
  }

  const IntensityLikelihood& likelihood_;
  LikelihoodWorkspace& workspace_;
  Eigen::VectorXd lower_;
  Eigen::VectorXd upper_;
  Eigen::VectorXd free_;
  Eigen::VectorXd last_;
  std::vector<Eigen::Index> moving_;
};

bool is_converged(Eigen::LevenbergMarquardtSpace::Status status) {
  using namespace Eigen::LevenbergMarquardtSpace;
  switch (status) {
    case RelativeReductionTooSmall:
    case RelativeErrorTooSmall:
    case RelativeErrorAndReductionTooSmall:
    case CosinusTooSmall:
    case FtolTooSmall:
    case XtolTooSmall:
    case GtolTooSmall:
      return true;
    default:
      return false;
  }
}

}  // namespace

CostMinimum minimise_cost(const IntensityLikelihood& likelihood, const Eigen::VectorXd& start,
                          LikelihoodWorkspace& workspace, Eigen::Index pinned) {
  Descent descent(likelihood, workspace, start, pinned);
  CostMinimum minimum{start, 0.0, true};
  if (descent.inputs() > 0) {
    Eigen::VectorXd u = descent.unbound(start);
    Eigen::LevenbergMarquardt<Descent> minimiser(descent);
    minimiser.parameters.ftol = kTolerance;
    minimiser.parameters.xtol = kTolerance;
    minimiser.parameters.maxfev = kMostEvaluations;
    minimum.converged = is_converged(minimiser.minimize(u));
    minimum.free = descent.bound(u);
  }
  minimum.cost = likelihood.cost(minimum.free, workspace);
  return minimum;
}

}  // namespace trotline
