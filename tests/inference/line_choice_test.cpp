#include <trotline/inference/line_choice.hpp>

#include <gtest/gtest.h>

#include <cmath>
#include <random>

#include <trotline/base/errors.hpp>

#include "simulated_source.hpp"

namespace trotline {
namespace {

using Lines = std::vector<std::size_t>;

/// Lines with random slopes and errors, some of them of a shared calibration.
std::vector<Sensitivity> random_lines(std::mt19937_64& random, std::size_t count, bool shared) {
  std::uniform_real_distribution<double> uniform(0.0, 1.0);
  std::vector<Sensitivity> all;
  for (std::size_t i = 0; i < count; ++i) {
    const double w = std::exp(3.0 * uniform(random));
    all.push_back({w, w * (4.0 * uniform(random) - 1.0), shared ? 0.1 * w : 0.0, 0.1 + uniform(random)});
  }
  return all;
}

/// The same errors from Eigen's inverse of the whole information matrix.
ExpectedErrors by_inverse(const std::vector<Sensitivity>& all, const Lines& which) {
  Eigen::Matrix3d information = Eigen::Matrix3d::Zero();
  information(2, 2) = 1.0;
  for (const std::size_t i : which) {
    const Eigen::Vector3d g =
        Eigen::Vector3d(all[i].by_ln_column, all[i].by_ln_temperature, all[i].by_shared_calibration) /
        all[i].sigma_k_km_s;
    information += g * g.transpose();
  }
  const Eigen::Matrix3d covariance = information.inverse();
  return {std::sqrt(covariance(0, 0)), std::sqrt(covariance(1, 1))};
}

TEST(LineChoice, ErrorsAreThoseOfTheInverseInformation) {
  std::mt19937_64 random(11);
  for (int draw = 0; draw < 100; ++draw) {
    const auto all = random_lines(random, 5, draw % 2 == 1);
    const ExpectedErrors found = expected_errors(all, {0, 2, 3});
    const ExpectedErrors expected = by_inverse(all, {0, 2, 3});
    EXPECT_NEAR(found.ln_column / expected.ln_column, 1.0, 1e-9);
    EXPECT_NEAR(found.ln_temperature / expected.ln_temperature, 1.0, 1e-9);
  }
}

TEST(LineChoice, ErrorsAreThoseThatTheLikelihoodExpects) {
  const ForwardModel model(simulated::ladder(6), simulated::partitions(), {});
  const Eigen::VectorXd truth = simulated::state(std::log(3e15), 28.0);
  ModelWorkspace workspace = model.workspace();
  model.evaluate_with_slopes(truth, workspace);
  LikelihoodProblem problem;
  problem.parameters = simulated::column_and_temperature_free(truth);
  std::vector<Sensitivity> all;
  for (int i = 0; i < 6; ++i) {
    const double sigma = 0.05 * workspace.intensity_k_km_s[i] + 0.01;
    problem.data.push_back({workspace.intensity_k_km_s[i], sigma});
    all.push_back({workspace.slopes(i, 0), workspace.slopes(i, 1), 0.0, sigma});
  }
  const IntensityLikelihood likelihood(model, problem);
  auto scratch = likelihood.workspace();
  Eigen::VectorXd free(2);
  free << truth[0], truth[1];
  const Eigen::MatrixXd covariance = likelihood.information(free, scratch).inverse();
  const ExpectedErrors errors = expected_errors(all, {0, 1, 2, 3, 4, 5});
  EXPECT_NEAR(errors.ln_column / std::sqrt(covariance(0, 0)), 1.0, 1e-9);
  EXPECT_NEAR(errors.ln_temperature / std::sqrt(covariance(1, 1)), 1.0, 1e-9);
}

TEST(LineChoice, LinesThatSayTheSameSetNoTemperature) {
  const std::vector<Sensitivity> same = {{1.0, 0.5, 0.0, 0.1}, {3.0, 1.5, 0.0, 0.2}};
  EXPECT_TRUE(std::isinf(expected_errors(same, {0, 1}).ln_temperature));
  EXPECT_TRUE(std::isinf(expected_errors(same, {0}).ln_temperature));
  EXPECT_TRUE(std::isinf(expected_errors(same, {}).ln_column));
}

TEST(LineChoice, ASharedCalibrationCostsTheColumnAndNotTheTemperatureOfThinLines) {
  std::vector<Sensitivity> lines = {{2.0, -1.0, 0.0, 0.1}, {3.0, 2.0, 0.0, 0.2}, {1.0, 1.5, 0.0, 0.1}};
  const ExpectedErrors without = expected_errors(lines, {0, 1, 2});
  for (Sensitivity& line : lines) line.by_shared_calibration = 0.1 * line.by_ln_column;  // thin: dW/dlnN = W
  const ExpectedErrors with = expected_errors(lines, {0, 1, 2});
  EXPECT_NEAR(with.ln_temperature, without.ln_temperature, 1e-12);
  EXPECT_NEAR(with.ln_column, std::hypot(without.ln_column, 0.1), 1e-12);
}

/// The least error over all sets, by counting through bit patterns.
double least_error(const std::vector<Sensitivity>& all, std::size_t count, Aim aim) {
  double least = std::numeric_limits<double>::infinity();
  for (unsigned pattern = 0; pattern < 1U << all.size(); ++pattern) {
    Lines which;
    for (std::size_t i = 0; i < all.size(); ++i) {
      if ((pattern >> i & 1U) != 0) which.push_back(i);
    }
    if (which.size() != count) continue;
    const ExpectedErrors errors = by_inverse(all, which);
    least = std::min(least, aim == Aim::temperature ? errors.ln_temperature : errors.ln_column);
  }
  return least;
}

TEST(LineChoice, IsTheBestOfAllSets) {
  std::mt19937_64 random(12);
  for (int draw = 0; draw < 10; ++draw) {
    const auto all = random_lines(random, 9, draw % 2 == 1);
    for (const Aim aim : {Aim::temperature, Aim::column}) {
      const LineChoice choice = choose_lines(all, 4, aim);
      EXPECT_TRUE(choice.is_exhaustive);
      EXPECT_EQ(choice.lines.size(), 4U);
      const double found = aim == Aim::temperature ? choice.errors.ln_temperature : choice.errors.ln_column;
      EXPECT_NEAR(found / least_error(all, 4, aim), 1.0, 1e-9);
    }
  }
}

TEST(LineChoice, ByExchangeCannotBeImprovedByAnyExchange) {
  std::mt19937_64 random(13);
  const auto all = random_lines(random, 70, false);
  const LineChoice choice = choose_lines(all, 8, Aim::temperature);
  ASSERT_FALSE(choice.is_exhaustive);  // 70 over 8 is 9e9
  ASSERT_EQ(choice.lines.size(), 8U);
  for (std::size_t out = 0; out < 8; ++out) {
    for (std::size_t in = 0; in < all.size(); ++in) {
      if (std::find(choice.lines.begin(), choice.lines.end(), in) != choice.lines.end()) continue;
      Lines other = choice.lines;
      other[out] = in;
      EXPECT_GE(expected_errors(all, other).ln_temperature, choice.errors.ln_temperature * (1.0 - 1e-12));
    }
  }
}

TEST(LineChoice, RefusesCountsAndNumbersThatMeanNothing) {
  std::mt19937_64 random(14);
  auto all = random_lines(random, 4, false);
  EXPECT_THROW((void)choose_lines(all, 1, Aim::temperature), DomainError);
  EXPECT_THROW((void)choose_lines(all, 5, Aim::temperature), DomainError);
  all[2].sigma_k_km_s = 0.0;
  EXPECT_THROW((void)expected_errors(all, {0, 1}), DomainError);
}

}  // namespace
}  // namespace trotline
