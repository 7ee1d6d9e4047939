#include <gtest/gtest.h>
#include <nlohmann/json.hpp>

#include <cmath>
#include <fstream>
#include <random>

#include <trotline/base/errors.hpp>
#include <trotline/inference/likelihood_fit.hpp>

#include "simulated_source.hpp"

namespace trotline {
namespace {

using simulated::column_and_temperature_free;
using simulated::exact_data;
using simulated::intensities;
using simulated::ladder;
using simulated::ln_column_for;
using simulated::partitions;

constexpr double kZ95 = 1.959963984540054;

struct StoredTable {
  std::vector<ModelLine> lines;
  LikelihoodProblem problem;
  Eigen::Vector2d best;
  Eigen::Matrix2d covariance;
  double cost;
};

StoredTable stored_table(const nlohmann::json& table) {
  StoredTable stored;
  const auto numbers = [&](const char* key) { return table.at(key).get<std::vector<double>>(); };
  for (std::size_t i = 0; i < table.at("frequency_hz").size(); ++i) {
    ModelLine line;
    line.constants = {numbers("frequency_hz")[i], numbers("energy_k")[i], numbers("degeneracy")[i],
                      numbers("einstein_a")[i]};
    line.fwhm_km_s = numbers("fwhm_km_s")[i];
    line.beam_fwhm_arcsec = numbers("beam_arcsec")[i];
    line.datum = static_cast<int>(i);
    stored.lines.push_back(line);
    Measurement datum;
    datum.intensity_k_km_s = numbers("intensity")[i];
    datum.sigma_k_km_s = numbers("sigma")[i];
    datum.is_limit = table.at("limit")[i].get<bool>();
    stored.problem.data.push_back(datum);
  }
  stored.problem.parameters = column_and_temperature_free(simulated::state(
      30.0, 30.0, table.at("size_arcsec").get<double>(), table.at("background_k").get<double>()));
  stored.best << table.at("ln_column").get<double>(), table.at("ln_temperature").get<double>();
  for (int i = 0; i < 2; ++i) {
    for (int j = 0; j < 2; ++j) {
      stored.covariance(i, j) =
          table.at("covariance")[static_cast<std::size_t>(i)][static_cast<std::size_t>(j)];
    }
  }
  stored.cost = table.at("cost").get<double>();
  return stored;
}

// tests/reference/likelihood_fits.py: scipy.optimize on the same 200 tables; values stored beside it.
TEST(LikelihoodFit, AgreesWithScipyOn200SimulatedTables) {
  std::ifstream file(std::string(TROTLINE_SOURCE_DIR) + "/tests/reference/likelihood_fits.json");
  const auto document = nlohmann::json::parse(file);
  ASSERT_EQ(document.at("tables").size(), 200u);
  for (const auto& table : document.at("tables")) {
    const StoredTable stored = stored_table(table);
    const ForwardModel model(stored.lines, partitions(), {});
    const IntensityLikelihood likelihood(model, stored.problem);
    const LikelihoodFit fit = fit_likelihood(likelihood);
    ASSERT_TRUE(fit.has_answer()) << table.at("kind");
    EXPECT_NEAR(fit.cost, stored.cost, 1e-7 * (1.0 + stored.cost)) << table.at("kind");
    // relative in N and in T
    EXPECT_NEAR(fit.free[0], stored.best[0], 1e-6) << table.at("kind");
    EXPECT_NEAR(fit.free[1], stored.best[1], 1e-6) << table.at("kind");
    const bool limits = table.at("kind") == "limits";
    const Eigen::Matrix2d covariance = limits ? fit.curvature_covariance : fit.covariance;
    EXPECT_LT((covariance - stored.covariance).norm(), 1e-4 * stored.covariance.norm()) << table.at("kind");
  }
}

TEST(LikelihoodFit, ReturnsTheTruthWithoutNoise) {
  const ForwardModel model(ladder(10), partitions(), {});
  for (const double t : {6.0, 15.0, 60.0, 250.0}) {
    for (const double tau0 : {1e-3, 0.3, 3.0, 30.0}) {
      const Eigen::VectorXd truth = simulated::state(ln_column_for(model, tau0, t), t);
      LikelihoodProblem problem{exact_data(intensities(model, truth), 0.05),
                                column_and_temperature_free(truth)};
      const IntensityLikelihood likelihood(model, problem);
      const LikelihoodFit fit = fit_likelihood(likelihood);
      EXPECT_EQ(fit.status, FitStatus::converged) << t << " K, tau " << tau0;
      EXPECT_NEAR(fit.free[0], truth[0], 1e-6);
      EXPECT_NEAR(fit.free[1], truth[1], 1e-6);
      EXPECT_NEAR(fit.chi2, 0.0, 1e-9);
      EXPECT_EQ(fit.dof, 8);
    }
  }
}

TEST(LikelihoodFit, GradientAndCurvatureAreThoseOfTheCost) {
  auto lines = ladder(8);
  lines[5].datum = 4;  // a blend
  lines[5].offset_km_s = 1.5;
  lines[6].datum = 5;
  lines[7].datum = 6;
  for (auto& line : lines) line.beam_fwhm_arcsec = 20.0 + line.constants.upper_energy_k * 0.05;
  const ForwardModel model(lines, partitions(), {});
  Eigen::VectorXd truth = simulated::state(ln_column_for(model, 2.0, 25.0), 25.0, 11.0);
  for (const NoiseModel noise : {NoiseModel::gaussian, NoiseModel::student_t}) {
    LikelihoodProblem problem{exact_data(intensities(model, truth), 0.1), column_and_temperature_free(truth),
                              noise};
    problem.parameters[2].free = problem.parameters[3].free = true;
    problem.parameters[3].prior_mean = 2.9;
    problem.parameters[3].prior_sigma = 0.3;
    for (std::size_t i = 0; i < problem.data.size(); ++i) {
      problem.data[i].intensity_k_km_s *= 1.0 + 0.12 * std::sin(3.0 * static_cast<double>(i));
      problem.data[i].calibration_error = i < 5 ? 0.1 : 0.0;
      problem.data[i].calibration_group = i < 3 ? 1 : -1;
    }
    problem.data[6].is_limit = true;
    const IntensityLikelihood likelihood(model, problem);
    LikelihoodWorkspace workspace = likelihood.workspace();
    const Eigen::Vector4d free = truth + Eigen::Vector4d(0.05, -0.02, 0.1, 0.1);
    const Eigen::VectorXd gradient = likelihood.gradient(free, workspace);
    const double cost = likelihood.linearise(free, workspace);
    EXPECT_NEAR(cost, 0.5 * workspace.residuals.squaredNorm(), 1e-12 * cost);
    EXPECT_TRUE((workspace.jacobian.transpose() * workspace.residuals).isApprox(gradient, 1e-8));
    const double h = 1e-3;
    for (Eigen::Index k = 0; k < 4; ++k) {
      const auto at = [&](double step) {
        Eigen::Vector4d shifted = free;
        shifted[k] += step;
        return likelihood.cost(shifted, workspace);
      };
      // sixth-order difference; the remainder is of order h^6
      const double slope =
          (45 * (at(h) - at(-h)) - 9 * (at(2 * h) - at(-2 * h)) + at(3 * h) - at(-3 * h)) / (60 * h);
      EXPECT_NEAR(gradient[k], slope, 1e-7 * gradient.norm());
      const double bend =
          (16 * (at(h) + at(-h)) - at(2 * h) - at(-2 * h) - 30 * at(0)) / (12 * h * h);  // order h^4
      const Eigen::MatrixXd curvature =
          likelihood.curvature(free, Eigen::Vector4d::Constant(1e-3), workspace);
      EXPECT_NEAR(curvature(k, k), bend, 1e-4 * curvature.norm());
    }
  }
}

// Calibration on the model pulls nothing low: with one shared factor the best N is that without it.
TEST(LikelihoodFit, SharedCalibrationLeavesTheBestValuesAndWidensN) {
  const ForwardModel model(ladder(8), partitions(), {Opacity::thin, SourceShape::gaussian, 1});
  const Eigen::VectorXd truth = simulated::state(28.0, 30.0);
  LikelihoodProblem problem{exact_data(intensities(model, truth), 0.01), column_and_temperature_free(truth)};
  for (std::size_t i = 0; i < problem.data.size(); ++i) {
    problem.data[i].intensity_k_km_s *= 1.0 + 0.01 * std::cos(5.0 * static_cast<double>(i));
  }
  const LikelihoodFit apart = fit_likelihood(IntensityLikelihood(model, problem));
  for (Measurement& datum : problem.data) {
    datum.calibration_error = 0.1;
    datum.calibration_group = 0;
  }
  const IntensityLikelihood shared_likelihood(model, problem);
  const LikelihoodFit shared = fit_likelihood(shared_likelihood);
  EXPECT_NEAR(shared.free[0], apart.free[0], 1e-6);
  EXPECT_NEAR(shared.free[1], apart.free[1], 1e-6);
  // thin lines: ln N and ln s are one, so the variances add; T knows nothing of it
  EXPECT_NEAR(shared.covariance(0, 0), apart.covariance(0, 0) + 0.01, 1e-6);
  EXPECT_NEAR(shared.covariance(1, 1), apart.covariance(1, 1), 1e-8);
  const Interval interval = profile_interval(shared_likelihood, shared, 0, 1.0);
  EXPECT_NEAR(interval.high - shared.free[0], std::sqrt(shared.covariance(0, 0)), 1e-3);
}

TEST(LikelihoodFit, CalibrationOfSmallNoiseIsTheCovarianceOfTheDiagram) {
  const ForwardModel model(ladder(8), partitions(), {Opacity::thin, SourceShape::gaussian, 1});
  const Eigen::VectorXd truth = simulated::state(28.0, 30.0, 0.0, 0.0);
  LikelihoodProblem problem{exact_data(intensities(model, truth), 0.01), column_and_temperature_free(truth)};
  DiagramData diagram;
  diagram.ln_nu_over_gu = Eigen::VectorXd::Zero(8);
  diagram.upper_energy_k.resize(8);
  diagram.frequency_hz = Eigen::VectorXd::Constant(8, 1e11);
  diagram.covariance = Eigen::MatrixXd::Identity(8, 8) * 1e-4;
  for (int i = 0; i < 8; ++i) {
    problem.data[static_cast<std::size_t>(i)].calibration_error = 0.07;
    problem.data[static_cast<std::size_t>(i)].calibration_group = i / 3;
    diagram.upper_energy_k[i] = model.lines()[static_cast<std::size_t>(i)].constants.upper_energy_k;
    diagram.ln_nu_over_gu[i] = 20.0 - diagram.upper_energy_k[i] / 30.0;
    for (int j = 0; j < 8; ++j) diagram.covariance(i, j) += i / 3 == j / 3 ? 0.07 * 0.07 : 0.0;
  }
  const LikelihoodFit fit = fit_likelihood(IntensityLikelihood(model, problem));
  const ThermalState line = thermal_state(fit_thermal_line(diagram), plain::RotorPartition(1, 0));
  EXPECT_NEAR(std::sqrt(fit.covariance(0, 0)) / line.ln_column_sigma, 1.0, 1e-6);
  EXPECT_NEAR(30.0 * std::sqrt(fit.covariance(1, 1)) / line.temperature_sigma_k, 1.0, 1e-6);
}

TEST(LikelihoodFit, SecondComponentAndIsomersAreRecoveredWithoutNoise) {
  ForwardModelOptions options;
  options.components = 2;
  const ForwardModel two(ladder(16), partitions(), options);
  Eigen::VectorXd truth(7);
  truth << 37.5, std::log(15.0), std::numeric_limits<double>::infinity(), 35.5, std::log(110.0),
      std::numeric_limits<double>::infinity(), 2.7255;
  LikelihoodProblem problem{exact_data(intensities(two, truth), 0.02), std::vector<StateParameter>(7)};
  for (std::size_t i = 0; i < 7; ++i) problem.parameters[i].value = truth[static_cast<Eigen::Index>(i)];
  for (const std::size_t i : {0u, 1u, 3u, 4u}) {
    problem.parameters[i].free = true;
    problem.parameters[i].lower = i % 3 == 0 ? 20.0 : std::log(2.8);
    problem.parameters[i].upper = i % 3 == 0 ? 50.0 : std::log(1000.0);
    problem.parameters[i].value = i % 3 == 0 ? 30.0 : 3.0;
  }
  const LikelihoodFit fit = fit_likelihood(IntensityLikelihood(two, problem));
  ASSERT_EQ(fit.status, FitStatus::converged);
  EXPECT_TRUE(fit.state.head(2).isApprox(truth.head(2), 1e-5));
  EXPECT_TRUE(fit.state.segment(3, 2).isApprox(truth.segment(3, 2), 1e-5));

  auto lines = ladder(10);
  for (std::size_t i = 0; i < lines.size(); ++i) lines[i].isomer = static_cast<int>((i + 1) % 2);
  const ForwardModel apart(lines, partitions(2), {});
  Eigen::VectorXd isomers(5);
  isomers << 36.0, 37.1, std::log(40.0), std::numeric_limits<double>::infinity(), 2.7255;
  LikelihoodProblem isomer_problem{exact_data(intensities(apart, isomers), 0.02),
                                   std::vector<StateParameter>(5)};
  for (std::size_t i = 0; i < 5; ++i)
    isomer_problem.parameters[i].value = isomers[static_cast<Eigen::Index>(i)];
  for (const std::size_t i : {0u, 1u, 2u}) {
    isomer_problem.parameters[i].free = true;
    isomer_problem.parameters[i].lower = i < 2 ? 20.0 : std::log(2.8);
    isomer_problem.parameters[i].upper = i < 2 ? 50.0 : std::log(1000.0);
    isomer_problem.parameters[i].value = 4.0;
  }
  const LikelihoodFit isomer_fit = fit_likelihood(IntensityLikelihood(apart, isomer_problem));
  ASSERT_EQ(isomer_fit.status, FitStatus::converged);
  EXPECT_TRUE(isomer_fit.state.head(3).isApprox(isomers.head(3), 1e-6));
}

TEST(LikelihoodFit, HeavyTailsForgiveOneOutlier) {
  const ForwardModel model(ladder(9), partitions(), {});
  const Eigen::VectorXd truth = simulated::state(ln_column_for(model, 0.5, 40.0), 40.0);
  LikelihoodProblem problem{exact_data(intensities(model, truth), 0.03), column_and_temperature_free(truth)};
  problem.data[8].intensity_k_km_s *= 1.9;  // 30 sigma
  const LikelihoodFit gaussian = fit_likelihood(IntensityLikelihood(model, problem));
  problem.noise = NoiseModel::student_t;
  const LikelihoodFit robust = fit_likelihood(IntensityLikelihood(model, problem));
  EXPECT_GT(std::abs(gaussian.free[1] - truth[1]), 0.1);
  EXPECT_LT(std::abs(robust.free[1] - truth[1]), 0.02);
}

TEST(LikelihoodFit, SaysThatSizeAndColumnAreDegenerateForThinLinesInOneBeam) {
  auto lines = ladder(8);
  for (auto& line : lines) line.beam_fwhm_arcsec = 25.0;
  const ForwardModel model(lines, partitions(), {});
  const Eigen::VectorXd truth = simulated::state(ln_column_for(model, 1e-3, 30.0), 30.0, 8.0);
  LikelihoodProblem problem{exact_data(intensities(model, truth), 0.05), column_and_temperature_free(truth)};
  problem.parameters[2].free = true;
  problem.parameters[2].lower = std::log(0.5);
  problem.parameters[2].upper = std::log(100.0);
  const LikelihoodFit fit = fit_likelihood(IntensityLikelihood(model, problem));
  EXPECT_TRUE(fit.status == FitStatus::degenerate || fit.status == FitStatus::at_bound);
  EXPECT_GT(fit.weakest_sigma, 1.0);
  // N f is what the data hold: N and size move against one another, T stays
  EXPECT_LT(fit.weakest_direction[0] * fit.weakest_direction[2], 0.0);
  EXPECT_LT(std::abs(fit.weakest_direction[1]), 0.02);
}

TEST(LikelihoodFit, SizeIsHeldByBeamsThatDiffer) {
  auto lines = ladder(9);
  for (std::size_t i = 0; i < lines.size(); ++i)
    lines[i].beam_fwhm_arcsec = 28.0 / static_cast<double>(i + 1);
  const ForwardModel model(lines, partitions(), {});
  const Eigen::VectorXd truth = simulated::state(ln_column_for(model, 1.0, 40.0), 40.0, 9.0);
  LikelihoodProblem problem{exact_data(intensities(model, truth), 0.05), column_and_temperature_free(truth)};
  problem.parameters[2].free = true;
  problem.parameters[2].lower = std::log(0.5);
  problem.parameters[2].upper = std::log(100.0);
  const LikelihoodFit fit = fit_likelihood(IntensityLikelihood(model, problem));
  EXPECT_EQ(fit.status, FitStatus::converged);
  EXPECT_TRUE(fit.state.head(3).isApprox(truth.head(3), 1e-6));
}

TEST(LikelihoodFit, ReportsABoundThatTheDataPushAgainst) {
  const ForwardModel model(ladder(5), partitions(), {});
  const Eigen::VectorXd truth = simulated::state(30.0, 40.0);
  LikelihoodProblem problem{exact_data(intensities(model, truth), 0.05), column_and_temperature_free(truth)};
  for (std::size_t i = 0; i < 5; ++i)
    problem.data[i].intensity_k_km_s *= std::pow(4.0, static_cast<double>(i));
  const IntensityLikelihood likelihood(model, problem);
  const LikelihoodFit fit = fit_likelihood(likelihood);
  EXPECT_EQ(fit.status, FitStatus::at_bound);
  EXPECT_EQ(fit.at_bound, std::vector<int>{1});
  EXPECT_FALSE(fit.has_answer());
  const Interval interval = profile_interval(likelihood, fit, 1, kZ95);
  EXPECT_TRUE(std::isnan(interval.high));
  EXPECT_GT(std::exp(interval.low), 40.0);  // but T has a lower limit
}

TEST(LikelihoodFit, SaysWhenThereAreOnlyLimitsOrTooFewData) {
  const ForwardModel model(ladder(4), partitions(), {});
  const Eigen::VectorXd truth = simulated::state(30.0, 40.0);
  LikelihoodProblem problem{exact_data(intensities(model, truth), 0.3), column_and_temperature_free(truth)};
  for (auto& datum : problem.data) datum.is_limit = true;
  EXPECT_EQ(fit_likelihood(IntensityLikelihood(model, problem)).status, FitStatus::only_limits);
  problem.data[0].is_limit = false;
  EXPECT_EQ(fit_likelihood(IntensityLikelihood(model, problem)).status, FitStatus::too_few_data);
}

TEST(LikelihoodFit, NegativeIntensitiesCount) {
  const ForwardModel model(ladder(8), partitions(), {});
  const Eigen::VectorXd truth = simulated::state(ln_column_for(model, 0.1, 12.0), 12.0);
  const Eigen::VectorXd w = intensities(model, truth);
  LikelihoodProblem problem{exact_data(w, 0.0, 0.05 * w.maxCoeff()), column_and_temperature_free(truth)};
  problem.data[7].intensity_k_km_s = -1.0 * problem.data[7].sigma_k_km_s;
  const LikelihoodFit fit = fit_likelihood(IntensityLikelihood(model, problem));
  EXPECT_EQ(fit.status, FitStatus::converged);
  EXPECT_NEAR(fit.free[1], truth[1], 0.2);
  EXPECT_NEAR(fit.residual_sigma[7], -1.0 - w[7] / problem.data[7].sigma_k_km_s, 0.1);
}

// Trap: the mean of ln W is biased by -sigma^2/2W^2, and W <= 0 has no logarithm. At S/N 3 the diagram sees
// it; the likelihood of the intensities does not.
TEST(LikelihoodFit, IsNotBiasedWhereTheLogarithmIs) {
  constexpr int kTables = 1500;
  const ForwardModel model(ladder(2), partitions(), {Opacity::thin, SourceShape::gaussian, 1});
  const Eigen::VectorXd truth = simulated::state(28.0, 10.0);
  const Eigen::VectorXd w = intensities(model, truth);
  LikelihoodProblem problem{exact_data(w, 1.0 / 3.5), column_and_temperature_free(truth)};
  problem.parameters[1].free = false;  // T known: ln N is the mean over lines
  std::mt19937_64 engine(20260511);
  std::normal_distribution<double> normal;
  double sum = 0.0;
  double log_sum = 0.0;
  int kept = 0;
  for (int table = 0; table < kTables; ++table) {
    double logs = 0.0;
    bool positive = true;
    for (Eigen::Index i = 0; i < 2; ++i) {
      auto& datum = problem.data[static_cast<std::size_t>(i)];
      datum.intensity_k_km_s = w[i] + datum.sigma_k_km_s * normal(engine);
      positive = positive && datum.intensity_k_km_s > 0.0;
      logs += 0.5 * std::log(std::max(datum.intensity_k_km_s, 1e-300) / w[i]);
    }
    if (!positive) continue;
    ++kept;
    log_sum += logs;
    FitOptions options;
    options.most_grid_starts = 0;
    options.starts = {Eigen::VectorXd::Constant(1, 28.0)};
    sum += std::exp(fit_likelihood(IntensityLikelihood(model, problem), options).free[0] - 28.0) - 1.0;
  }
  // expected of the logarithm: -sigma^2/2W^2 = -0.041, and more from the next order; N itself is unbiased.
  // The standard error of a mean over 1500 tables of two lines of S/N 3.5 is 0.0052.
  EXPECT_LT(log_sum / kept, -0.03);
  EXPECT_NEAR(sum / kept, 0.0, 3.0 * 0.0052);
}

TEST(LikelihoodFit, RefusesProblemsThatAreNone) {
  const ForwardModel model(ladder(3), partitions(), {});
  const Eigen::VectorXd truth = simulated::state(30.0, 40.0);
  const LikelihoodProblem good{exact_data(intensities(model, truth), 0.05),
                               column_and_temperature_free(truth)};
  const auto broken = [&](auto&& spoil) {
    LikelihoodProblem problem = good;
    spoil(problem);
    EXPECT_THROW(IntensityLikelihood(model, problem), DomainError);
  };
  broken([](auto& p) { p.data.pop_back(); });
  broken([](auto& p) { p.data[0].sigma_k_km_s = 0.0; });
  broken([](auto& p) { p.data[0].intensity_k_km_s = std::nan(""); });
  broken([](auto& p) { p.data[0].calibration_error = -0.1; });
  broken([](auto& p) { p.parameters.pop_back(); });
  broken([](auto& p) { p.parameters[0].lower = 99.0; });
  broken([](auto& p) { p.parameters[0].free = p.parameters[1].free = false; });
  broken([](auto& p) { p.parameters[2].same_as = 17; });
  broken([](auto& p) { p.student_dof = 0.0; });
  FitOptions no_start;
  no_start.most_grid_starts = 0;
  EXPECT_THROW((void)fit_likelihood(IntensityLikelihood(model, good), no_start), DomainError);
}

// A best value on its bound left the search for that end without a span and ended the run (December 2026).
TEST(ProfileInterval, HasNoEndBeyondABoundOnWhichTheBestValueLies) {
  const ForwardModel model(ladder(6), partitions(), {});
  const Eigen::VectorXd truth = simulated::state(30.0, 30.0);
  LikelihoodProblem problem{exact_data(intensities(model, truth), 0.05), column_and_temperature_free(truth)};
  const IntensityLikelihood likelihood(model, problem);
  LikelihoodFit fit = fit_likelihood(likelihood);
  for (const double bound : {likelihood.lower_bounds()[1], likelihood.upper_bounds()[1]}) {
    fit.free[1] = bound;
    const Interval interval = profile_interval(likelihood, fit, 1, 1.0);
    EXPECT_TRUE(std::isnan(bound == likelihood.upper_bounds()[1] ? interval.high : interval.low));
  }
}

TEST(ProfileInterval, IsSymmetricForGoodDataAndHoldsTheTruthAsOftenAsItSays) {
  const ForwardModel model(ladder(8), partitions(), {});
  const Eigen::VectorXd truth = simulated::state(ln_column_for(model, 0.5, 25.0), 25.0);
  const Eigen::VectorXd w = intensities(model, truth);
  LikelihoodProblem problem{exact_data(w, 0.002), column_and_temperature_free(truth)};
  const IntensityLikelihood exact(model, problem);
  const LikelihoodFit fit = fit_likelihood(exact);
  const Interval interval = profile_interval(exact, fit, 1, 1.0);
  const double sigma = std::sqrt(fit.covariance(1, 1));
  EXPECT_NEAR((interval.high - fit.free[1]) / sigma, 1.0, 0.01);  // second order: sigma itself, below 1 %
  EXPECT_NEAR((fit.free[1] - interval.low) / sigma, 1.0, 0.01);
  EXPECT_NEAR(profile_excess(exact, fit, 1, interval.high), 1.0, 1e-4);

  constexpr int kTables = 400;
  std::mt19937_64 engine(20260512);
  std::normal_distribution<double> normal;
  int inside = 0;
  for (int table = 0; table < kTables; ++table) {
    for (Eigen::Index i = 0; i < w.size(); ++i) {
      auto& datum = problem.data[static_cast<std::size_t>(i)];
      datum.sigma_k_km_s = 0.1 * w[i];
      datum.intensity_k_km_s = w[i] + datum.sigma_k_km_s * normal(engine);
    }
    const IntensityLikelihood likelihood(model, problem);
    const Interval one = profile_interval(likelihood, fit_likelihood(likelihood), 1, 1.0);
    inside += !(truth[1] < one.low) && !(truth[1] > one.high);
  }
  EXPECT_NEAR(inside / double(kTables), 0.6827, 3.0 * 0.0233);  // 3 binomial standard errors of 400 draws
}

}  // namespace
}  // namespace trotline
