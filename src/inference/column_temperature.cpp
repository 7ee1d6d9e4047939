#include <algorithm>
#include <cmath>
#include <limits>
#include <thread>

#include <trotline/base/errors.hpp>
#include <trotline/base/vectorised.hpp>
#include <trotline/inference/column_temperature.hpp>

#include "datum_term.hpp"

namespace trotline {
namespace {

constexpr Eigen::Index kNodes = 26;  // temperatures
constexpr Eigen::Index kCells = 32;  // column densities at each
constexpr double kCellStep = 0.6;    // e-folds of N
constexpr double kThinDepth = 0.02;  // of the most opaque line in the first cell: below, W goes with N
constexpr int kMostStarts = 3;
constexpr int kMostSteps = 60;
constexpr double kSettled = 1e-9;  // steps of ln N and ln T
constexpr double kAtBound = 1e-5;  // of the span between the bounds
constexpr double kSameMinimum = 0.03;

/// Adds one datum's share to all cells: half the squares of residuals, and their derivatives by ln N. A limit
/// counts where the model is above it.
TROTLINE_VECTORISED void add_datum(Eigen::Index n, double datum, double weight, double limit,
                                   const double* __restrict model, const double* __restrict by_column,
                                   double* __restrict cost, double* __restrict slope,
                                   double* __restrict curvature) {
  for (Eigen::Index i = 0; i < n; ++i) {
    const double signed_residual = (model[i] - datum) * weight;
    const double magnitude = signed_residual < 0.0 ? -signed_residual : signed_residual;
    const double residual = (1.0 - 0.5 * limit) * signed_residual + 0.5 * limit * magnitude;
    const double change = by_column[i] * weight;
    cost[i] += 0.5 * residual * residual;
    slope[i] += residual * change;
    curvature[i] += change * change;
  }
}

void require(bool good, const char* argument, double value, const char* allowed) {
  if (!good) throw DomainError(argument, value, allowed);
}

DatumTerm term_of(const Measurement& datum, double predicted) {
  return datum.is_limit ? limit_term(datum, predicted) : gaussian_term(datum, predicted);
}

}  // namespace

ColumnTemperatureFitter::ColumnTemperatureFitter(const ForwardModel& model,
                                                 std::vector<StateParameter> parameters)
    : model_(&model),
      parameters_(std::move(parameters)),
      column_(model.layout().ln_column(0)),
      temperature_(model.layout().ln_temperature(0)) {
  require(model.layout().components == 1 && model.layout().isomers == 1, "components",
          model.layout().components, "one component and one isomer");
  require(static_cast<int>(parameters_.size()) == model.layout().size(), "parameters.size()",
          static_cast<double>(parameters_.size()), "one for each entry of the state");
  for (int i = 0; i < model.layout().size(); ++i) {
    const StateParameter& p = parameters_[static_cast<std::size_t>(i)];
    const bool wanted = i == column_ || i == temperature_;
    require(p.free == wanted && p.same_as < 0, "parameters", i, "free ln N and ln T and nothing else");
    if (!wanted) continue;
    require(std::isfinite(p.lower) && std::isfinite(p.upper) && p.lower < p.upper, "lower", p.lower,
            "finite bounds of ln N and ln T");
    require(std::isinf(p.prior_sigma), "prior_sigma", p.prior_sigma, "no prior");
  }
  tabulate();
}

ColumnTemperatureFitter::Workspace ColumnTemperatureFitter::workspace() const {
  Workspace workspace{model_->workspace(), Eigen::VectorXd(model_->layout().size()), Eigen::ArrayXd(kCells),
                      Eigen::ArrayXd(kCells), Eigen::ArrayXd(kCells)};
  for (std::size_t i = 0; i < parameters_.size(); ++i) {
    workspace.state[static_cast<Eigen::Index>(i)] = parameters_[i].value;
  }
  return workspace;
}

void ColumnTemperatureFitter::tabulate() {
  Workspace scratch = workspace();
  const StateParameter& t = parameters_[static_cast<std::size_t>(temperature_)];
  const double step = (t.upper - t.lower) / static_cast<double>(kNodes);
  ln_temperature_.resize(kNodes);
  first_ln_column_.resize(kNodes);
  for (Eigen::Index node = 0; node < kNodes; ++node) {
    ln_temperature_[node] = t.lower + (static_cast<double>(node) + 0.5) * step;
    scratch.state[temperature_] = ln_temperature_[node];
    scratch.state[column_] = 0.0;
    double deepest = 0.0;
    for (const auto& line : model_->predictions(scratch.state, 0)) {
      if (line.optical_depth > deepest) deepest = line.optical_depth;
    }
    const bool thin = model_->options().opacity == Opacity::thin || !(deepest > 0.0);
    first_ln_column_[node] =
        thin ? parameters_[static_cast<std::size_t>(column_)].lower : std::log(kThinDepth / deepest);
    intensity_.emplace_back(kCells, model_->data());
    slope_.emplace_back(kCells, model_->data());
    for (Eigen::Index cell = 0; cell < kCells; ++cell) {
      scratch.state[column_] = first_ln_column_[node] + kCellStep * static_cast<double>(cell);
      model_->evaluate_with_slopes(scratch.state, scratch.model);
      intensity_.back().row(cell) = scratch.model.intensity_k_km_s.transpose();
      slope_.back().row(cell) = scratch.model.slopes.col(column_).transpose();
    }
  }
}

/// The best N at one temperature of the table: one Gauss-Newton step from every cell, not past its
/// neighbours, and from the first to any smaller N.
ColumnTemperatureFitter::Start ColumnTemperatureFitter::best_of_temperature(Eigen::Index node,
                                                                            const Measurement* data,
                                                                            Workspace& workspace) const {
  const auto index = static_cast<std::size_t>(node);
  workspace.cost.setZero();
  workspace.slope.setZero();
  workspace.curvature.setZero();
  for (Eigen::Index d = 0; d < model_->data(); ++d) {
    add_datum(kCells, data[d].intensity_k_km_s, 1.0 / data[d].sigma_k_km_s, data[d].is_limit ? 1.0 : 0.0,
              intensity_[index].col(d).data(), slope_[index].col(d).data(), workspace.cost.data(),
              workspace.slope.data(), workspace.curvature.data());
  }
  Start best{0.0, ln_temperature_[node], std::numeric_limits<double>::infinity()};
  for (Eigen::Index cell = 0; cell < kCells; ++cell) {
    const double newton = -workspace.slope[cell] / std::max(workspace.curvature[cell], 1e-300);
    double change = std::clamp(newton, -kCellStep, kCellStep);
    double gain = change;
    if (cell == 0 && newton < 0.0) {  // W goes with N: the step is one of the amplitude
      gain = std::max(newton, -1.0);
      change = gain > -1.0 + 1e-3 ? std::log1p(gain) : std::log(1e-3);
    }
    const double cost =
        workspace.cost[cell] + gain * (workspace.slope[cell] + 0.5 * gain * workspace.curvature[cell]);
    if (cost < best.cost) {
      best.cost = cost;
      best.ln_column = first_ln_column_[node] + kCellStep * static_cast<double>(cell) + change;
    }
  }
  return best;
}

/// The deepest valleys over temperature, best first. @return how many
int ColumnTemperatureFitter::find_starts(const Measurement* data, Workspace& workspace, Start* starts) const {
  Start along[kNodes];
  for (Eigen::Index node = 0; node < kNodes; ++node) along[node] = best_of_temperature(node, data, workspace);
  int count = 0;
  for (Eigen::Index node = 0; node < kNodes; ++node) {
    const bool below_left = node == 0 || along[node].cost <= along[node - 1].cost;
    const bool below_right = node == kNodes - 1 || along[node].cost < along[node + 1].cost;
    if (!below_left || !below_right) continue;
    if (count == kMostStarts && along[node].cost >= starts[count - 1].cost) continue;
    int place = count < kMostStarts ? count++ : count - 1;
    starts[place] = along[node];
    while (place > 0 && starts[place].cost < starts[place - 1].cost) {
      std::swap(starts[place], starts[place - 1]);
      --place;
    }
  }
  return count;
}

double ColumnTemperatureFitter::cost_at(double ln_column, double ln_temperature, const Measurement* data,
                                        Workspace& workspace) const {
  workspace.state[column_] = ln_column;
  workspace.state[temperature_] = ln_temperature;
  model_->evaluate(workspace.state, workspace.model);
  double cost = 0.0;
  for (Eigen::Index d = 0; d < model_->data(); ++d)
    cost += term_of(data[d], workspace.model.intensity_k_km_s[d]).cost;
  return cost;
}

double ColumnTemperatureFitter::linearise(const Descent& at, const Measurement* data, Workspace& workspace,
                                          Eigen::Vector2d& gradient, Eigen::Matrix2d& information) const {
  workspace.state[column_] = at.ln_column;
  workspace.state[temperature_] = at.ln_temperature;
  model_->evaluate_with_slopes(workspace.state, workspace.model);
  double cost = 0.0;
  gradient.setZero();
  information.setZero();
  for (Eigen::Index d = 0; d < model_->data(); ++d) {
    const DatumTerm term = term_of(data[d], workspace.model.intensity_k_km_s[d]);
    const double by_column = workspace.model.slopes(d, column_);
    const double by_temperature = workspace.model.slopes(d, temperature_);
    cost += term.cost;
    gradient[0] += term.slope * by_column;
    gradient[1] += term.slope * by_temperature;
    information(0, 0) += term.information * by_column * by_column;
    information(0, 1) += term.information * by_column * by_temperature;
    information(1, 1) += term.information * by_temperature * by_temperature;
  }
  information(1, 0) = information(0, 1);
  return cost;
}

ColumnTemperatureFitter::Descent ColumnTemperatureFitter::descend(const Start& start, const Measurement* data,
                                                                  Workspace& workspace) const {
  const StateParameter& n = parameters_[static_cast<std::size_t>(column_)];
  const StateParameter& t = parameters_[static_cast<std::size_t>(temperature_)];
  Descent here{std::clamp(start.ln_column, n.lower, n.upper),
               std::clamp(start.ln_temperature, t.lower, t.upper), 0.0, Eigen::Matrix2d::Zero(), false};
  Eigen::Vector2d gradient;
  here.cost = linearise(here, data, workspace, gradient, here.information);
  double damping = 1e-3;
  for (int step = 0; step < kMostSteps && !here.settled; ++step) {
    Eigen::Matrix2d damped = here.information;
    damped.diagonal() *= 1.0 + damping;
    const double determinant = damped(0, 0) * damped(1, 1) - damped(0, 1) * damped(0, 1);
    if (!(determinant > 0.0)) break;
    const double by_n =
        std::clamp(-(damped(1, 1) * gradient[0] - damped(0, 1) * gradient[1]) / determinant, -1.5, 1.5);
    const double by_t =
        std::clamp(-(damped(0, 0) * gradient[1] - damped(0, 1) * gradient[0]) / determinant, -1.0, 1.0);
    Descent next = here;
    next.ln_column = std::clamp(here.ln_column + by_n, n.lower, n.upper);
    next.ln_temperature = std::clamp(here.ln_temperature + by_t, t.lower, t.upper);
    Eigen::Vector2d next_gradient;
    next.cost = linearise(next, data, workspace, next_gradient, next.information);
    const double moved = std::max(std::abs(next.ln_column - here.ln_column),
                                  std::abs(next.ln_temperature - here.ln_temperature));
    // Near the minimum costs differ by their rounding alone; there the step itself decides.
    if (next.cost <= here.cost + 1e-14 * (1.0 + here.cost)) {
      here = next;
      gradient = next_gradient;
      here.settled = moved < kSettled;
      damping = damping > 1e-9 ? damping * 0.1 : 0.0;
    } else {
      if (moved < kSettled) here.settled = true;
      damping = std::max(10.0 * damping, 1e-4);
    }
  }
  return here;
}

bool ColumnTemperatureFitter::are_parted(const Descent& a, const Descent& b, const Measurement* data,
                                         Workspace& workspace) const {
  const double higher = std::max(a.cost, b.cost);
  for (const double s : {0.2, 0.35, 0.5, 0.65, 0.8}) {
    const double cost = cost_at((1.0 - s) * a.ln_column + s * b.ln_column,
                                (1.0 - s) * a.ln_temperature + s * b.ln_temperature, data, workspace);
    if (cost > higher + 0.5) return true;
  }
  return false;
}

FitStatus ColumnTemperatureFitter::status_of(const Descent& best, const Measurement* data) const {
  const auto measured =
      std::count_if(data, data + model_->data(), [](const Measurement& d) { return !d.is_limit; });
  if (measured == 0) return FitStatus::only_limits;
  if (measured < 2) return FitStatus::too_few_data;
  const auto is_at_bound = [&](int entry, double value) {
    const StateParameter& p = parameters_[static_cast<std::size_t>(entry)];
    const double near = kAtBound * (p.upper - p.lower);
    return value - p.lower <= near || p.upper - value <= near;
  };
  if (is_at_bound(column_, best.ln_column) || is_at_bound(temperature_, best.ln_temperature))
    return FitStatus::at_bound;
  const double trace = best.information.trace();
  const double determinant = best.information.determinant();
  const double least = 0.5 * trace - std::sqrt(std::max(0.0, 0.25 * trace * trace - determinant));
  return least * kWideErrorEFolds * kWideErrorEFolds > 1.0 ? FitStatus::converged : FitStatus::degenerate;
}

ColumnTemperature ColumnTemperatureFitter::fit_the_long_way(const Measurement* data) const {
  const IntensityLikelihood likelihood(*model_, {{data, data + model_->data()}, parameters_});
  const LikelihoodFit fit = fit_likelihood(likelihood);
  ColumnTemperature result;
  result.status = fit.status;
  if (fit.free.size() == 0) return result;
  result.ln_column = fit.free[0];
  result.ln_temperature = fit.free[1];
  result.ln_column_variance = fit.covariance(0, 0);
  result.ln_temperature_variance = fit.covariance(1, 1);
  result.covariance = fit.covariance(0, 1);
  result.cost = fit.cost;
  return result;
}

ColumnTemperature ColumnTemperatureFitter::fit(const Measurement* data, Workspace& workspace) const {
  Start starts[kMostStarts];
  const int count = find_starts(data, workspace, starts);
  Descent found[kMostStarts];
  int best = -1;
  for (int i = 0; i < count; ++i) {
    found[i] = descend(starts[i], data, workspace);
    if (best < 0 || found[i].cost < found[best].cost) best = i;
  }
  if (best < 0 || !found[best].settled) return fit_the_long_way(data);
  const Descent& answer = found[best];
  ColumnTemperature result;
  result.status = status_of(answer, data);
  if (result.status != FitStatus::converged) return fit_the_long_way(data);
  for (int i = 0; i < count; ++i) {
    const double apart = std::max(std::abs(found[i].ln_column - answer.ln_column),
                                  std::abs(found[i].ln_temperature - answer.ln_temperature));
    const bool as_good =
        found[i].settled && found[i].cost - answer.cost <= kAsGoodCost && apart > kSameMinimum;
    if (as_good && are_parted(answer, found[i], data, workspace)) result.status = FitStatus::multimodal;
  }
  const Eigen::Matrix2d covariance = answer.information.inverse();
  result.ln_column = answer.ln_column;
  result.ln_temperature = answer.ln_temperature;
  result.ln_column_variance = covariance(0, 0);
  result.ln_temperature_variance = covariance(1, 1);
  result.covariance = covariance(0, 1);
  result.cost = answer.cost;
  return result;
}

std::vector<ColumnTemperature> ColumnTemperatureFitter::fit_all(const std::vector<Measurement>& data,
                                                                int threads) const {
  const auto each = static_cast<std::size_t>(model_->data());
  require(data.size() % each == 0, "data.size()", static_cast<double>(data.size()),
          "a multiple of the model's data");
  for (const Measurement& datum : data) {
    require(std::isfinite(datum.intensity_k_km_s), "intensity_k_km_s", datum.intensity_k_km_s, "finite");
    require(std::isfinite(datum.sigma_k_km_s) && datum.sigma_k_km_s > 0.0, "sigma_k_km_s", datum.sigma_k_km_s,
            "finite and above 0");
    require(datum.calibration_error == 0.0, "calibration_error", datum.calibration_error, "0");
  }
  std::vector<ColumnTemperature> results(data.size() / each);
  const std::size_t workers = std::clamp<std::size_t>(static_cast<std::size_t>(std::max(1, threads)), 1,
                                                      std::max<std::size_t>(1, results.size()));
  const auto work = [&](std::size_t worker) {
    Workspace own = workspace();
    for (std::size_t i = results.size() * worker / workers; i < results.size() * (worker + 1) / workers;
         ++i) {
      results[i] = fit(data.data() + i * each, own);
    }
  };
  std::vector<std::jthread> others;
  for (std::size_t worker = 1; worker < workers; ++worker) others.emplace_back(work, worker);
  work(0);
  return results;
}

}  // namespace trotline
