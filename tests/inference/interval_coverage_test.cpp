// The short form of tests/validation/inference/interval_coverage.cpp, whose table stands in
// docs/validation.md.

#include <gtest/gtest.h>

#include "validation/inference/coverage_methods.hpp"

namespace trotline::coverage {
namespace {

constexpr std::uint64_t kSeed = 20260604;
constexpr int kSources = 200;

/// How far a share may be from p by chance, at four standard errors of a binomial count.
double four_sigma(double p) { return 4.0 * std::sqrt(p * (1.0 - p) / kSources); }

const Scenario& scenario_named(const std::string& part) {
  static const std::vector<Scenario> all = scenarios();
  for (const Scenario& scenario : all) {
    if (scenario.name.find(part) != std::string::npos) return scenario;
  }
  throw std::runtime_error("no scenario " + part);
}

TEST(IntervalCoverage, LikelihoodAndPosteriorHoldTheTruthAsOftenAsTheySay) {
  std::uint64_t number = 100;
  for (const char* name : {"12 thin lines, S/N 10", "8 lines, tau 10", "12 lines, tau 2, a third limits"}) {
    const Tallies tallies = tally(scenario_named(name), kSeed, number++, kSources);
    for (const auto& target : tallies) {
      for (const Method method : {kLikelihood, kPosterior}) {
        const Tally& t = target[method];
        EXPECT_EQ(t.answered, kSources) << name;
        EXPECT_NEAR(t.coverage68(), 0.6827, four_sigma(0.6827)) << name << ' ' << kMethodNames[method];
        EXPECT_NEAR(t.coverage95(), 0.95, four_sigma(0.95)) << name << ' ' << kMethodNames[method];
        // the standard error of a median is 1.2533/sqrt(n); 0.15 is what the method is held to
        EXPECT_LT(std::abs(t.median_bias()), 0.15 + 3.0 * 1.2533 / std::sqrt(kSources)) << name;
      }
    }
  }
}

TEST(IntervalCoverage, TheStraightLineFailsWhereLinesAreOpaque) {
  const Tallies tallies = tally(scenario_named("8 lines, tau 3"), kSeed, 200, 60);
  for (const auto& target : tallies) EXPECT_LT(target[kLine].coverage95(), 0.5);
  EXPECT_LT(tallies[1][kLine].median_bias(), -3.0);  // N comes out low
}

TEST(IntervalCoverage, SourcesAreDrawnAgainFromTheirSeed) {
  const Scenario& scenario = scenario_named("calibration, S/N 20");
  const ForwardModel model = model_of(scenario);
  const Source one = simulate(scenario, model, Draws(1, 2, 3));
  const Source two = simulate(scenario, model, Draws(1, 2, 3));
  const Source other = simulate(scenario, model, Draws(1, 2, 4));
  EXPECT_EQ(one.problem.data[4].intensity_k_km_s, two.problem.data[4].intensity_k_km_s);
  EXPECT_NE(one.problem.data[4].intensity_k_km_s, other.problem.data[4].intensity_k_km_s);
}

}  // namespace
}  // namespace trotline::coverage
