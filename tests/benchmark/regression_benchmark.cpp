// The regressions of the diagram: one straight line of 12 lines, and the fit with its background.

#include <benchmark/benchmark.h>

#include <trotline/inference/least_squares.hpp>
#include <trotline/inference/thermal_line.hpp>

namespace {

using namespace trotline;

DiagramData twelve_lines(double background_k) {
  DiagramData data;
  data.upper_energy_k.resize(12);
  data.frequency_hz.resize(12);
  for (int i = 0; i < 12; ++i) {
    data.upper_energy_k[i] = 2.2 * (i + 1) * (i + 2);
    data.frequency_hz[i] = 90e9 * (i + 1);
  }
  data.background_k = background_k;
  data.covariance = 0.0025 * Eigen::MatrixXd::Identity(12, 12);
  data.covariance.topLeftCorner(6, 6).array() += 0.01;
  data.ln_nu_over_gu = Eigen::VectorXd::Zero(12);
  data.ln_nu_over_gu = diagram_model(data, 28.0, 1.0 / 33.0);
  for (int i = 0; i < 12; ++i) data.ln_nu_over_gu[i] += 0.03 * std::sin(5.0 * i);
  return data;
}

void generalised_straight_line(benchmark::State& state) {
  const DiagramData data = twelve_lines(0.0);
  const Eigen::MatrixXd design = straight_line_design(data.upper_energy_k);
  for (auto _ : state) {
    benchmark::DoNotOptimize(generalised_least_squares(design, data.ln_nu_over_gu, data.covariance).chi2);
  }
}
BENCHMARK(generalised_straight_line);

void weighted_straight_line(benchmark::State& state) {
  const DiagramData data = twelve_lines(0.0);
  const Eigen::MatrixXd design = straight_line_design(data.upper_energy_k);
  const Eigen::VectorXd sigma = data.covariance.diagonal().cwiseSqrt();
  for (auto _ : state) {
    benchmark::DoNotOptimize(weighted_least_squares(design, data.ln_nu_over_gu, sigma).chi2);
  }
}
BENCHMARK(weighted_straight_line);

void diagram_with_background(benchmark::State& state) {
  const DiagramData data = twelve_lines(2.7255);
  for (auto _ : state) benchmark::DoNotOptimize(fit_thermal_line(data).chi2);
}
BENCHMARK(diagram_with_background);

}  // namespace
