// What each estimator says of a simulated source, and how often it holds the truth.
#pragma once

#include <array>
#include <optional>

#include <trotline/inference/likelihood_fit.hpp>
#include <trotline/inference/posterior.hpp>

#include "coverage_scenarios.hpp"

namespace trotline::coverage {

enum Method { kLine, kLikelihood, kPosterior, kMethods };

inline constexpr std::array<const char*, kMethods> kMethodNames = {"straight line", "likelihood",
                                                                   "posterior"};
inline constexpr double kZ95 = 1.959963984540054;

/// Of the logarithm of a target. An end that is NaN is open: no limit on that side.
struct Estimate {
  double value = 0.0;
  Interval interval68{};
  Interval interval95{};
};

/// One for each target; nothing where a method has no answer at all.
using Estimates = std::vector<std::optional<Estimate>>;

inline Interval log_of(const Interval& interval) { return {std::log(interval.low), std::log(interval.high)}; }

inline Estimates straight_line(const Scenario& scenario, const Source& source) {
  Estimates estimates(scenario.targets.size());
  const DiagramData data = diagram_of(scenario, source);
  if (data.ln_nu_over_gu.size() < 2) return estimates;
  const ThermalLineFit fit = fit_thermal_line(data);
  if (fit.status != ThermalStatus::done) return estimates;
  static const methyl_cyanide::Partition kTop;
  static const plain::RotorPartition kRotor(1, 0);
  const PartitionFunction& q =
      scenario.is_methyl_cyanide ? static_cast<const PartitionFunction&>(kTop) : kRotor;
  const double t = 1.0 / fit.inverse_temperature_per_k;
  if (t < q.lowest_k() || t > q.highest_k()) return estimates;
  const ThermalState state = thermal_state(fit, q);
  const ThermalIntervals one = thermal_intervals(data, fit, q, 1.0);
  const ThermalIntervals two = thermal_intervals(data, fit, q, kZ95);
  estimates[0] = {std::log(t), log_of(one.temperature_k), log_of(two.temperature_k)};
  estimates[1] = {state.ln_column_per_cm2, one.ln_column_per_cm2, two.ln_column_per_cm2};
  return estimates;
}

/// Index into free of each target: components by their temperature, coldest first.
inline std::vector<int> free_indices(const Scenario& scenario, const IntensityLikelihood& likelihood,
                                     const LikelihoodFit& fit) {
  const StateLayout& layout = likelihood.model().layout();
  const bool swapped =
      layout.components == 2 && fit.state[layout.ln_temperature(0)] > fit.state[layout.ln_temperature(1)];
  std::vector<int> indices;
  for (const Target& target : scenario.targets) {
    const int shift = layout.ln_column(1) - layout.ln_column(0);
    const int entry = !swapped               ? target.entry
                      : target.entry < shift ? target.entry + shift
                                             : target.entry - shift;
    const auto& free = likelihood.free_entries();
    indices.push_back(static_cast<int>(std::find(free.begin(), free.end(), entry) - free.begin()));
  }
  return indices;
}

inline std::array<Estimates, kMethods> estimates_of(const Scenario& scenario, const ForwardModel& model,
                                                    const Source& source, std::uint64_t seed) {
  std::array<Estimates, kMethods> all;
  all.fill(Estimates(scenario.targets.size()));
  all[kLine] = straight_line(scenario, source);
  const IntensityLikelihood likelihood(model, source.problem);
  const LikelihoodFit fit = fit_likelihood(likelihood);
  if (fit.free.size() == 0) return all;
  const std::vector<int> indices = free_indices(scenario, likelihood, fit);
  PosteriorOptions options;
  options.ensemble.seed = seed;
  options.ensemble.ensembles = 1;
  options.ensemble.wanted_effective = 1500.0;  // its quantiles scatter by 0.03 of a standard error
  const Posterior bayes = posterior(likelihood, fit, options);
  for (std::size_t i = 0; i < indices.size(); ++i) {
    const int k = indices[i];
    all[kLikelihood][i] = {fit.free[k], profile_interval(likelihood, fit, k, 1.0),
                           profile_interval(likelihood, fit, k, kZ95)};
    if (!bayes.usable()) continue;
    const MarginalDensity& marginal = bayes.marginals[static_cast<std::size_t>(k)];
    all[kPosterior][i] = {marginal.median, marginal.central68, marginal.central95};
  }
  return all;
}

/// Counts over sources, of one method and target.
struct Tally {
  int sources = 0;
  int answered = 0;
  int held68 = 0;
  int held95 = 0;
  std::vector<double> pulls;

  static bool holds(const Interval& interval, double truth) {
    return !(interval.low > truth) && !(interval.high < truth);
  }

  /// (estimate - truth) over half the 68 % interval, or over the half that has an end.
  static double pull(const Estimate& estimate, double truth) {
    const double low = estimate.value - estimate.interval68.low;
    const double high = estimate.interval68.high - estimate.value;
    const double sigma = std::isnan(low) ? high : std::isnan(high) ? low : 0.5 * (low + high);
    return (estimate.value - truth) / (std::isnan(sigma) ? 1e3 : sigma);
  }

  void add(const std::optional<Estimate>& estimate, double truth) {
    ++sources;
    if (!estimate) return;
    ++answered;
    held68 += holds(estimate->interval68, truth);
    held95 += holds(estimate->interval95, truth);
    pulls.push_back(pull(*estimate, truth));
  }

  void add(const Tally& other) {
    sources += other.sources;
    answered += other.answered;
    held68 += other.held68;
    held95 += other.held95;
    pulls.insert(pulls.end(), other.pulls.begin(), other.pulls.end());
  }

  /// Share of all sources: one without an answer does not hold the truth.
  [[nodiscard]] double coverage68() const { return static_cast<double>(held68) / sources; }
  [[nodiscard]] double coverage95() const { return static_cast<double>(held95) / sources; }

  [[nodiscard]] double median_bias() const {
    if (pulls.empty()) return std::nan("");
    std::vector<double> sorted = pulls;
    std::sort(sorted.begin(), sorted.end());
    return 0.5 * (sorted[(sorted.size() - 1) / 2] + sorted[sorted.size() / 2]);
  }
};

/// By target, then method.
using Tallies = std::vector<std::array<Tally, kMethods>>;

/// Sources first, first + stride ... below `sources`.
inline Tallies tally(const Scenario& scenario, std::uint64_t seed, std::uint64_t number, int sources,
                     int first = 0, int stride = 1) {
  const ForwardModel model = model_of(scenario);
  Tallies tallies(scenario.targets.size());
  for (int s = first; s < sources; s += stride) {
    const Source source = simulate(scenario, model, Draws(seed, number, static_cast<std::uint64_t>(s)));
    const auto estimates = estimates_of(scenario, model, source, seed + static_cast<std::uint64_t>(s));
    for (std::size_t t = 0; t < tallies.size(); ++t) {
      const double truth = source.truth[scenario.targets[t].entry];
      for (std::size_t m = 0; m < kMethods; ++m) tallies[t][m].add(estimates[m][t], truth);
    }
  }
  return tallies;
}

}  // namespace trotline::coverage
