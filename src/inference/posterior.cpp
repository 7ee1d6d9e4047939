#include <algorithm>
#include <cmath>
#include <limits>
#include <memory>

#include <trotline/base/errors.hpp>
#include <trotline/inference/density_quadrature.hpp>
#include <trotline/inference/posterior.hpp>

namespace trotline {
namespace {

void require_fit(const IntensityLikelihood& likelihood, const LikelihoodFit& fit) {
  if (fit.free.size() != likelihood.free_count()) {
    throw DomainError("fit.free.size()", static_cast<double>(fit.free.size()), "one for each free entry");
  }
}

std::vector<Eigen::VectorXd> peaks_of(const LikelihoodFit& fit) {
  std::vector<Eigen::VectorXd> peaks{fit.free};
  for (const OtherMinimum& other : fit.others) peaks.push_back(other.free);
  return peaks;
}

bool is_bounded(const IntensityLikelihood& likelihood) {
  const Eigen::VectorXd lower = likelihood.lower_bounds();
  const Eigen::VectorXd upper = likelihood.upper_bounds();
  for (Eigen::Index k = 0; k < lower.size(); ++k) {
    const auto entry = static_cast<std::size_t>(likelihood.free_entries()[static_cast<std::size_t>(k)]);
    const bool has_prior = std::isfinite(likelihood.problem().parameters[entry].prior_sigma);
    if (!has_prior && !(std::isfinite(lower[k]) && std::isfinite(upper[k]))) return false;
  }
  return true;
}

/// ln of the prior's volume that `cost` leaves out: widths of flat priors, roots of Gaussian ones.
double ln_prior_volume(const IntensityLikelihood& likelihood) {
  double ln_volume = 0.0;
  for (const int entry : likelihood.free_entries()) {
    const StateParameter& parameter = likelihood.problem().parameters[static_cast<std::size_t>(entry)];
    ln_volume += std::isfinite(parameter.prior_sigma)
                     ? std::log(parameter.prior_sigma * std::sqrt(2.0 * M_PI))
                     : std::log(parameter.upper - parameter.lower);
  }
  return ln_volume;
}

/// -ln of the posterior with components told apart: their temperatures stay in the order of the fit, without
/// which each component's marginal would be that of all of them.
class OrderedCost {
 public:
  OrderedCost(const IntensityLikelihood& likelihood, const LikelihoodFit& fit)
      : likelihood_(likelihood), workspace_(likelihood.workspace()) {
    const StateLayout& layout = likelihood.model().layout();
    for (int c = 0; c < layout.components; ++c) colder_.push_back(layout.ln_temperature(c));
    std::stable_sort(colder_.begin(), colder_.end(),
                     [&](int a, int b) { return fit.state[a] < fit.state[b]; });
  }

  double operator()(const Eigen::Ref<const Eigen::VectorXd>& free) {
    const double cost = likelihood_.marginal_cost(free, workspace_);
    for (std::size_t c = 1; c < colder_.size(); ++c) {
      if (workspace_.state[colder_[c]] < workspace_.state[colder_[c - 1]]) {
        return std::numeric_limits<double>::infinity();
      }
    }
    return cost;
  }

