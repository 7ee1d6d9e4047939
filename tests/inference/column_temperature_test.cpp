#include <gtest/gtest.h>

#include <cmath>
#include <random>

#include <trotline/base/errors.hpp>
#include <trotline/inference/column_temperature.hpp>

#include "simulated_source.hpp"

namespace trotline {
namespace {

/// Positions of all kinds: thin to opaque, cold to hot, some lines as limits.
std::vector<Measurement> random_positions(const ForwardModel& model, int positions, double signal_to_noise) {
  std::mt19937_64 engine(20260606);
  std::uniform_real_distribution<double> uniform;
  std::normal_distribution<double> normal;
  std::vector<Measurement> data;
  for (int i = 0; i < positions; ++i) {
    const double t = 8.0 * std::exp(2.5 * uniform(engine));
    const double depth = 0.01 * std::exp(7.0 * uniform(engine));
    const Eigen::VectorXd exact =
        simulated::intensities(model, simulated::state(simulated::ln_column_for(model, depth, t), t));
    for (const double w : exact) {
      Measurement datum;
      datum.sigma_k_km_s = std::abs(w) / signal_to_noise + 1e-4;
      datum.intensity_k_km_s = w + datum.sigma_k_km_s * normal(engine);
      datum.is_limit = uniform(engine) < 0.1;
      if (datum.is_limit) datum.intensity_k_km_s = w + 2.0 * datum.sigma_k_km_s;
      data.push_back(datum);
    }
  }
  return data;
}

TEST(ColumnTemperatureFitter, AgreesWithTheFitOfOneSource) {
  const ForwardModel model(simulated::ladder(12), simulated::partitions(), {});
  const auto parameters = simulated::column_and_temperature_free(simulated::state(30.0, 30.0));
  const ColumnTemperatureFitter fitter(model, parameters);
  for (const double signal_to_noise : {5.0, 30.0}) {
    const auto data = random_positions(model, 150, signal_to_noise);
    const auto results = fitter.fit_all(data);
    int deeper = 0;
    for (std::size_t i = 0; i < results.size(); ++i) {
      LikelihoodProblem problem;
      problem.data.assign(data.begin() + static_cast<std::ptrdiff_t>(12 * i),
                          data.begin() + static_cast<std::ptrdiff_t>(12 * (i + 1)));
      problem.parameters = parameters;
      const LikelihoodFit one = fit_likelihood(IntensityLikelihood(model, problem));
      EXPECT_LT(results[i].cost, one.cost + 1e-9 * (1.0 + one.cost)) << i;
      if (results[i].cost < one.cost - 1e-6) {  // the table of starts found a deeper minimum
        ++deeper;
        continue;
      }
      EXPECT_EQ(results[i].status, one.status) << i;
      EXPECT_NEAR(results[i].ln_column, one.free[0], 1e-6) << i;
      EXPECT_NEAR(results[i].ln_temperature, one.free[1], 1e-6) << i;
      if (one.status != FitStatus::converged) continue;
      EXPECT_NEAR(results[i].ln_column_variance, one.covariance(0, 0), 1e-4 * one.covariance(0, 0)) << i;
      EXPECT_NEAR(results[i].ln_temperature_variance, one.covariance(1, 1), 1e-4 * one.covariance(1, 1)) << i;
    }
    EXPECT_LE(deeper, 3);
  }
}

TEST(ColumnTemperatureFitter, SameBitsWhateverTheThreads) {
  const ForwardModel model(simulated::ladder(7), simulated::partitions(), {});
  const ColumnTemperatureFitter fitter(model,
                                       simulated::column_and_temperature_free(simulated::state(30.0, 30.0)));
  const auto data = random_positions(model, 61, 20.0);
  const auto one = fitter.fit_all(data);
  for (const int threads : {2, 5, 100}) {
    const auto other = fitter.fit_all(data, threads);
    for (std::size_t i = 0; i < one.size(); ++i) {
      EXPECT_EQ(one[i].ln_column, other[i].ln_column);
      EXPECT_EQ(one[i].covariance, other[i].covariance);
    }
  }
}

TEST(ColumnTemperatureFitter, SaysWhatTheFitOfOneSourceSays) {
  const ForwardModel model(simulated::ladder(4), simulated::partitions(), {});
  const ColumnTemperatureFitter fitter(model,
                                       simulated::column_and_temperature_free(simulated::state(30.0, 30.0)));
  auto workspace = fitter.workspace();
  std::vector<Measurement> limits(4, {1.0, 0.1, true});
  EXPECT_EQ(fitter.fit(limits.data(), workspace).status, FitStatus::only_limits);
  limits[2].is_limit = false;
  EXPECT_EQ(fitter.fit(limits.data(), workspace).status, FitStatus::too_few_data);
}

TEST(ColumnTemperatureFitter, RefusesOtherProblems) {
  const ForwardModel model(simulated::ladder(4), simulated::partitions(), {});
  auto parameters = simulated::column_and_temperature_free(simulated::state(30.0, 30.0));
  const ColumnTemperatureFitter fitter(model, parameters);
  EXPECT_THROW((void)fitter.fit_all(std::vector<Measurement>(5, {1.0, 0.1})), DomainError);
  EXPECT_THROW((void)fitter.fit_all(std::vector<Measurement>(4, {1.0, 0.0})), DomainError);
  EXPECT_THROW((void)fitter.fit_all(std::vector<Measurement>(4, {1.0, 0.1, false, 0.1})), DomainError);
  parameters[3].free = true;
  EXPECT_THROW(ColumnTemperatureFitter(model, parameters), DomainError);
  parameters[3].free = false;
  parameters[0].upper = std::numeric_limits<double>::infinity();
  EXPECT_THROW(ColumnTemperatureFitter(model, parameters), DomainError);
}

}  // namespace
}  // namespace trotline
