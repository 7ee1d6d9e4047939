#include <boost/math/distributions/normal.hpp>
#include <boost/math/quadrature/gauss_kronrod.hpp>
#include <boost/math/tools/roots.hpp>
#include <gtest/gtest.h>

#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/inference/density_quadrature.hpp>

namespace trotline {
namespace {

constexpr double kInfinite = std::numeric_limits<double>::infinity();
const boost::math::normal kNormal;

BoundedDensity gaussian(const Eigen::VectorXd& mean, const Eigen::MatrixXd& covariance) {
  BoundedDensity density;
  density.information = covariance.inverse();
  const Eigen::MatrixXd information = density.information;
  density.cost = [=](const Eigen::VectorXd& x) { return 0.5 * (x - mean).dot(information * (x - mean)); };
  density.lower = Eigen::VectorXd::Constant(mean.size(), -kInfinite);
  density.upper = Eigen::VectorXd::Constant(mean.size(), kInfinite);
  density.peaks = {mean};
  return density;
}

Eigen::MatrixXd correlated(Eigen::Index size, double correlation) {
  Eigen::MatrixXd covariance = Eigen::MatrixXd::Constant(size, size, correlation);
  covariance.diagonal().setOnes();
  const Eigen::VectorXd sigma = Eigen::VectorXd::LinSpaced(size, 0.03, 0.5);
  return sigma.asDiagonal() * covariance * sigma.asDiagonal();
}

void expect_gaussian(const DensityIntegral& integral, const Eigen::VectorXd& mean,
                     const Eigen::MatrixXd& covariance) {
  ASSERT_TRUE(integral.usable);
  const double ln_total = 0.5 * std::log((2.0 * M_PI * covariance).determinant());
  EXPECT_NEAR(integral.ln_total, ln_total, 1e-6);
  for (Eigen::Index k = 0; k < mean.size(); ++k) {
    const MarginalDensity& marginal = integral.marginals[static_cast<std::size_t>(k)];
    const double sigma = std::sqrt(covariance(k, k));
    const double bound = 1e-4 * sigma;  // stated in the header
    EXPECT_NEAR(marginal.median, mean[k], bound);
    EXPECT_NEAR(marginal.mode, mean[k], sigma / 64.0);  // half a substep
    EXPECT_NEAR(marginal.central68.low, mean[k] - sigma, bound);
    EXPECT_NEAR(marginal.central68.high, mean[k] + sigma, bound);
    EXPECT_NEAR(marginal.central95.low, mean[k] + sigma * quantile(kNormal, 0.025), bound);
    EXPECT_NEAR(marginal.central95.high, mean[k] + sigma * quantile(kNormal, 0.975), bound);
    EXPECT_NEAR(marginal.sigma, sigma, 1e-3 * sigma);
    EXPECT_FALSE(marginal.cut_low || marginal.cut_high);
    EXPECT_NEAR(integral.mean[k], mean[k], bound);
    for (Eigen::Index j = 0; j < mean.size(); ++j) {
      EXPECT_NEAR(integral.covariance(j, k), covariance(j, k), 1e-5 * sigma * std::sqrt(covariance(j, j)));
    }
  }
}

TEST(DensityQuadrature, GaussiansComeOutInClosedForm) {
  for (const Eigen::Index size : {1, 2, 3}) {
    for (const double correlation : {0.0, -0.4, 0.9, 0.999}) {
      if (size == 1 && correlation != 0.0) continue;
      const Eigen::VectorXd mean = Eigen::VectorXd::LinSpaced(size, 3.0, 40.0);
      const Eigen::MatrixXd covariance = correlated(size, correlation);
      const auto density = gaussian(mean, covariance);
      expect_gaussian(integrate_density(density), mean, covariance);
    }
  }
}

TEST(DensityQuadrature, APeakAndAShapeThatAreOffDoNoHarm) {
  const Eigen::Vector2d mean(30.0, 3.5);
  const Eigen::MatrixXd covariance = correlated(2, 0.95);
  for (const double wrong : {0.1, 5.0, 40.0}) {
    BoundedDensity density = gaussian(mean, covariance);
    density.information *= wrong;
    density.peaks = {mean + Eigen::Vector2d(0.2, -1.0)};
    expect_gaussian(integrate_density(density), mean, covariance);
  }
}

// A normal variable cut at a bound: quantiles from Boost's normal distribution.
TEST(DensityQuadrature, BoundsThatCutADensityAreClosedEnds) {
  for (const double low : {-0.7, 0.3, 1.5}) {
    for (const double high : {2.0, kInfinite}) {
      BoundedDensity density = gaussian(Eigen::VectorXd::Zero(1), Eigen::MatrixXd::Identity(1, 1));
      density.lower[0] = low;
      density.upper[0] = high;
      density.peaks = {Eigen::VectorXd::Constant(1, std::max(0.0, low))};
      const DensityIntegral integral = integrate_density(density);
      ASSERT_TRUE(integral.usable);
      const double below = cdf(kNormal, low);
      const double inside = (std::isinf(high) ? 1.0 : cdf(kNormal, high)) - below;
      EXPECT_NEAR(integral.ln_total, std::log(inside * std::sqrt(2.0 * M_PI)), 1e-3);  // stated in the header
      const MarginalDensity& marginal = integral.marginals.front();
      for (const auto& [p, value] : {std::pair{0.5, marginal.median},
                                     {0.025, marginal.central95.low},
                                     {1.0 - 0.15865525393145705, marginal.central68.high}}) {
        EXPECT_NEAR(value, quantile(kNormal, below + p * inside), 1e-3) << low << ' ' << high << ' ' << p;
      }
      EXPECT_TRUE(marginal.cut_low);
      EXPECT_EQ(marginal.cut_high, !std::isinf(high));
    }
  }
}

BoundedDensity bent(std::function<double(double)> bend, double width) {
  BoundedDensity density = gaussian(Eigen::Vector2d::Zero(), Eigen::Matrix2d::Identity());
  density.cost = [=](const Eigen::VectorXd& x) {
    return 0.5 * x[0] * x[0] + 0.5 * std::pow((x[1] - bend(x[0])) / width, 2);
  };
  density.peaks = {Eigen::Vector2d(0.0, bend(0.0))};
  return density;
}

// y given x is normal about exp(x/2): a ridge that no linear map makes straight. Moments of the log-normal.
TEST(DensityQuadrature, FollowsABentRidge) {
  constexpr double kWidth = 0.05;
  BoundedDensity density = bent([](double x) { return std::exp(0.5 * x); }, kWidth);
  density.information << 1.0 + 0.25 / (kWidth * kWidth), -0.5 / (kWidth * kWidth), -0.5 / (kWidth * kWidth),
      1.0 / (kWidth * kWidth);
  const DensityIntegral integral = integrate_density(density);
  ASSERT_TRUE(integral.usable);
  EXPECT_NEAR(integral.ln_total, std::log(2.0 * M_PI * kWidth), 1e-4);
  EXPECT_NEAR(integral.marginals[0].central68.high, 1.0, 1e-3);
  EXPECT_NEAR(integral.mean[1], std::exp(0.125), 1e-3);
  EXPECT_NEAR(integral.covariance(1, 1), std::exp(0.5) - std::exp(0.25) + kWidth * kWidth, 2e-3);
}

// y about x^2: a line of given y crosses the ridge at +-sqrt(y). Half of it must not pass for the whole.
TEST(DensityQuadrature, ARidgeThatDoublesBackIsIntegratedOrRefused) {
  BoundedDensity density = bent([](double x) { return x * x; }, 0.05);
  density.information(1, 1) = 400.0;
  const DensityIntegral integral = integrate_density(density);
  if (integral.usable) {
    EXPECT_NEAR(integral.ln_total, std::log(2.0 * M_PI * 0.05), 5e-3);
  }
}

TEST(DensityQuadrature, SumsOverAllPeaksThatItIsTold) {
  BoundedDensity density = gaussian(Eigen::Vector2d::Zero(), Eigen::Matrix2d::Identity());
  const Eigen::Vector2d other(30.0, -25.0);
  density.cost = [=](const Eigen::VectorXd& x) {
    return -std::log(0.7 * std::exp(-0.5 * x.squaredNorm()) +
                     0.3 * std::exp(-0.5 * (x - other).squaredNorm()) + 1e-300);
  };
  density.lower.setConstant(-60.0);
  density.upper.setConstant(60.0);
  density.peaks = {Eigen::Vector2d::Zero(), other};
  const DensityIntegral integral = integrate_density(density);
  ASSERT_TRUE(integral.usable);
  EXPECT_NEAR(integral.ln_total, std::log(2.0 * M_PI), 1e-6);
  EXPECT_NEAR(integral.mean[0], 9.0, 1e-4);
  EXPECT_NEAR(integral.marginals[0].median, quantile(kNormal, 0.5 / 0.7), 1e-3);
}

// A skew density with a long tail, against Gauss-Kronrod quadrature of Boost.
TEST(DensityQuadrature, QuantilesOfASkewDensityAgreeWithBoost) {
  const auto ln_density = [](double x) { return 1.5 * x - std::exp(x); };
  BoundedDensity density = gaussian(Eigen::VectorXd::Constant(1, 0.4), Eigen::MatrixXd::Constant(1, 1, 0.66));
  density.cost = [&](const Eigen::VectorXd& x) { return -ln_density(x[0]); };
  const DensityIntegral integral = integrate_density(density);
  ASSERT_TRUE(integral.usable);
  using Quadrature = boost::math::quadrature::gauss_kronrod<double, 61>;
  const auto below = [&](double x) {
    return Quadrature::integrate([&](double t) { return std::exp(ln_density(t)); }, -60.0, x, 15, 1e-12);
  };
  const double total = below(6.0);
  EXPECT_NEAR(integral.ln_total, std::log(total), 1e-6);
  const MarginalDensity& marginal = integral.marginals.front();
  for (const auto& [p, value] :
       {std::pair{0.5, marginal.median}, {0.025, marginal.central95.low}, {0.975, marginal.central95.high}}) {
    EXPECT_NEAR(below(value) / total, p, 1e-4);
  }
}

TEST(DensityQuadrature, SaysWhenADensityHasNoEnd) {
  BoundedDensity density = gaussian(Eigen::VectorXd::Zero(1), Eigen::MatrixXd::Identity(1, 1));
  density.cost = [](const Eigen::VectorXd& x) { return x[0] < 0.0 ? 0.5 * x[0] * x[0] : 0.0; };
  EXPECT_FALSE(integrate_density(density).usable);
  density.upper[0] = 50.0;  // a bound makes it proper
  const DensityIntegral bounded = integrate_density(density);
  ASSERT_TRUE(bounded.usable);
  EXPECT_NEAR(bounded.ln_total, std::log(50.0 + std::sqrt(0.5 * M_PI)), 1e-4);
  EXPECT_TRUE(bounded.marginals.front().cut_high);
}

TEST(DensityQuadrature, RefusesWhatItCannotIntegrate) {
  const BoundedDensity good = gaussian(Eigen::Vector2d::Zero(), Eigen::Matrix2d::Identity());
  BoundedDensity bad = gaussian(Eigen::VectorXd::Zero(4), Eigen::MatrixXd::Identity(4, 4));
  EXPECT_THROW((void)integrate_density(bad), DomainError);
  bad = good;
  bad.upper[1] = -kInfinite;
  EXPECT_THROW((void)integrate_density(bad), DomainError);
  bad = good;
  bad.peaks.clear();
  EXPECT_THROW((void)integrate_density(bad), DomainError);
  bad = good;
  bad.cost = [](const Eigen::VectorXd&) { return kInfinite; };
  EXPECT_THROW((void)integrate_density(bad), DomainError);
  bad = good;
  bad.information = Eigen::MatrixXd::Identity(3, 3);
  EXPECT_THROW((void)integrate_density(bad), DomainError);
}

TEST(MarginalDensity, OfDrawsIsThatOfTheirQuantiles) {
  const Eigen::VectorXd draws = Eigen::VectorXd::LinSpaced(10001, 0.0, 1.0).reverse();
  const MarginalDensity marginal = marginal_of(draws);
  EXPECT_NEAR(marginal.median, 0.5, 1e-12);
  EXPECT_NEAR(marginal.central95.low, 0.025, 1e-12);
  EXPECT_NEAR(marginal.sigma, 1.0 / std::sqrt(12.0), 1e-3);
  EXPECT_NEAR(marginal.density.mean(), 1.0, 1e-3);
}

}  // namespace
}  // namespace trotline
