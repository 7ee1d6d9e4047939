// Straight lines of a million diagrams, likelihood fits, posteriors and ensemble moves, all of 12 lines.
// estimators_benchmark.py runs this and the same with numpy and scipy, and prints ratios.

#include <benchmark/benchmark.h>

#include <random>

#include <trotline/inference/column_temperature.hpp>
#include <trotline/inference/diagram_batch.hpp>
#include <trotline/inference/posterior.hpp>

#include "inference/simulated_source.hpp"

namespace {

using namespace trotline;

constexpr int kLines = 12;

const ForwardModel& model() {
  static const ForwardModel twelve(simulated::ladder(kLines), simulated::partitions(), {});
  return twelve;
}

/// S/N 15, 20 to 100 K, optical depths 0.03 to 3.
std::vector<Measurement> positions(int count) {
  std::mt19937_64 engine(20260607);
  std::uniform_real_distribution<double> uniform;
  std::normal_distribution<double> normal;
  std::vector<Measurement> data;
  for (int i = 0; i < count; ++i) {
    const double t = 20.0 * std::exp(1.6 * uniform(engine));
    const double depth = 0.03 * std::exp(4.6 * uniform(engine));
    const Eigen::VectorXd exact =
        simulated::intensities(model(), simulated::state(simulated::ln_column_for(model(), depth, t), t));
    for (const double w : exact) data.push_back({w * (1.0 + normal(engine) / 15.0), w / 15.0});
  }
  return data;
}

LikelihoodProblem problem_of(const std::vector<Measurement>& data, int position) {
  LikelihoodProblem problem;
  problem.data.assign(data.begin() + position * kLines, data.begin() + (position + 1) * kLines);
  problem.parameters = simulated::column_and_temperature_free(simulated::state(30.0, 30.0));
  return problem;
}

const DiagramBatch& million() {
  static const DiagramBatch kBatch = [] {
    constexpr Eigen::Index kPositions = 1'000'000;
    DiagramBatch batch{Eigen::VectorXd(kLines), Eigen::ArrayXXd(kPositions, kLines),
                       Eigen::ArrayXXd(kPositions, kLines)};
    std::mt19937_64 engine(20260608);
    std::uniform_real_distribution<double> uniform;
    for (Eigen::Index k = 0; k < kLines; ++k) {
      batch.upper_energy_k[k] = 2.766 * static_cast<double>((k + 1) * (k + 2));
      for (Eigen::Index i = 0; i < kPositions; ++i) {
        batch.sigma(i, k) = 0.05 + 0.1 * uniform(engine);
        batch.ln_nu_over_gu(i, k) = 28.0 - batch.upper_energy_k[k] / 40.0 + 0.1 * uniform(engine);
      }
    }
    return batch;
  }();
  return kBatch;
}

// One fit a repetition, so that the best of them can be told, as of numpy's.
void straight_lines_of_a_million(benchmark::State& state) {
  DiagramBatchFit fit;
  fit_thermal_lines(million(), fit);  // the arrays are there
  for (auto _ : state) {
    fit_thermal_lines(million(), fit, static_cast<int>(state.range(0)));
    benchmark::DoNotOptimize(fit.chi2.data());
  }
}
BENCHMARK(straight_lines_of_a_million)->Arg(1)->Unit(benchmark::kMillisecond)->Iterations(1)->Repetitions(15);
BENCHMARK(straight_lines_of_a_million)
    ->Arg(2)
    ->Unit(benchmark::kMillisecond)
    ->UseRealTime()
    ->Iterations(1)
    ->Repetitions(15);

void likelihood_fits(benchmark::State& state) {
  constexpr int kPositions = 2000;
  const auto data = positions(kPositions);
  const ColumnTemperatureFitter fitter(model(), problem_of(data, 0).parameters);
  int unanswered = 0;
  for (auto _ : state) {
    for (const ColumnTemperature& fit : fitter.fit_all(data))
      unanswered += fit.status != FitStatus::converged;
  }
  state.SetItemsProcessed(state.iterations() * kPositions);
  state.counters["unanswered"] =
      static_cast<double>(unanswered) / static_cast<double>(state.iterations() * kPositions);
}
BENCHMARK(likelihood_fits)->Unit(benchmark::kMillisecond);

void likelihood_fit_of_one_source(benchmark::State& state) {
  const auto data = positions(50);
  int position = 0;
  for (auto _ : state) {
    const IntensityLikelihood likelihood(model(), problem_of(data, position++ % 50));
    benchmark::DoNotOptimize(fit_likelihood(likelihood).cost);
  }
}
BENCHMARK(likelihood_fit_of_one_source)->Unit(benchmark::kMicrosecond);

void posterior_of_two(benchmark::State& state) {
  const auto data = positions(50);
  int position = 0;
  for (auto _ : state) {
    state.PauseTiming();
    const IntensityLikelihood likelihood(model(), problem_of(data, position++ % 50));
    const LikelihoodFit fit = fit_likelihood(likelihood);
    state.ResumeTiming();
    benchmark::DoNotOptimize(posterior(likelihood, fit).mean[0]);
  }
}
BENCHMARK(posterior_of_two)->Unit(benchmark::kMillisecond);

void ensemble_moves(benchmark::State& state) {
  const auto data = positions(1);
  const IntensityLikelihood likelihood(model(), problem_of(data, 0));
  const LikelihoodFit fit = fit_likelihood(likelihood);
  EnsembleOptions options;
  options.ensembles = 1;
  options.wanted_effective = 1e9;
  options.most_steps = 10000;
  std::int64_t evaluations = 0;
  for (auto _ : state) evaluations += sample_posterior(likelihood, fit, options).evaluations;
  state.SetItemsProcessed(evaluations);
}
BENCHMARK(ensemble_moves)->Unit(benchmark::kMillisecond);

void model_evaluation(benchmark::State& state) {
  ModelWorkspace workspace = model().workspace();
  Eigen::VectorXd at = simulated::state(simulated::ln_column_for(model(), 1.0, 40.0), 40.0);
  for (auto _ : state) {
    at[0] += 1e-9;
    if (state.range(0) == 0) {
      model().evaluate(at, workspace);
    } else {
      model().evaluate_with_slopes(at, workspace);
    }
    benchmark::DoNotOptimize(workspace.intensity_k_km_s.data());
  }
}
BENCHMARK(model_evaluation)->Arg(0)->Arg(1);

/// What memory gives: 192 MB summed.
void memory_read(benchmark::State& state) {
  const Eigen::ArrayXd numbers = Eigen::ArrayXd::Ones(24'000'000);
  for (auto _ : state) benchmark::DoNotOptimize(numbers.sum());
  state.SetBytesProcessed(state.iterations() * numbers.size() * 8);
}
BENCHMARK(memory_read)->Unit(benchmark::kMillisecond);

}  // namespace
