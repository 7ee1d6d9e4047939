#include <gtest/gtest.h>

#include <fmt/format.h>

#include <cmath>
#include <random>

#include <trotline/base/errors.hpp>
#include <trotline/inference/lte_checks.hpp>
#include <trotline/inference/model_choice.hpp>

#include "simulated_source.hpp"

namespace trotline {
namespace {

using simulated::column_and_temperature_free;
using simulated::exact_data;

/// Lines of one source; `spoil` changes the noise-free intensities before noise is added.
struct Bench {
  explicit Bench(double tau0, double relative_error = 0.08)
      : model(lines(), simulated::partitions(), {}),
        truth(simulated::state(simulated::ln_column_for(model, tau0, 35.0), 35.0)),
        intensity(simulated::intensities(model, truth)),
        problem{exact_data(intensity, relative_error, 0.01 * intensity.maxCoeff()),
                column_and_temperature_free(truth)} {}

  static std::vector<ModelLine> lines() {
    auto result = simulated::ladder(9);
    for (std::size_t i = 0; i < result.size(); ++i)
      result[i].beam_fwhm_arcsec = 28.0 / static_cast<double>(i + 1);
    return result;
  }

  LteReport report(const Eigen::VectorXd& true_intensity, std::mt19937_64* engine) {
    std::normal_distribution<double> normal;
    for (std::size_t i = 0; i < problem.data.size(); ++i) {
      auto& datum = problem.data[i];
      datum.intensity_k_km_s = true_intensity[static_cast<Eigen::Index>(i)];
      if (engine != nullptr) datum.intensity_k_km_s += datum.sigma_k_km_s * normal(*engine);
    }
    const IntensityLikelihood likelihood(model, problem);
    LteOptions options;
    options.groupings = {{"parity", {0, 1, 0, 1, 0, 1, 0, 1, 0}}, {"band", {0, 0, 0, 1, 1, 1, 2, 2, 2}}};
    return check_lte(likelihood, fit_likelihood(likelihood), options);
  }

