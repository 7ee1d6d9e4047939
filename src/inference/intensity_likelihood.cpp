#include <algorithm>
#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/inference/intensity_likelihood.hpp>

#include "datum_term.hpp"

namespace trotline {
namespace {

constexpr double kLnRootTwoPi = 0.91893853320467274178;
constexpr int kMostCalibrationSteps = 60;

void require(bool good, const char* argument, double value, const char* allowed) {
  if (!good) throw DomainError(argument, value, allowed);
}

void require_datum(const Measurement& datum) {
  require(std::isfinite(datum.intensity_k_km_s), "intensity_k_km_s", datum.intensity_k_km_s, "finite");
  require(std::isfinite(datum.sigma_k_km_s) && datum.sigma_k_km_s > 0.0, "sigma_k_km_s", datum.sigma_k_km_s,
          "finite and above 0");
  require(datum.calibration_error >= 0.0 && datum.calibration_error < 1.0, "calibration_error",
          datum.calibration_error, "from 0 to below 1");
}

void require_parameter(const std::vector<StateParameter>& all, const StateParameter& parameter) {
  if (parameter.same_as >= 0) {
    require(static_cast<std::size_t>(parameter.same_as) < all.size() &&
                all[static_cast<std::size_t>(parameter.same_as)].same_as < 0,
            "same_as", parameter.same_as, "an entry of the state that follows no other");
    return;
  }
  require(!std::isnan(parameter.value), "value", parameter.value, "a number");
  if (!parameter.free) return;
  require(parameter.lower < parameter.upper, "lower", parameter.lower, "below upper");
  require(parameter.prior_sigma > 0.0, "prior_sigma", parameter.prior_sigma, "above 0");
}

double constant_of(const LikelihoodProblem& problem) {
  const double nu = problem.student_dof;
  const double student = std::lgamma(0.5 * nu) - std::lgamma(0.5 * (nu + 1.0)) + 0.5 * std::log(nu * M_PI);
  double sum = 0.0;
  for (const Measurement& datum : problem.data) {
    if (datum.is_limit) continue;
    sum += std::log(datum.sigma_k_km_s) + (problem.noise == NoiseModel::student_t ? student : kLnRootTwoPi);
  }
  return sum;
}

}  // namespace

IntensityLikelihood::IntensityLikelihood(const ForwardModel& model, LikelihoodProblem problem)
    : model_(&model), problem_(std::move(problem)) {
  require(static_cast<Eigen::Index>(problem_.data.size()) == model.data(), "data.size()",
          static_cast<double>(problem_.data.size()), "one for each datum of the model");
  require(static_cast<int>(problem_.parameters.size()) == model.layout().size(), "parameters.size()",
          static_cast<double>(problem_.parameters.size()), "one for each entry of the state");
  require(problem_.student_dof > 0.0, "student_dof", problem_.student_dof, "above 0");
  for (const Measurement& datum : problem_.data) require_datum(datum);
  for (const StateParameter& parameter : problem_.parameters)
    require_parameter(problem_.parameters, parameter);
  gather_free();
  gather_groups();
  constant_ = constant_of(problem_);
}

void IntensityLikelihood::gather_free() {
  free_of_entry_.assign(problem_.parameters.size(), -1);
  for (std::size_t i = 0; i < problem_.parameters.size(); ++i) {
    const StateParameter& parameter = problem_.parameters[i];
    if (!parameter.free || parameter.same_as >= 0) continue;
    free_of_entry_[i] = static_cast<int>(free_.size());
    free_.push_back(static_cast<int>(i));
    if (std::isfinite(parameter.prior_sigma)) with_prior_.push_back(static_cast<int>(i));
  }
  for (std::size_t i = 0; i < problem_.parameters.size(); ++i) {
    const int other = problem_.parameters[i].same_as;
    if (other >= 0) free_of_entry_[i] = free_of_entry_[static_cast<std::size_t>(other)];
  }
  require(!free_.empty(), "free parameters", 0.0, "at least 1");
}

void IntensityLikelihood::gather_groups() {
  group_of_datum_.assign(problem_.data.size(), -1);
  std::vector<int> names;  // of the groups, -1 for one that is a datum's own
  for (std::size_t i = 0; i < problem_.data.size(); ++i) {
    const Measurement& datum = problem_.data[i];
    if (!(datum.calibration_error > 0.0)) continue;
    auto found = datum.calibration_group < 0 ? names.end()
                                             : std::find(names.begin(), names.end(), datum.calibration_group);
    if (found == names.end()) {
      names.push_back(datum.calibration_group);
      groups_.emplace_back();
      found = names.end() - 1;
    }
    const auto group = static_cast<std::size_t>(found - names.begin());
    groups_[group].members.push_back(static_cast<Eigen::Index>(i));
    group_of_datum_[i] = static_cast<int>(group);
  }
}

Eigen::Index IntensityLikelihood::measured_count() const {
  return std::count_if(problem_.data.begin(), problem_.data.end(),
                       [](const auto& datum) { return !datum.is_limit; });
}

Eigen::Index IntensityLikelihood::residual_count() const {
  return data_count() + static_cast<Eigen::Index>(groups_.size() + with_prior_.size());
}

Eigen::VectorXd IntensityLikelihood::lower_bounds() const {
  Eigen::VectorXd bounds(free_count());
  for (Eigen::Index k = 0; k < bounds.size(); ++k) {
    bounds[k] = problem_.parameters[static_cast<std::size_t>(free_[static_cast<std::size_t>(k)])].lower;
  }
  return bounds;
}

Eigen::VectorXd IntensityLikelihood::upper_bounds() const {
  Eigen::VectorXd bounds(free_count());
  for (Eigen::Index k = 0; k < bounds.size(); ++k) {
    bounds[k] = problem_.parameters[static_cast<std::size_t>(free_[static_cast<std::size_t>(k)])].upper;
  }
  return bounds;
}

void IntensityLikelihood::spread(const Eigen::Ref<const Eigen::VectorXd>& free,
                                 Eigen::VectorXd& state) const {
  for (Eigen::Index i = 0; i < state.size(); ++i) {
    const int k = free_of_entry_[static_cast<std::size_t>(i)];
    if (k >= 0) state[i] = free[k];
  }
}

Eigen::VectorXd IntensityLikelihood::state_of(const Eigen::VectorXd& free) const {
  Eigen::VectorXd state(model_->layout().size());
  for (std::size_t i = 0; i < problem_.parameters.size(); ++i) {
    const StateParameter& own = problem_.parameters[i];
    const StateParameter& source =
        own.same_as < 0 ? own : problem_.parameters[static_cast<std::size_t>(own.same_as)];
    state[static_cast<Eigen::Index>(i)] = source.value;
  }
  spread(free, state);
  return state;
}

LikelihoodWorkspace IntensityLikelihood::workspace() const {
  LikelihoodWorkspace workspace;
  workspace.model = model_->workspace();
  Eigen::VectorXd guess(free_count());
  for (Eigen::Index k = 0; k < guess.size(); ++k) {
    guess[k] = problem_.parameters[static_cast<std::size_t>(free_[static_cast<std::size_t>(k)])].value;
  }
  workspace.state = state_of(guess);
  const auto groups = static_cast<Eigen::Index>(groups_.size());
  workspace.calibration.setZero(groups);
  workspace.group_curvature.setOnes(groups);
  workspace.residual_slopes.setZero(data_count());
  workspace.predicted.setZero(data_count());
  workspace.residuals.setZero(residual_count());
  workspace.jacobian.setZero(residual_count(), free_count());
  workspace.slopes.setZero(data_count(), free_count());
  return workspace;
}

/// The most likely z of one group, by Newton steps; each lands within some c of the one before.
IntensityLikelihood::Calibration IntensityLikelihood::calibration_of(const Group& group,
                                                                     const Eigen::ArrayXd& intensity) const {
  Calibration result{0.0, 1.0};
  for (int step = 0; step < kMostCalibrationSteps; ++step) {
    double slope = result.z;
    double information = 1.0;
    result.curvature = 1.0;
    for (const Eigen::Index i : group.members) {
      const Measurement& datum = problem_.data[static_cast<std::size_t>(i)];
      const double c = datum.calibration_error;
      const double predicted = std::exp(c * result.z) * intensity[i];
      const DatumTerm term = datum_term(problem_, datum, predicted);
      slope += term.slope * c * predicted;
      information += term.information * c * predicted * c * predicted;
      result.curvature += c * c * predicted * (term.curvature * predicted + term.slope);
    }
    // Far from the minimum the curvature may be small or negative; its expectation never is.
    const double newton = result.curvature > 0.5 * information ? result.curvature : information;
    const double change = std::clamp(-slope / newton, -1.0, 1.0);
    result.z += change;
    if (std::abs(change) < 1e-10) break;
  }
  return result;
}

/// Finds z of every group, fills `predicted` and returns the cost of data and calibration.
double IntensityLikelihood::calibrate(LikelihoodWorkspace& workspace) const {
  constexpr double kLeastCurvature = 1e-3;  // keeps Laplace's method defined for heavy tails
  const auto& intensity = workspace.model.intensity_k_km_s;
  double cost = 0.0;
  for (std::size_t g = 0; g < groups_.size(); ++g) {
    const Calibration calibration = calibration_of(groups_[g], intensity);
    workspace.calibration[static_cast<Eigen::Index>(g)] = calibration.z;
    workspace.group_curvature[static_cast<Eigen::Index>(g)] =
        std::max(calibration.curvature, kLeastCurvature);
    cost += 0.5 * calibration.z * calibration.z;
  }
  for (Eigen::Index i = 0; i < data_count(); ++i) {
    const int group = group_of_datum_[static_cast<std::size_t>(i)];
    const Measurement& datum = problem_.data[static_cast<std::size_t>(i)];
    const double factor = group < 0 ? 1.0 : std::exp(datum.calibration_error * workspace.calibration[group]);
    workspace.predicted[i] = factor * intensity[i];
    cost += datum_term(problem_, datum, workspace.predicted[i]).cost;
  }
  return cost;
}

double IntensityLikelihood::prior_cost(const Eigen::VectorXd& state) const {
  double cost = 0.0;
  for (const int entry : with_prior_) {
    const StateParameter& parameter = problem_.parameters[static_cast<std::size_t>(entry)];
    const double e = (state[entry] - parameter.prior_mean) / parameter.prior_sigma;
    cost += 0.5 * e * e;
  }
  return cost;
}

double IntensityLikelihood::cost(const Eigen::Ref<const Eigen::VectorXd>& free,
                                 LikelihoodWorkspace& workspace) const {
  spread(free, workspace.state);
  model_->evaluate(workspace.state, workspace.model);
  return calibrate(workspace) + prior_cost(workspace.state);
}

double IntensityLikelihood::marginal_cost(const Eigen::Ref<const Eigen::VectorXd>& free,
                                          LikelihoodWorkspace& workspace) const {
  double total = cost(free, workspace);
  for (const double curvature : workspace.group_curvature) total += 0.5 * std::log(curvature);
  return total;
}

void IntensityLikelihood::gather_slopes(LikelihoodWorkspace& workspace) const {
  workspace.slopes.setZero();
  for (std::size_t entry = 0; entry < free_of_entry_.size(); ++entry) {
    const int k = free_of_entry_[entry];
    if (k < 0) continue;
    workspace.slopes.col(k) += workspace.model.slopes.col(static_cast<Eigen::Index>(entry)).matrix();
  }
  for (Eigen::Index i = 0; i < data_count(); ++i) {
    const int group = group_of_datum_[static_cast<std::size_t>(i)];
    if (group < 0) continue;
    const double c = problem_.data[static_cast<std::size_t>(i)].calibration_error;
    workspace.slopes.row(i) *= std::exp(c * workspace.calibration[group]);
  }
}

double IntensityLikelihood::linearise(const Eigen::Ref<const Eigen::VectorXd>& free,
                                      LikelihoodWorkspace& workspace) const {
  spread(free, workspace.state);
  model_->evaluate_with_slopes(workspace.state, workspace.model);
  const double cost = calibrate(workspace) + prior_cost(workspace.state);
  gather_slopes(workspace);
  for (Eigen::Index i = 0; i < data_count(); ++i) {
    const DatumTerm term =
        datum_term(problem_, problem_.data[static_cast<std::size_t>(i)], workspace.predicted[i]);
    workspace.residuals[i] = term.residual;
    workspace.residual_slopes[i] = term.residual_slope;
    workspace.jacobian.row(i) = term.residual_slope * workspace.slopes.row(i);
  }
  linearise_groups(workspace);
  linearise_priors(workspace);
  return cost;
}

/// Lets the calibration follow the parameters: dz = -(J_z' J)/(1 + J_z' J_z); groups do not mix.
void IntensityLikelihood::linearise_groups(LikelihoodWorkspace& workspace) const {
  const auto z_slope = [&](Eigen::Index i) {
    return workspace.residual_slopes[i] * problem_.data[static_cast<std::size_t>(i)].calibration_error *
           workspace.predicted[i];
  };
  for (std::size_t g = 0; g < groups_.size(); ++g) {
    const Eigen::Index row = data_count() + static_cast<Eigen::Index>(g);
    auto follow = workspace.jacobian.row(row);
    follow.setZero();
    double norm = 1.0;
    for (const Eigen::Index i : groups_[g].members) {
      norm += z_slope(i) * z_slope(i);
      follow -= z_slope(i) * workspace.jacobian.row(i);
    }
    follow /= norm;
    for (const Eigen::Index i : groups_[g].members) workspace.jacobian.row(i) += z_slope(i) * follow;
    workspace.residuals[row] = workspace.calibration[static_cast<Eigen::Index>(g)];
  }
}

void IntensityLikelihood::linearise_priors(LikelihoodWorkspace& workspace) const {
  Eigen::Index row = data_count() + static_cast<Eigen::Index>(groups_.size());
  for (const int entry : with_prior_) {
    const StateParameter& parameter = problem_.parameters[static_cast<std::size_t>(entry)];
    workspace.residuals[row] = (workspace.state[entry] - parameter.prior_mean) / parameter.prior_sigma;
    workspace.jacobian.row(row).setZero();
    workspace.jacobian(row, free_of_entry_[static_cast<std::size_t>(entry)]) = 1.0 / parameter.prior_sigma;
    ++row;
  }
}

Eigen::MatrixXd IntensityLikelihood::full_design(const Eigen::Ref<const Eigen::VectorXd>& free,
                                                 LikelihoodWorkspace& workspace) const {
  (void)linearise(free, workspace);
  const auto groups = static_cast<Eigen::Index>(groups_.size());
  Eigen::MatrixXd design = Eigen::MatrixXd::Zero(residual_count(), free_count() + groups);
  design.leftCols(free_count()).bottomRows(residual_count() - data_count() - groups) =
      workspace.jacobian.bottomRows(residual_count() - data_count() - groups);
  for (Eigen::Index i = 0; i < data_count(); ++i) {
    design.row(i).head(free_count()) = workspace.residual_slopes[i] * workspace.slopes.row(i);
    const int group = group_of_datum_[static_cast<std::size_t>(i)];
    if (group < 0) continue;
    design(i, free_count() + group) = workspace.residual_slopes[i] *
                                      problem_.data[static_cast<std::size_t>(i)].calibration_error *
                                      workspace.predicted[i];
  }
  design.block(data_count(), free_count(), groups, groups).setIdentity();
  return design;
}

Eigen::VectorXd IntensityLikelihood::gradient(const Eigen::Ref<const Eigen::VectorXd>& free,
                                              LikelihoodWorkspace& workspace) const {
  spread(free, workspace.state);
  model_->evaluate_with_slopes(workspace.state, workspace.model);
  (void)calibrate(workspace);
  gather_slopes(workspace);
  Eigen::VectorXd gradient = Eigen::VectorXd::Zero(free_count());
  for (Eigen::Index i = 0; i < data_count(); ++i) {
    const Measurement& datum = problem_.data[static_cast<std::size_t>(i)];
    gradient +=
        datum_term(problem_, datum, workspace.predicted[i]).slope * workspace.slopes.row(i).transpose();
  }
  for (const int entry : with_prior_) {
    const StateParameter& parameter = problem_.parameters[static_cast<std::size_t>(entry)];
    gradient[free_of_entry_[static_cast<std::size_t>(entry)]] +=
        (workspace.state[entry] - parameter.prior_mean) / (parameter.prior_sigma * parameter.prior_sigma);
  }
  return gradient;
}

Eigen::MatrixXd IntensityLikelihood::information(const Eigen::Ref<const Eigen::VectorXd>& free,
                                                 LikelihoodWorkspace& workspace) const {
  spread(free, workspace.state);
  model_->evaluate_with_slopes(workspace.state, workspace.model);
  (void)calibrate(workspace);
  gather_slopes(workspace);
  Eigen::MatrixXd information = Eigen::MatrixXd::Zero(free_count(), free_count());
  Eigen::VectorXd weight(data_count());
  for (Eigen::Index i = 0; i < data_count(); ++i) {
    weight[i] =
        datum_term(problem_, problem_.data[static_cast<std::size_t>(i)], workspace.predicted[i]).information;
    information += weight[i] * workspace.slopes.row(i).transpose() * workspace.slopes.row(i);
  }
  for (const Group& group : groups_) {  // Schur complement: what is left when z is free
    double own = 1.0;
    Eigen::VectorXd mixed = Eigen::VectorXd::Zero(free_count());
    for (const Eigen::Index i : group.members) {
      const double z_slope =
          problem_.data[static_cast<std::size_t>(i)].calibration_error * workspace.predicted[i];
      own += weight[i] * z_slope * z_slope;
      mixed += weight[i] * z_slope * workspace.slopes.row(i).transpose();
    }
    information -= mixed * mixed.transpose() / own;
  }
  for (const int entry : with_prior_) {
    const StateParameter& parameter = problem_.parameters[static_cast<std::size_t>(entry)];
    const int k = free_of_entry_[static_cast<std::size_t>(entry)];
    information(k, k) += 1.0 / (parameter.prior_sigma * parameter.prior_sigma);
  }
  return information;
}

Eigen::MatrixXd IntensityLikelihood::curvature(const Eigen::VectorXd& free, const Eigen::VectorXd& steps,
                                               LikelihoodWorkspace& workspace) const {
  Eigen::MatrixXd curvature(free_count(), free_count());
  const auto difference = [&](Eigen::Index k, double step) -> Eigen::VectorXd {
    Eigen::VectorXd shifted = free;
    shifted[k] = free[k] + step;
    const Eigen::VectorXd above = gradient(shifted, workspace);
    shifted[k] = free[k] - step;
    return (above - gradient(shifted, workspace)) / (2.0 * step);
  };
  for (Eigen::Index k = 0; k < free_count(); ++k) {
    curvature.col(k) = (4.0 * difference(k, 0.5 * steps[k]) - difference(k, steps[k])) / 3.0;
  }
  return 0.5 * (curvature + curvature.transpose());
}

}  // namespace trotline
