#include <gtest/gtest.h>

#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/inference/posterior.hpp>

#include "simulated_source.hpp"

namespace trotline {
namespace {

using simulated::column_and_temperature_free;
using simulated::exact_data;
using simulated::intensities;
using simulated::ladder;
using simulated::ln_column_for;
using simulated::partitions;

/// A source with scatter, so that best values are not the truth.
LikelihoodProblem scattered(const ForwardModel& model, const Eigen::VectorXd& truth, double relative) {
  LikelihoodProblem problem{exact_data(intensities(model, truth), relative),
                            column_and_temperature_free(truth)};
  for (std::size_t i = 0; i < problem.data.size(); ++i) {
    problem.data[i].intensity_k_km_s *= 1.0 + relative * std::sin(5.0 * static_cast<double>(i));
  }
  return problem;
}

TEST(Posterior, IsTheGaussianOfTheCovarianceWhereNoiseIsSmall) {
  const ForwardModel model(ladder(10), partitions(), {});
  const Eigen::VectorXd truth = simulated::state(ln_column_for(model, 1.0, 40.0), 40.0);
  const IntensityLikelihood likelihood(model, scattered(model, truth, 1e-3));
  const LikelihoodFit fit = fit_likelihood(likelihood);
  const Posterior result = posterior(likelihood, fit);
  ASSERT_TRUE(result.usable());
  EXPECT_TRUE(result.by_quadrature);
  for (Eigen::Index k = 0; k < 2; ++k) {
    const double sigma = std::sqrt(fit.curvature_covariance(k, k));
    const MarginalDensity& marginal = result.marginals[static_cast<std::size_t>(k)];
    // the first correction to a Gaussian is of relative order sigma, here 1e-3
    EXPECT_NEAR(marginal.median, fit.free[k], 0.01 * sigma);
    EXPECT_NEAR(marginal.central68.high - marginal.central68.low, 2.0 * sigma, 0.01 * sigma);
  }
  EXPECT_LT((result.covariance - fit.curvature_covariance).norm(), 0.01 * fit.curvature_covariance.norm());
}

TEST(Posterior, QuadratureAndSamplerAgree) {
  auto lines = ladder(10);
  for (auto& line : lines) line.beam_fwhm_arcsec = 10.0 + 0.2 * line.constants.upper_energy_k;
  const ForwardModel model(lines, partitions(), {});
  const Eigen::VectorXd truth = simulated::state(ln_column_for(model, 2.0, 30.0), 30.0, 9.0);
  LikelihoodProblem problem = scattered(model, truth, 0.04);
  problem.parameters[2].free = true;
  problem.parameters[2].lower = std::log(0.5);
  problem.parameters[2].upper = std::log(100.0);
  problem.data[9].is_limit = true;
  for (std::size_t i = 0; i < 10; ++i) {
    problem.data[i].calibration_error = 0.1;
    problem.data[i].calibration_group = static_cast<int>(i / 4);
  }
  const IntensityLikelihood likelihood(model, problem);
  PosteriorOptions options;
  options.with_draws = true;
  const Posterior result = posterior(likelihood, fit_likelihood(likelihood), options);
  ASSERT_TRUE(result.usable());
  ASSERT_TRUE(result.by_quadrature);
  ASSERT_TRUE(result.sample->usable());
  for (std::size_t k = 0; k < 3; ++k) {
    const MarginalDensity& exact = result.marginals[k];
    const MarginalDensity drawn =
        marginal_of(Eigen::VectorXd(result.sample->all.row(static_cast<Eigen::Index>(k))));
    // standard errors of a median and of the 68 % ends of a Gaussian: 1.25 and 1.5 sigma/sqrt(n)
    const double error = exact.sigma / std::sqrt(result.sample->effective_size[static_cast<Eigen::Index>(k)]);
    EXPECT_NEAR(drawn.median, exact.median, 4.0 * 1.25 * error);
    EXPECT_NEAR(drawn.central68.low, exact.central68.low, 4.0 * 1.5 * error);
    EXPECT_NEAR(drawn.central68.high, exact.central68.high, 4.0 * 1.5 * error);
  }
}

TEST(Posterior, AGaussianPriorIsCountedOnceAndNarrows) {
  const ForwardModel model(ladder(6), partitions(), {});
  const Eigen::VectorXd truth = simulated::state(ln_column_for(model, 0.01, 30.0), 30.0);
  LikelihoodProblem problem = scattered(model, truth, 1e-3);
  const Posterior flat =
      posterior(IntensityLikelihood(model, problem), fit_likelihood(IntensityLikelihood(model, problem)));
  problem.parameters[1].prior_mean = flat.mean[1] + 0.5e-3;
  problem.parameters[1].prior_sigma = std::sqrt(flat.covariance(1, 1));
  const IntensityLikelihood likelihood(model, problem);
  const Posterior narrow = posterior(likelihood, fit_likelihood(likelihood));
  // two Gaussians of one width: half way between, narrower by sqrt 2
  EXPECT_NEAR(narrow.mean[1], flat.mean[1] + 0.25e-3, 0.02 * problem.parameters[1].prior_sigma);
  EXPECT_NEAR(narrow.marginals[1].sigma, problem.parameters[1].prior_sigma / std::sqrt(2.0),
              0.02 * problem.parameters[1].prior_sigma);
}

TEST(Posterior, SaysWhereABoundAndNotTheDataEndsAnInterval) {
  const ForwardModel model(ladder(3), partitions(), {});
  const Eigen::VectorXd truth = simulated::state(ln_column_for(model, 0.01, 60.0), 60.0);
  const IntensityLikelihood likelihood(model, scattered(model, truth, 0.15));
  const Posterior result = posterior(likelihood, fit_likelihood(likelihood));
  ASSERT_TRUE(result.usable());
  EXPECT_TRUE(result.marginals[1].cut_high);
  EXPECT_FALSE(result.marginals[1].cut_low);
}

TEST(Posterior, WithoutBoundsOrPriorIsNone) {
  const ForwardModel model(ladder(6), partitions(), {});
  const Eigen::VectorXd truth = simulated::state(ln_column_for(model, 0.01, 30.0), 30.0);
  LikelihoodProblem problem = scattered(model, truth, 0.1);
  problem.parameters[0].upper = std::numeric_limits<double>::infinity();
  const IntensityLikelihood likelihood(model, problem);
  EXPECT_EQ(posterior(likelihood, fit_likelihood(likelihood)).status, PosteriorStatus::unbounded);
  EXPECT_THROW((void)posterior(likelihood, LikelihoodFit{}), DomainError);
}

TEST(Posterior, TwoComponentsGoByTheSamplerAndKeepTheirOrder) {
  ForwardModelOptions options;
  options.components = 2;
  const ForwardModel model(ladder(12), partitions(), options);
  Eigen::VectorXd truth(7);
  truth << 34.0, std::log(15.0), std::numeric_limits<double>::infinity(), 33.5, std::log(110.0),
      std::numeric_limits<double>::infinity(), 2.7255;
  LikelihoodProblem problem{exact_data(intensities(model, truth), 0.03), column_and_temperature_free(truth)};
  for (const std::size_t k : {0U, 1U, 3U, 4U}) {
    problem.parameters[k].free = true;
    problem.parameters[k].lower = k % 3 == 0 ? 20.0 : std::log(3.0);
    problem.parameters[k].upper = k % 3 == 0 ? 50.0 : std::log(800.0);
  }
  const IntensityLikelihood likelihood(model, problem);
  const LikelihoodFit fit = fit_likelihood(likelihood);
  const Posterior result = posterior(likelihood, fit);
  ASSERT_TRUE(result.usable());
  EXPECT_FALSE(result.by_quadrature);
  const bool rises = fit.free[1] < fit.free[3];
  const auto& all = result.sample->all;
  EXPECT_TRUE(rises ? (all.row(1).array() <= all.row(3).array()).all()
                    : (all.row(1).array() >= all.row(3).array()).all());
  for (Eigen::Index k = 0; k < 4; ++k) {
    EXPECT_LT(result.marginals[static_cast<std::size_t>(k)].central95.low, fit.free[k]);
    EXPECT_GT(result.marginals[static_cast<std::size_t>(k)].central95.high, fit.free[k]);
  }
}

// ln(N/Q) - E/T varies least at the mean energy; its spread is that of the covariance.
TEST(DiagramBand, IsTheSpreadOfThePopulationLine) {
  const ForwardModel model(ladder(10), partitions(), {});
  const Eigen::VectorXd truth = simulated::state(ln_column_for(model, 0.01, 40.0), 40.0);
  const IntensityLikelihood likelihood(model, scattered(model, truth, 0.02));
  const LikelihoodFit fit = fit_likelihood(likelihood);
  const EnsembleSample sample = sample_posterior(likelihood, fit);
  ASSERT_TRUE(sample.usable());
  const Eigen::VectorXd energies = Eigen::VectorXd::LinSpaced(31, 0.0, 300.0);
  const DiagramBand band = diagram_band(likelihood, sample.draws, energies);
  const double mean_energy_k = model.partition(0).at(fit.free[1]).dlnq_dlnt * std::exp(fit.free[1]);
  for (Eigen::Index e = 0; e < energies.size(); ++e) {
    // d ln(N_u/g) = d lnN + (E - <E>)/T d lnT
    const Eigen::Vector2d slope(1.0, (energies[e] - mean_energy_k) / std::exp(fit.free[1]));
    const double sigma = std::sqrt(slope.dot(fit.covariance * slope));
    EXPECT_NEAR(0.5 * (band.high68[e] - band.low68[e]), sigma,
                0.08 * sigma);  // 4000 draws: 2 %, and some curvature
    EXPECT_LT(band.low95[e], band.low68[e]);
    EXPECT_LT(band.low68[e], band.median[e]);
  }
  EXPECT_THROW((void)diagram_band(likelihood, sample.draws.leftCols(1), energies), DomainError);
}

}  // namespace
}  // namespace trotline