  ForwardModel model;
  Eigen::VectorXd truth;
  Eigen::VectorXd intensity;
  LikelihoodProblem problem;
};

CheckOutcome outcome(const LteReport& report, LteCheckKind kind) {
  for (const LteCheck& check : report.checks) {
    if (check.kind == kind) return check.outcome;
  }
  return CheckOutcome::not_testable;
}

TEST(LteChecks, PassOnNoiseFreeLte) {
  for (const double tau0 : {0.01, 3.0}) {
    Bench bench(tau0);
    const LteReport report = bench.report(bench.intensity, nullptr);
    EXPECT_EQ(report.verdict, LteVerdict::one_temperature);
    for (const LteCheck& check : report.checks) EXPECT_NE(check.outcome, CheckOutcome::fail);
    ASSERT_EQ(report.leave_one_out.size(), 9u);
    for (const LeaveOneOut& row : report.leave_one_out) {
      EXPECT_NEAR(row.temperature_k, 35.0, 1e-3);
      EXPECT_NEAR(row.standardised_residual, 0.0, 1e-4);
    }
  }
}

TEST(LteChecks, RaiseAFalseAlarmInFewerThan5PercentOfTrueLte) {
  constexpr int kTables = 600;
  for (const double tau0 : {0.05, 2.0}) {
    Bench bench(tau0);
    std::mt19937_64 engine(20260515);
    int alarms = 0;
    for (int table = 0; table < kTables; ++table) {
      alarms += bench.report(bench.intensity, &engine).verdict == LteVerdict::not_one_temperature;
    }
    EXPECT_LT(alarms / double(kTables), 0.05) << tau0;
    RecordProperty(fmt::format("false_alarms_tau_{}", tau0), std::to_string(alarms / double(kTables)));
  }
}

TEST(LteChecks, NameWhatWasDoneToTheLines) {
  Bench bench(0.05, 0.03);
  Eigen::VectorXd spoiled = bench.intensity;
  spoiled[5] *= 1.6;
  LteReport report = bench.report(spoiled, nullptr);
  EXPECT_EQ(report.verdict, LteVerdict::not_one_temperature);
  EXPECT_EQ(outcome(report, LteCheckKind::outlier), CheckOutcome::fail);
  for (const LteCheck& check : report.checks) {
    if (check.kind == LteCheckKind::outlier) {
      EXPECT_EQ(check.data, std::vector<int>{5});
    }
  }

  spoiled = bench.intensity;
  for (Eigen::Index i = 0; i < 9; ++i) {  // a warm second component lifts the high levels
    spoiled[i] += 0.15 * simulated::intensities(bench.model, simulated::state(bench.truth[0], 120.0))[i];
  }
  report = bench.report(spoiled, nullptr);
  EXPECT_EQ(outcome(report, LteCheckKind::curvature), CheckOutcome::fail);
  for (const LteCheck& check : report.checks) {
    if (check.kind == LteCheckKind::curvature) {
      EXPECT_GT(check.figure, 3.0);  // populations lie above the line at the ends
    }
  }

  spoiled = bench.intensity;
  for (Eigen::Index i = 1; i < 9; i += 2) spoiled[i] *= 1.4;  // one isomer more abundant than its weight
  report = bench.report(spoiled, nullptr);
  EXPECT_EQ(outcome(report, LteCheckKind::groups), CheckOutcome::fail);
}

TEST(LteChecks, SeeOpacityThatAThinModelIgnores) {
  Bench thick(3.0, 0.03);
  ForwardModelOptions options;
  options.opacity = Opacity::thin;
  const ForwardModel thin(Bench::lines(), simulated::partitions(), options);
  const IntensityLikelihood likelihood(thin, thick.problem);
  const LteReport report = check_lte(likelihood, fit_likelihood(likelihood));
  EXPECT_EQ(report.verdict, LteVerdict::not_one_temperature);
  EXPECT_EQ(outcome(report, LteCheckKind::opacity_trend), CheckOutcome::fail);
}

TEST(LteChecks, SeeDilutionInBeamsThatDiffer) {
  Bench bench(0.05, 0.02);
  Eigen::VectorXd diluted = bench.intensity;
  for (Eigen::Index i = 0; i < 9; ++i) diluted[i] *= gaussian_filling(6.0, 28.0 / static_cast<double>(i + 1));
  const LteReport report = bench.report(diluted, nullptr);
  EXPECT_EQ(report.verdict, LteVerdict::not_one_temperature);
  EXPECT_EQ(outcome(report, LteCheckKind::beam_trend), CheckOutcome::fail);
}

TEST(LteChecks, HoldLimitsAndDensitiesAgainstTheModel) {
  Bench bench(0.05);
  bench.problem.data[8].is_limit = true;
  bench.problem.data[8].intensity_k_km_s = bench.intensity[8] - 6.0 * bench.problem.data[8].sigma_k_km_s;
  const IntensityLikelihood likelihood(bench.model, bench.problem);
  LikelihoodFit fit = fit_likelihood(likelihood);
  LteOptions options;
  options.critical_density_per_cm3 = std::vector<double>(9, std::nan(""));
  options.critical_density_per_cm3[3] = 3e5;
  options.critical_density_per_cm3[4] = 3e3;
  options.density_per_cm3 = 1e4;
  const LteReport report = check_lte(likelihood, fit, options);
  EXPECT_EQ(outcome(report, LteCheckKind::collisions), CheckOutcome::fail);
  for (const LteCheck& check : report.checks) {
    if (check.kind == LteCheckKind::collisions) {
      EXPECT_NEAR(check.figure, 30.0, 1e-9);
      EXPECT_EQ(check.data, std::vector<int>{3});
    }
    if (check.kind == LteCheckKind::limits) {
      EXPECT_GT(check.figure, 2.0);
    }
  }
  options.critical_density_per_cm3.pop_back();
  EXPECT_THROW((void)check_lte(likelihood, fit, options), DomainError);
}

TEST(LteChecks, CannotTellFromTwoLines) {
  const ForwardModel model(simulated::ladder(2), simulated::partitions(), {});
  const Eigen::VectorXd truth = simulated::state(30.0, 20.0);
  const LikelihoodProblem problem{exact_data(simulated::intensities(model, truth), 0.05),
                                  column_and_temperature_free(truth)};
  const IntensityLikelihood likelihood(model, problem);
  const LteReport report = check_lte(likelihood, fit_likelihood(likelihood));
  EXPECT_EQ(report.verdict, LteVerdict::cannot_tell);
  for (const LteCheck& check : report.checks) EXPECT_NE(check.outcome, CheckOutcome::fail);
}

TEST(ModelChoice, ScoresAreThoseOfTheirFormulas) {
  ModelScore smaller{2, 10, 8.0, 0.0, 0.0};
  ModelScore larger{4, 10, 5.0, 0.0, 0.0};
  const ModelComparison comparison = compare(smaller, larger, true);
  EXPECT_EQ(comparison.extra_parameters, 2);
  EXPECT_DOUBLE_EQ(comparison.likelihood_ratio, 6.0);
  EXPECT_NEAR(comparison.p_value, std::exp(-3.0), 1e-12);  // chi2 with 2 degrees of freedom is exponential
  EXPECT_TRUE(comparison.on_boundary);
  EXPECT_THROW((void)compare(larger, smaller, false), DomainError);

  Bench bench(0.05);
  const IntensityLikelihood likelihood(bench.model, bench.problem);
  const ModelScore score = score_of(likelihood, fit_likelihood(likelihood));
  double constant = 0.0;
  for (const auto& datum : bench.problem.data)
    constant += std::log(datum.sigma_k_km_s * std::sqrt(2.0 * M_PI));
  EXPECT_NEAR(score.minus_ln_likelihood, constant, 1e-9);
  EXPECT_NEAR(score.aicc, 4.0 + 2.0 * constant + 12.0 / 6.0, 1e-9);
  EXPECT_NEAR(score.bic, 2.0 * std::log(9.0) + 2.0 * constant, 1e-9);
}

}  // namespace
}  // namespace trotline
