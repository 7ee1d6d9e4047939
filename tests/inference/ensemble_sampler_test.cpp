#include <gtest/gtest.h>

#include <cmath>
#include <random>

#include <trotline/base/errors.hpp>
#include <trotline/inference/ensemble_sampler.hpp>

namespace trotline {
namespace {

constexpr double kInfinite = std::numeric_limits<double>::infinity();

EnsembleTarget target_of(std::function<double(const Eigen::VectorXd&)> cost, const Eigen::VectorXd& peak) {
  EnsembleTarget target;
  target.make_cost = [cost]() -> EnsembleCost {
    return [cost](const Eigen::Ref<const Eigen::MatrixXd>& points, Eigen::Ref<Eigen::VectorXd> costs) {
      for (Eigen::Index i = 0; i < points.cols(); ++i) costs[i] = cost(points.col(i));
    };
  };
  target.lower = Eigen::VectorXd::Constant(peak.size(), -kInfinite);
  target.upper = Eigen::VectorXd::Constant(peak.size(), kInfinite);
  target.peaks = {peak};
  target.covariance = Eigen::MatrixXd::Identity(peak.size(), peak.size());
  return target;
}

/// Standard errors from 1e-3 to 10, neighbours correlated by 0.8.
Eigen::MatrixXd stretched_covariance() {
  Eigen::MatrixXd covariance(5, 5);
  for (int i = 0; i < 5; ++i) {
    for (int j = 0; j < 5; ++j)
      covariance(i, j) = std::pow(0.8, std::abs(i - j)) * std::pow(10.0, i - 3) * std::pow(10.0, j - 3);
  }
  return covariance;
}

TEST(EnsembleSampler, GaussianMomentsComeOutWithinTheirStandardErrors) {
  const Eigen::MatrixXd covariance = stretched_covariance();
  const Eigen::MatrixXd information = covariance.inverse();
  const Eigen::VectorXd mean = Eigen::VectorXd::LinSpaced(5, -2.0, 30.0);
  EnsembleTarget target = target_of(
      [=](const Eigen::VectorXd& x) { return 0.5 * (x - mean).dot(information * (x - mean)); }, mean);
  target.covariance = 0.3 * covariance;
  const EnsembleSample sample = sample_density(target);
  ASSERT_EQ(sample.status, SampleStatus::done);
  EXPECT_GT(sample.effective_size.minCoeff(), 4000.0);
  EXPECT_LT(sample.split_r_hat.maxCoeff(), kMostSplitRHat);
  const Eigen::VectorXd found = sample.all.rowwise().mean();
  for (Eigen::Index k = 0; k < 5; ++k) {
    const double sigma = std::sqrt(covariance(k, k));
    const double independent = sample.effective_size[k];
    EXPECT_NEAR(found[k], mean[k], 4.0 * sigma / std::sqrt(independent));
    const double variance = (sample.all.row(k).array() - found[k]).square().mean();
    // a variance decorrelates about as fast as its mean; its relative standard error is sqrt(2/n)
    EXPECT_NEAR(variance / covariance(k, k), 1.0, 5.0 * std::sqrt(2.0 / independent));
  }
}

TEST(EnsembleSampler, SameSeedSameBitsWhateverTheThreads) {
  const auto cost = [](const Eigen::VectorXd& x) { return 0.5 * x.squaredNorm() + 0.1 * std::pow(x[0], 4); };
  const EnsembleTarget target = target_of(cost, Eigen::VectorXd::Zero(4));
  EnsembleOptions options;
  options.wanted_effective = 1000;
  const EnsembleSample one = sample_density(target, options);
  for (const int threads : {2, 3, 8}) {
    options.threads = threads;
    const EnsembleSample other = sample_density(target, options);
    EXPECT_TRUE(one.all == other.all);
    EXPECT_TRUE(one.autocorrelation_steps == other.autocorrelation_steps);
  }
  options.seed = 2;
  EXPECT_FALSE(sample_density(target, options).draws == one.draws);
}

TEST(EnsembleSampler, KeepsToBoundsAndDrawsUniformlyBetweenThem) {
  EnsembleTarget target = target_of([](const Eigen::VectorXd&) { return 0.0; }, Eigen::Vector2d(0.5, 2.0));
  target.lower = Eigen::Vector2d(0.0, 1.0);
  target.upper = Eigen::Vector2d(1.0, 4.0);
  const EnsembleSample sample = sample_density(target);
  ASSERT_TRUE(sample.usable());
  EXPECT_GE(sample.all.row(0).minCoeff(), 0.0);
  EXPECT_LE(sample.all.row(1).maxCoeff(), 4.0);
  const double error = 4.0 / std::sqrt(12.0 * sample.effective_size.minCoeff());
  EXPECT_NEAR(sample.all.row(0).mean(), 0.5, error);
  EXPECT_NEAR(sample.all.row(1).mean(), 2.5, 3.0 * error);
}

TEST(EnsembleSampler, SaysThatAWalkIsTooShort) {
  EnsembleOptions options;
  options.most_steps = 150;
  const EnsembleSample sample = sample_density(
      target_of([](const Eigen::VectorXd& x) { return 0.5 * x.squaredNorm(); }, Eigen::VectorXd::Zero(6)),
      options);
  EXPECT_FALSE(sample.usable());
}

// Two peaks between which no walker ever goes: what each walker sees is not the density.
TEST(EnsembleSampler, RefusesWalkersThatDisagree) {
  const auto cost = [](const Eigen::VectorXd& x) {
    return -std::log(std::exp(-0.5 * x.squaredNorm()) +
                     std::exp(-0.5 * (x.array() - 60.0).matrix().squaredNorm()) + 1e-300);
  };
  EnsembleTarget target = target_of(cost, Eigen::VectorXd::Zero(5));
  target.peaks.push_back(Eigen::VectorXd::Constant(5, 60.0));
  EnsembleOptions options;
  options.most_steps = 2000;
  EXPECT_EQ(sample_density(target, options).status, SampleStatus::not_mixed);
}

// x(t+1) = r x(t) + noise has the autocorrelation time (1 + r)/(1 - r).
TEST(AutocorrelationTime, IsThatOfAnAutoregressiveSeries) {
  std::mt19937_64 engine(20260602);
  std::normal_distribution<double> normal;
  for (const double r : {0.0, 0.5, 0.95}) {
    Eigen::MatrixXd series(5000, 40);
    for (Eigen::Index k = 0; k < series.cols(); ++k) {
      double x = normal(engine) / std::sqrt(1.0 - r * r);
      for (Eigen::Index t = 0; t < series.rows(); ++t) series(t, k) = x = r * x + normal(engine);
    }
    const double expected = (1.0 + r) / (1.0 - r);
    // the window leaves out exp(-5) of the sum; Sokal's error sqrt((4 * 5 + 2) tau / n) is below 2 %
    EXPECT_NEAR(autocorrelation_time(series), expected, 0.04 * expected) << r;
  }
  EXPECT_TRUE(std::isinf(autocorrelation_time(Eigen::VectorXd::LinSpaced(100, 0.0, 1.0))));
}

TEST(SplitRHat, IsOneForAlikeSeriesAndLargeForApartOnes) {
  std::mt19937_64 engine(20260603);
  std::normal_distribution<double> normal;
  Eigen::MatrixXd series(2000, 6);
  for (double& x : series.reshaped()) x = normal(engine);
  EXPECT_NEAR(split_r_hat(series), 1.0, 2e-3);
  series.col(3).array() += 1.0;
  EXPECT_GT(split_r_hat(series), 1.05);
  series.col(3).array() -= 1.0;
  series.bottomRows(1000).array() += 1.0;  // a drift, which whole series would hide
  EXPECT_GT(split_r_hat(series), 1.05);
}

TEST(EnsembleSampler, RefusesWhatItCannotWalk) {
  const auto cost = [](const Eigen::VectorXd& x) { return 0.5 * x.squaredNorm(); };
  EnsembleOptions options;
  options.walkers = 7;
  EXPECT_THROW((void)sample_density(target_of(cost, Eigen::VectorXd::Zero(2)), options), DomainError);
  options.walkers = 4;
  EXPECT_THROW((void)sample_density(target_of(cost, Eigen::VectorXd::Zero(2)), options), DomainError);
  EnsembleTarget nowhere =
      target_of([](const Eigen::VectorXd&) { return kInfinite; }, Eigen::VectorXd::Zero(2));
  EXPECT_THROW((void)sample_density(nowhere), DomainError);
  nowhere.peaks.clear();
  EXPECT_THROW((void)sample_density(nowhere), DomainError);
}

}  // namespace
}  // namespace trotline
