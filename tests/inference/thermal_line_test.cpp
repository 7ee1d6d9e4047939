#include <trotline/inference/thermal_line.hpp>

#include <gtest/gtest.h>

#include <random>

#include <trotline/base/errors.hpp>
#include <trotline/excitation/thin_line.hpp>

namespace trotline {
namespace {

/// Q of a rigid linear rotor with B/k = 2.766 K (near CO's), by direct sum.
class RigidRotorPartition final : public PartitionFunction {
 public:
  [[nodiscard]] PartitionValue at(double temperature_k) const override {
    if (!(temperature_k >= lowest_k() && temperature_k <= highest_k())) {
      throw DomainError("temperature_k", temperature_k, "in range");
    }
    double q = 0.0;
    double energy = 0.0;
    for (int j = 0; j < 400; ++j) {
      const double e = 2.766 * j * (j + 1);
      const double term = (2 * j + 1) * std::exp(-e / temperature_k);
      q += term;
      energy += term * e;
    }
    return {q, std::log(q), energy / q / (temperature_k * temperature_k), 0.0};
  }
  [[nodiscard]] double lowest_k() const override { return 0.1; }
  [[nodiscard]] double highest_k() const override { return 20000.0; }
  [[nodiscard]] std::string description() const override { return "rigid rotor"; }
};

const RigidRotorPartition kPartition;

DiagramData diagram(double temperature_k, double ln_column, double background_k, double sigma, int lines = 8) {
  DiagramData data;
  data.upper_energy_k.resize(lines);
  data.frequency_hz.resize(lines);
  for (int i = 0; i < lines; ++i) {
    data.upper_energy_k[i] = 2.766 * (i + 1) * (i + 2);
    data.frequency_hz[i] = 115.27e9 * (i + 1);
  }
  data.background_k = background_k;
  data.covariance = Eigen::MatrixXd::Identity(lines, lines) * sigma * sigma;
  data.ln_nu_over_gu = Eigen::VectorXd::Zero(lines);
  data.ln_nu_over_gu = diagram_model(data, ln_column - kPartition.at(temperature_k).ln_q, 1.0 / temperature_k);
  return data;
}

TEST(ThermalLine, ReturnsTheTruthWithoutNoiseWithAnyBackground) {
  for (const double background_k : {0.0, 2.7255, 8.0}) {
    for (const double temperature_k : {9.0, 12.0, 40.0, 150.0, 1000.0}) {
      const DiagramData data = diagram(temperature_k, 35.0, background_k, 0.05);
      const ThermalLineFit fit = fit_thermal_line(data);
      ASSERT_EQ(fit.status, ThermalStatus::done) << temperature_k << " K over " << background_k << " K";
      const ThermalState state = thermal_state(fit, kPartition);
      // rounding of y (35 * eps) over the lever arm of the energies
      EXPECT_NEAR(state.temperature_k, temperature_k, 1e-8 * temperature_k);
      EXPECT_NEAR(state.ln_column_per_cm2, 35.0, 1e-8);
      EXPECT_NEAR(fit.chi2, 0.0, 1e-15);
    }
  }
}

TEST(ThermalLine, SigmaOfLnNIsTheUncertaintyOfTheLineAtMeanEnergy) {
  for (const double temperature_k : {7.0, 30.0, 200.0}) {
    DiagramData data = diagram(temperature_k, 33.0, 0.0, 0.07);
    data.covariance(2, 5) = data.covariance(5, 2) = 0.003;
    const ThermalLineFit fit = fit_thermal_line(data);
    const ThermalState state = thermal_state(fit, kPartition);
    const double mean_energy_k = temperature_k * temperature_k * kPartition.at(temperature_k).dlnq_dt;
    // variance of a + b E at E = <E>, with slope b = -beta
    const double at_mean = std::sqrt(fit.intercept_variance - 2.0 * mean_energy_k * fit.covariance +
                                     mean_energy_k * mean_energy_k * fit.inverse_temperature_variance);
    EXPECT_NEAR(state.ln_column_sigma / at_mean, 1.0, 1e-10);
  }
}

TEST(ThermalLine, SigmaOfLnNEqualsThatOfADirectFitInLnNAndT) {
  // The same model in the parameters (ln N, T), its Jacobian by central differences: another road to the
  // same covariance, background included.
  for (const double background_k : {0.0, 2.7255, 6.0}) {
    const DiagramData data = diagram(18.0, 34.0, background_k, 0.05);
    const ThermalState state = thermal_state(fit_thermal_line(data), kPartition);
    const auto model = [&](double ln_n, double t) {
      return diagram_model(data, ln_n - kPartition.at(t).ln_q, 1.0 / t);
    };
    const double h = 1e-4;
    Eigen::MatrixXd jacobian(data.ln_nu_over_gu.size(), 2);
    jacobian.col(0) = (model(34.0 + h, 18.0) - model(34.0 - h, 18.0)) / (2 * h);
    jacobian.col(1) = (model(34.0, 18.0 + h) - model(34.0, 18.0 - h)) / (2 * h);
    const Eigen::Matrix2d covariance = (jacobian.transpose() * data.covariance.inverse() * jacobian).inverse();
    EXPECT_NEAR(state.ln_column_sigma / std::sqrt(covariance(0, 0)), 1.0, 1e-6);
    EXPECT_NEAR(state.temperature_sigma_k / std::sqrt(covariance(1, 1)), 1.0, 1e-6);
    EXPECT_NEAR(state.correlation, covariance(0, 1) / std::sqrt(covariance(0, 0) * covariance(1, 1)), 1e-6);
  }
}

TEST(ThermalLine, MonteCarloReproducesSigmaOfTAndLnNWithin2Percent) {
  constexpr int kTables = 20000;
  constexpr double kNoise = 0.02;  // fraction of the intensity; small, so that T is linear in the data
  const DiagramData truth = diagram(25.0, 34.0, 2.7255, kNoise);
  const ThermalState expected = thermal_state(fit_thermal_line(truth), kPartition);
  std::mt19937_64 engine(20260402);
  std::normal_distribution<double> normal;
  double sum_t = 0, sum_t2 = 0, sum_n = 0, sum_n2 = 0;
  for (int i = 0; i < kTables; ++i) {
    DiagramData data = truth;
    for (auto& y : data.ln_nu_over_gu) y += std::log1p(kNoise * normal(engine));  // noise on the intensity
    const ThermalState state = thermal_state(fit_thermal_line(data), kPartition);
    const double t = state.temperature_k - 25.0;
    const double n = state.ln_column_per_cm2 - 34.0;
    sum_t += t, sum_t2 += t * t, sum_n += n, sum_n2 += n * n;
  }
  const double sigma_t = std::sqrt(sum_t2 / kTables - std::pow(sum_t / kTables, 2));
  const double sigma_n = std::sqrt(sum_n2 / kTables - std::pow(sum_n / kTables, 2));
  // The sampling error of a standard deviation from 20,000 draws is 0.5 %.
  EXPECT_NEAR(sigma_t / expected.temperature_sigma_k, 1.0, 0.02);
  EXPECT_NEAR(sigma_n / expected.ln_column_sigma, 1.0, 0.02);
  RecordProperty("sigma_t_ratio", std::to_string(sigma_t / expected.temperature_sigma_k));
  RecordProperty("sigma_ln_n_ratio", std::to_string(sigma_n / expected.ln_column_sigma));
}

TEST(ThermalLine, CalibrationSharedByAllLinesLeavesTAloneAndAddsToN) {
  DiagramData data = diagram(30.0, 34.0, 0.0, 0.05);
  const ThermalState apart = thermal_state(fit_thermal_line(data), kPartition);
  data.covariance.array() += 0.1 * 0.1;
  const ThermalState shared = thermal_state(fit_thermal_line(data), kPartition);
  EXPECT_NEAR(shared.temperature_sigma_k / apart.temperature_sigma_k, 1.0, 1e-9);
  EXPECT_NEAR(std::pow(shared.ln_column_sigma, 2), std::pow(apart.ln_column_sigma, 2) + 0.01, 1e-11);
}

TEST(ThermalLine, ASlopeThatDoesNotFallIsNoTemperature) {
  DiagramData data = diagram(30.0, 34.0, 0.0, 0.05);
  data.ln_nu_over_gu.setLinSpaced(20.0, 20.5);
  for (const double background_k : {0.0, 2.7255}) {
    data.background_k = background_k;
    const ThermalLineFit fit = fit_thermal_line(data);
    EXPECT_EQ(fit.status, ThermalStatus::not_thermal);
    EXPECT_LT(fit.inverse_temperature_per_k, 0.0);
    EXPECT_TRUE(std::isnan(thermal_intervals(data, fit, kPartition, 1.0).temperature_k.low));
  }
}

TEST(ThermalLine, LinesOfOneEnergyGiveNoTemperature) {
  DiagramData data = diagram(30.0, 34.0, 0.0, 0.05);
  data.upper_energy_k.setConstant(16.6);
  EXPECT_EQ(fit_thermal_line(data).status, ThermalStatus::one_energy);
}

TEST(ThermalLine, AtAGivenTemperatureNIsTheWeightedMean) {
  const DiagramData data = diagram(30.0, 34.0, 2.7255, 0.08);
  const ThermalLineFit fit = fit_thermal_line_at(data, 30.0);
  const ThermalState state = thermal_state(fit, kPartition);
  EXPECT_NEAR(state.ln_column_per_cm2, 34.0, 1e-12);
  EXPECT_NEAR(state.ln_column_sigma, 0.08 / std::sqrt(8.0), 1e-12);
  EXPECT_EQ(state.temperature_sigma_k, 0.0);
  EXPECT_THROW((void)fit_thermal_line_at(data, 2.0), DomainError);
}

TEST(ThermalIntervals, OfTAreThoseOfTheInverseSlopeWithoutABackground) {
  const DiagramData data = diagram(60.0, 34.0, 0.0, 0.2);
  const ThermalLineFit fit = fit_thermal_line(data);
  for (const double z : {1.0, 1.959964}) {
    const auto intervals = thermal_intervals(data, fit, kPartition, z);
    const double beta = fit.inverse_temperature_per_k;
    const double step = z * std::sqrt(fit.inverse_temperature_variance);
    EXPECT_NEAR(intervals.temperature_k.low, 1.0 / (beta + step), 1e-7);
    EXPECT_NEAR(intervals.temperature_k.high, 1.0 / (beta - step), 1e-6);
  }
}

TEST(ThermalIntervals, ShrinkToSymmetricErrorsForGoodData) {
  const DiagramData data = diagram(25.0, 34.0, 2.7255, 0.002);
  const ThermalLineFit fit = fit_thermal_line(data);
  const ThermalState state = thermal_state(fit, kPartition);
  const auto intervals = thermal_intervals(data, fit, kPartition, 1.0);
  const double second_order = 0.02;  // the half-widths differ by order sigma/T, here 0.2 %
  EXPECT_NEAR((intervals.temperature_k.high - state.temperature_k) / state.temperature_sigma_k, 1.0, second_order);
  EXPECT_NEAR((state.temperature_k - intervals.temperature_k.low) / state.temperature_sigma_k, 1.0, second_order);
  EXPECT_NEAR((intervals.ln_column_per_cm2.high - 34.0) / state.ln_column_sigma, 1.0, second_order);
  EXPECT_NEAR((34.0 - intervals.ln_column_per_cm2.low) / state.ln_column_sigma, 1.0, second_order);
}

TEST(ThermalIntervals, HaveNoUpperEndWhereTheSlopeMayBeFlat) {
  const DiagramData data = diagram(400.0, 34.0, 0.0, 0.5);
  const ThermalLineFit fit = fit_thermal_line(data);
  ASSERT_EQ(fit.status, ThermalStatus::done);
  const auto intervals = thermal_intervals(data, fit, kPartition, 1.959964);
  EXPECT_TRUE(std::isnan(intervals.temperature_k.high));
  EXPECT_GT(intervals.temperature_k.low, 0.0);
  EXPECT_TRUE(std::isnan(intervals.ln_column_per_cm2.high));
  EXPECT_FALSE(std::isnan(intervals.ln_column_per_cm2.low));
}

TEST(ThermalIntervals, HoldTheTruthAsOftenAsTheySay) {
  constexpr int kTables = 4000;
  const DiagramData truth = diagram(40.0, 34.0, 2.7255, 0.15);
  std::mt19937_64 engine(20260403);
  std::normal_distribution<double> normal;
  int t_inside = 0;
  int n_inside = 0;
  for (int i = 0; i < kTables; ++i) {
    DiagramData data = truth;
    for (auto& y : data.ln_nu_over_gu) y += 0.15 * normal(engine);
    const auto intervals = thermal_intervals(data, fit_thermal_line(data), kPartition, 1.0);
    t_inside += intervals.temperature_k.low <= 40.0 && !(intervals.temperature_k.high < 40.0);
    n_inside += intervals.ln_column_per_cm2.low <= 34.0 && !(intervals.ln_column_per_cm2.high < 34.0);
  }
  // 3 binomial standard errors of 4000 draws at 68.27 %: 2.2 %
  EXPECT_NEAR(t_inside / double(kTables), 0.6827, 0.022);
  EXPECT_NEAR(n_inside / double(kTables), 0.6827, 0.022);
}

}  // namespace
}  // namespace trotline
