#include "model_answer.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <numbers>

#include <trotline/inference/least_squares.hpp>

#include "diagram_results.hpp"
#include "fitted_covariance.hpp"

namespace trotline {
namespace {

/// The standard deviation and equal-tailed ranges of the posterior about the best fit. An end that a bound of
/// the parameter sets, and not the data, is left out.
Estimate posterior_estimate(const Posterior& posterior, Eigen::Index k, Estimate estimate) {
  if (!posterior.usable()) return estimate;
  const MarginalDensity& marginal = posterior.marginals[static_cast<std::size_t>(k)];
  estimate.error = marginal.sigma;
  if (!marginal.cut_low) {
    estimate.low68 = marginal.central68.low;
    estimate.low95 = marginal.central95.low;
  }
  if (!marginal.cut_high) {
    estimate.high68 = marginal.central68.high;
    estimate.high95 = marginal.central95.high;
  }
  return estimate;
}

/// Value, error and intervals of one entry of the state, in its own scale (ln, or K for the background).
Estimate entry_estimate(const FittedModel& fitted, int entry, const RunOptions& options) {
  Estimate estimate;
  estimate.value = fitted.fit.state[entry];
  const Eigen::Index k = free_index(fitted, entry);
  if (k < 0) return estimate;
  estimate.error = std::sqrt(covariance_of(fitted.fit)(k, k));
  if (options.intervals == "curvature") return plain_estimate(estimate.value, estimate.error);
  if (fitted.posterior) return posterior_estimate(*fitted.posterior, k, estimate);
  const auto which = static_cast<int>(k);
  const Interval one = profile_interval(*fitted.likelihood, fitted.fit, which, 1.0);
  const Interval two = profile_interval(*fitted.likelihood, fitted.fit, which, kZ95);
  estimate.low68 = one.low;
  estimate.high68 = one.high;
  estimate.low95 = two.low;
  estimate.high95 = two.high;
  return estimate;
}

/// Keeps a value only where its own 95 % range is closed; ranges always stay.
Estimate as_range(Estimate estimate, bool several) {
  const bool closed = std::isfinite(estimate.low95) && std::isfinite(estimate.high95);
  if (several || !closed) estimate.value = estimate.error = kNotKnown;
  return estimate;
}

/// The same from draws of the posterior.
Estimate drawn_sum(const FittedModel& fitted, const std::vector<int>& entries, double value) {
  const Eigen::MatrixXd& all = fitted.posterior->sample->all;
  Eigen::VectorXd sums = Eigen::VectorXd::Zero(all.cols());
  for (const int entry : entries) {
    const Eigen::Index k = free_index(fitted, entry);
    if (k >= 0) sums += all.row(k).transpose().array().exp().matrix();
  }
  const MarginalDensity marginal = marginal_of(Eigen::VectorXd(sums.array().log().matrix()));
  return {value,
          marginal.sigma,
          marginal.central68.low,
          marginal.central68.high,
          marginal.central95.low,
          marginal.central95.high};
}

/// ln of a sum of column densities from their logarithms, with the error and the ranges of the curvature.
Estimate ln_sum(const FittedModel& fitted, const std::vector<int>& entries) {
  double sum = 0.0;
  for (const int entry : entries) sum += std::exp(fitted.fit.state[entry]);
  double variance = 0.0;
  for (const int a : entries) {
    for (const int b : entries) {
      variance += std::exp(fitted.fit.state[a] + fitted.fit.state[b]) / (sum * sum) *
                  covariance_between(fitted, a, b);
    }
  }
  const Estimate plain = plain_estimate(std::log(sum), std::sqrt(variance));
  const bool drawn = fitted.posterior && fitted.posterior->sample && fitted.posterior->sample->usable();
  return drawn ? drawn_sum(fitted, entries, plain.value) : plain;
}

/// Components by rising temperature.
std::vector<int> order_of_components(const FittedModel& fitted) {
  const StateLayout& layout = fitted.setup.model->layout();
  std::vector<int> order(static_cast<std::size_t>(layout.components));
  for (int c = 0; c < layout.components; ++c) order[static_cast<std::size_t>(c)] = c;
  std::stable_sort(order.begin(), order.end(), [&](int a, int b) {
    return fitted.fit.state[layout.ln_temperature(a)] < fitted.fit.state[layout.ln_temperature(b)];
  });
  return order;
}

std::vector<int> columns_of_component(const StateLayout& layout, int component) {
  std::vector<int> entries;
  for (int isomer = 0; isomer < layout.isomers; ++isomer)
    entries.push_back(layout.ln_column(component, isomer));
  return entries;
}

void set_column_of(Component& component, const Estimate& ln_column) {
  component.column_density_cm2 = exponential(ln_column);
  component.log10_column_density_cm2 = to_log10(ln_column);
}

double size_arcsec(const FittedModel& fitted, int component) {
  const double size = std::exp(fitted.fit.state[fitted.setup.model->layout().ln_size(component)]);
  return std::isfinite(size) ? size : kNotKnown;
}

void add_isomers(Result& result, const FittedModel& fitted, const RunOptions& options) {
  const StateLayout& layout = fitted.setup.model->layout();
  for (int isomer = 0; isomer < layout.isomers; ++isomer) {
    Component part;
    part.name = fitted.setup.isomers[static_cast<std::size_t>(isomer)];
    part.temperature_k = result.temperature_k;
    set_column_of(part, entry_estimate(fitted, layout.ln_column(0, isomer), options));
    part.source_size_arcsec = size_arcsec(fitted, 0);
    result.components.push_back(part);
  }
}

void add_components(Result& result, const FittedModel& fitted, const RunOptions& options) {
  const StateLayout& layout = fitted.setup.model->layout();
  for (const int c : order_of_components(fitted)) {
    Component part;
    part.name = fmt::format("component {}", result.components.size() + 1);
    part.temperature_k = exponential(entry_estimate(fitted, layout.ln_temperature(c), options));
    set_column_of(part, layout.isomers == 1 ? entry_estimate(fitted, layout.ln_column(c), options)
                                            : ln_sum(fitted, columns_of_component(layout, c)));
    part.source_size_arcsec = size_arcsec(fitted, c);
    result.components.push_back(part);
  }
}

/// T of the component that holds most of the molecules, N of all.
void set_total(Result& result, const FittedModel& fitted) {
  const StateLayout& layout = fitted.setup.model->layout();
  std::vector<int> entries;
  for (int c = 0; c < layout.components; ++c) {
    for (const int entry : columns_of_component(layout, c)) entries.push_back(entry);
  }
  set_column(result, ln_sum(fitted, entries));
  if (layout.components == 1) return;
  const auto most = std::max_element(result.components.begin(), result.components.end(),
                                     [](const Component& a, const Component& b) {
                                       return a.column_density_cm2.value < b.column_density_cm2.value;
                                     });
  result.temperature_k = most->temperature_k;
  result.warnings.push_back(
      fmt::format("T is that of {}, which holds most of the molecules; N is the sum of all "
                  "components",
                  most->name));
}

void set_single(Result& result, const FittedModel& fitted, const RunOptions& options, bool only_ranges) {
  const StateLayout& layout = fitted.setup.model->layout();
  const bool several = result.status == Status::several;
  Estimate ln_t = entry_estimate(fitted, layout.ln_temperature(0), options);
  Estimate ln_n = entry_estimate(fitted, layout.ln_column(0), options);
  if (only_ranges) {
    if (!result.temperature_fixed) ln_t = as_range(ln_t, several);
    ln_n = as_range(ln_n, several);
  }
  result.temperature_k = exponential(ln_t);
  set_column(result, ln_n);
  const double mixed = covariance_between(fitted, layout.ln_column(0), layout.ln_temperature(0));
  if (!result.temperature_fixed && !only_ranges)
    result.correlation_ln_n_t = mixed / (ln_t.error * ln_n.error);
}

std::string parameter_name(const FittedModel& fitted, int entry) {
  const StateLayout& layout = fitted.setup.model->layout();
  if (entry == layout.background()) return "background_k";
  const int place = entry % (layout.isomers + 2);
  std::string name = place < layout.isomers    ? "ln_column_density_cm2"
                     : place == layout.isomers ? "ln_temperature_k"
                                               : "ln_source_size_arcsec";
  if (layout.isomers > 1 && place < layout.isomers) {
    name += "_" + fitted.setup.isomers[static_cast<std::size_t>(place)];
  }
  if (layout.components > 1) {
    const std::vector<int> order = order_of_components(fitted);
    const auto at = std::find(order.begin(), order.end(), entry / (layout.isomers + 2));
    name += fmt::format("_{}", at - order.begin() + 1);
  }
  return name;
}

void set_parameters(Result& result, const FittedModel& fitted) {
  const Eigen::MatrixXd& covariance = covariance_of(fitted.fit);
  for (Eigen::Index k = 0; k < fitted.fit.free.size(); ++k) {
    const int entry = fitted.likelihood->free_entries()[static_cast<std::size_t>(k)];
    result.parameters.push_back(
        {parameter_name(fitted, entry), fitted.fit.free[k], std::sqrt(covariance(k, k))});
    result.parameter_covariance.emplace_back();
    for (Eigen::Index j = 0; j < covariance.cols(); ++j) {
      result.parameter_covariance.back().push_back(covariance(k, j));
    }
  }
}

void set_goodness(Result& result, const FittedModel& fitted) {
  result.dof = fitted.fit.dof;
  if (fitted.setup.kind.noise != NoiseModel::gaussian) return;  // a heavy tail has no chi2
  result.chi2 = fitted.fit.chi2;
  result.p_value = chi2_survival(fitted.fit.chi2, fitted.fit.dof);
}

// ---- predictions
// -------------------------------------------------------------------------------------------

}  // namespace

void set_estimates(Result& result, const FittedModel& fitted, const Species& species,
                   const RunOptions& options, bool only_ranges) {
  const StateLayout& layout = fitted.setup.model->layout();
  const bool several_parts = layout.components > 1 || layout.isomers > 1;
  set_parameters(result, fitted);
  set_goodness(result, fitted);
  result.background_k = fitted.fit.state[layout.background()];
  if (!several_parts) {
    set_single(result, fitted, options, only_ranges);
  } else if (!only_ranges) {
    if (layout.components == 1) {
      result.temperature_k = exponential(entry_estimate(fitted, layout.ln_temperature(0), options));
      add_isomers(result, fitted, options);
    } else {
      add_components(result, fitted, options);
    }
    set_total(result, fitted);
  }
  if (options.source_size_free && layout.components == 1) {
    Estimate ln_size = entry_estimate(fitted, layout.ln_size(0), options);
    if (only_ranges || std::isnan(ln_size.high95))
      ln_size = as_range(ln_size, result.status == Status::several);
    result.source_size_fit_arcsec = exponential(ln_size);
    result.source_size_arcsec = result.source_size_fit_arcsec.value;
  }
  const double t = std::exp(fitted.fit.state[layout.ln_temperature(0)]);
  if (std::isfinite(result.temperature_k.value) && layout.components == 1) {
    set_partition(
        result,
        species.partition->at(std::clamp(t, species.partition->lowest_k(), species.partition->highest_k())),
        *species.partition);
  }
}

}  // namespace trotline
