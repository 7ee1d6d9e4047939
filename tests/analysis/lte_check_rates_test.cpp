// A short seeded part of tests/validation/analysis/lte_check_rates.cpp; docs/lte_checks.md has the long one.
#include <gtest/gtest.h>

#include "validation/analysis/lte_departures.hpp"

namespace trotline {
namespace {

using namespace departures;

constexpr int kTables = 60;
constexpr std::uint64_t kSeed = 7;

// All of true LTE together: below 5 % with 720 tables means below 6.6 % at two standard errors.
TEST(LteVerdict, CriesWolfInFewerThan5PercentOfTrueLte) {
  int tables = 0;
  int alarms = 0;
  std::uint64_t seed = kSeed;
  for (const Case& one : true_lte()) {
    const Rates rates = rates_of(one, kTables, ++seed);
    tables += rates.tables;
    alarms += rates.caught;
    EXPECT_LE(rates.caught, 8) << one.name;  // chance of more, if 5 % hold: 0.2 %
  }
  EXPECT_LT(alarms, 0.05 * tables);
}

/// How many of the tables of the cases with this departure are caught, for each case.
std::vector<std::pair<std::string, double>> caught(const std::string& departure) {
  std::vector<std::pair<std::string, double>> shares;
  std::uint64_t seed = kSeed + 100;
  for (const Case& one : departed()) {
    ++seed;
    if (one.what != departure) continue;
    const Rates rates = rates_of(one, 30, seed);
    shares.emplace_back(one.name, rates.caught / 30.0);
  }
  return shares;
}

TEST(LteVerdict, CatchesStrongDeparturesNearlyAlways) {
  EXPECT_GT(caught("subthermal high-J levels")[1].second, 0.9);
  EXPECT_GT(caught("second component not recognised").back().second, 0.9);
  EXPECT_GT(caught("beam dilution ignored").back().second, 0.9);
  EXPECT_GT(caught("one line blended").back().second, 0.9);
  EXPECT_GT(caught("wrong spin weights").front().second, 0.9);
}

TEST(LteVerdict, SeesIgnoredOpacityWhereWidthsAreKnown) {
  for (const auto& [name, share] : caught("opacity ignored")) {
    if (name.find("tau0 = 3, widths known") != 0) continue;
    EXPECT_GT(share, 0.9);
  }
}

// One factor on all lines leaves no trace in them: the docs say so, and this holds them to it.
TEST(LteVerdict, CannotSeeAConventionOfQThatAllLinesShare) {
  EXPECT_LT(caught("wrong Q convention, all lines alike").front().second, 0.2);
}

// Without collisions that keep up, populations follow radiation; with many, Boltzmann.
TEST(StatisticalEquilibrium, GoesToBoltzmannAndToTheBackground) {
  const Species species = simulated_table::rotor();
  for (const auto& [density, temperature_k] : {std::pair{1e14, 40.0}, {1e-6, constants::kCosmicBackgroundK}}) {
    const Eigen::VectorXd fraction = equilibrium::populations(species, 40.0, density);
    for (Eigen::Index j = 1; j < 12; ++j) {
      const auto u = static_cast<std::size_t>(j);
      const double ratio = fraction[j] / fraction[j - 1];
      const double boltzmann = species.levels[u].degeneracy / species.levels[u - 1].degeneracy *
                               std::exp(-(species.levels[u].energy_k - species.levels[u - 1].energy_k) / temperature_k);
      if (density < 1.0 && j > 3) break;  // populations of 1e-6 and less
      EXPECT_NEAR(ratio / boltzmann, 1.0, 2e-3) << density << " J " << j;
    }
  }
}

}  // namespace
}  // namespace trotline