 private:
  const IntensityLikelihood& likelihood_;
  LikelihoodWorkspace workspace_;
  std::vector<int> colder_;  // entries of ln T, coldest first
};

void integrate(const IntensityLikelihood& likelihood, const LikelihoodFit& fit, Posterior& result) {
  LikelihoodWorkspace workspace = likelihood.workspace();
  BoundedDensity density;
  density.information = likelihood.information(fit.free, workspace);
  OrderedCost cost(likelihood, fit);
  density.cost = [&](const Eigen::VectorXd& free) { return cost(free); };
  density.lower = likelihood.lower_bounds();
  density.upper = likelihood.upper_bounds();
  density.peaks = peaks_of(fit);
  DensityIntegral integral = integrate_density(density);
  if (!integral.usable) return;
  result.status = PosteriorStatus::done;
  result.by_quadrature = true;
  result.marginals = std::move(integral.marginals);
  result.mean = std::move(integral.mean);
  result.covariance = std::move(integral.covariance);
  result.ln_evidence = integral.ln_total - ln_prior_volume(likelihood) - likelihood.constant();
}

/// A draw that comes so near to a bound, as a share of the draws' own spread, says that the bound cuts.
bool is_cut(const MarginalDensity& marginal, const Eigen::VectorXd& draws, double bound) {
  if (!std::isfinite(bound)) return false;
  const double near = 0.1 * marginal.sigma;
  const auto share =
      static_cast<double>(((draws.array() - bound).abs() < near).count()) / static_cast<double>(draws.size());
  const double largest = marginal.density.maxCoeff();
  return share / near > kCutDensity * largest;
}

void take_draws(const IntensityLikelihood& likelihood, Posterior& result) {
  const EnsembleSample& sample = *result.sample;
  result.status = sample.status == SampleStatus::done        ? PosteriorStatus::done
                  : sample.status == SampleStatus::too_short ? PosteriorStatus::too_short
                                                             : PosteriorStatus::not_mixed;
  if (!result.usable()) return;
  const Eigen::VectorXd lower = likelihood.lower_bounds();
  const Eigen::VectorXd upper = likelihood.upper_bounds();
  for (Eigen::Index k = 0; k < sample.all.rows(); ++k) {
    const Eigen::VectorXd draws = sample.all.row(k);
    MarginalDensity marginal = marginal_of(draws);
    marginal.cut_low = is_cut(marginal, draws, lower[k]);
    marginal.cut_high = is_cut(marginal, draws, upper[k]);
    result.marginals.push_back(std::move(marginal));
  }
  result.mean = sample.all.rowwise().mean();
  const Eigen::MatrixXd centred = sample.all.colwise() - result.mean;
  result.covariance = centred * centred.transpose() / static_cast<double>(centred.cols() - 1);
  result.ln_evidence = std::numeric_limits<double>::quiet_NaN();
}

/// Quantiles of one row of numbers, sorted in place.
double quantile_of(const Eigen::VectorXd& sorted, double p) {
  const double place = p * static_cast<double>(sorted.size() - 1);
  const auto low = static_cast<Eigen::Index>(place);
  const Eigen::Index high = std::min(low + 1, sorted.size() - 1);
  return sorted[low] + (place - static_cast<double>(low)) * (sorted[high] - sorted[low]);
}

/// ln(N_u/g_u) at one energy, all components together.
double ln_population(const ForwardModel& model, const Eigen::VectorXd& state, double energy_k, int isomer) {
  const StateLayout& layout = model.layout();
  double total = -std::numeric_limits<double>::infinity();
  for (int component = 0; component < layout.components; ++component) {
    const double ln_t = state[layout.ln_temperature(component)];
    const double ln = state[layout.ln_column(component, isomer)] - model.partition(isomer).at(ln_t).ln_q -
                      energy_k * std::exp(-ln_t);
    const double larger = std::max(total, ln);
    total = larger + std::log1p(std::exp(std::min(total, ln) - larger));
  }
  return total;
}

}  // namespace

EnsembleSample sample_posterior(const IntensityLikelihood& likelihood, const LikelihoodFit& fit,
                                const EnsembleOptions& options) {
  require_fit(likelihood, fit);
  EnsembleTarget target;
  target.make_cost = [&likelihood, &fit]() -> EnsembleCost {
    auto one = std::make_shared<OrderedCost>(likelihood, fit);
    return [one](const Eigen::Ref<const Eigen::MatrixXd>& points, Eigen::Ref<Eigen::VectorXd> cost) {
      for (Eigen::Index i = 0; i < points.cols(); ++i) cost[i] = (*one)(points.col(i));
    };
  };
  target.lower = likelihood.lower_bounds();
  target.upper = likelihood.upper_bounds();
  target.peaks = peaks_of(fit);
  target.covariance = fit.curvature_covariance.allFinite() ? fit.curvature_covariance : fit.covariance;
  return sample_density(target, options);
}

Posterior posterior(const IntensityLikelihood& likelihood, const LikelihoodFit& fit,
                    const PosteriorOptions& options) {
  require_fit(likelihood, fit);
  Posterior result;
  if (!is_bounded(likelihood)) {
    result.status = PosteriorStatus::unbounded;
    return result;
  }
  if (likelihood.free_count() <= kMostQuadratureParameters) integrate(likelihood, fit, result);
  if (!result.usable() || options.with_draws) {
    result.sample = sample_posterior(likelihood, fit, options.ensemble);
    if (!result.by_quadrature) take_draws(likelihood, result);
  }
  return result;
}

DiagramBand diagram_band(const IntensityLikelihood& likelihood, const Eigen::MatrixXd& draws,
                         const Eigen::VectorXd& energy_k, int isomer) {
  if (draws.cols() < 2 || draws.rows() != likelihood.free_count()) {
    throw DomainError("draws.cols()", static_cast<double>(draws.cols()),
                      "at least 2, a row for each free entry");
  }
  DiagramBand band{energy_k, {}, {}, {}, {}, {}};
  for (auto* line : {&band.low95, &band.low68, &band.median, &band.high68, &band.high95})
    line->resize(energy_k.size());
  std::vector<Eigen::VectorXd> states;
  for (Eigen::Index i = 0; i < draws.cols(); ++i) states.push_back(likelihood.state_of(draws.col(i)));
  Eigen::VectorXd populations(draws.cols());
  for (Eigen::Index e = 0; e < energy_k.size(); ++e) {
    for (Eigen::Index i = 0; i < populations.size(); ++i) {
      populations[i] =
          ln_population(likelihood.model(), states[static_cast<std::size_t>(i)], energy_k[e], isomer);
    }
    std::sort(populations.begin(), populations.end());
    band.low95[e] = quantile_of(populations, 0.025);
    band.low68[e] = quantile_of(populations, 0.15865525393145705);
    band.median[e] = quantile_of(populations, 0.5);
    band.high68[e] = quantile_of(populations, 0.84134474606854295);
    band.high95[e] = quantile_of(populations, 0.975);
  }
  return band;
}

}  // namespace trotline
