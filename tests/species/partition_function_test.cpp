#include <trotline/species/partition_function.hpp>

#include <gtest/gtest.h>

#include <cmath>
#include <limits>
#include <map>
#include <random>
#include <sstream>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/base/text.hpp>

#include "reference_files.hpp"

namespace trotline {
namespace {

using Points = std::vector<std::pair<double, double>>;

std::vector<Level> rigid_linear_rotor(double b_k, int highest_j) {
  std::vector<Level> levels;
  for (int j = 0; j <= highest_j; ++j)
    levels.push_back({fmt::format("{}", j), b_k * j * (j + 1), 2.0 * j + 1.0, ""});
  return levels;
}

/// Options of a list from which no level is missing.
LevelSumOptions complete_list(double highest_k) {
  LevelSumOptions options;
  options.highest_k = highest_k;
  options.complete_to_k = std::numeric_limits<double>::infinity();
  return options;
}

// ---- sums over levels

TEST(LevelSum, TwoLevelsFollowTheClosedForm) {
  const auto partition =
      partition_function_from_levels({{"1", 20.0, 3.0, ""}, {"0", 0.0, 2.0, ""}}, complete_list(1e4));
  for (const double t : {1e-3, 0.5, 3.0, 20.0, 300.0, 1e4}) {
    const double upper = 3.0 * std::exp(-20.0 / t);
    const PartitionValue value = partition->at(t);
    EXPECT_DOUBLE_EQ(value.q, 2.0 + upper);
    EXPECT_DOUBLE_EQ(value.ln_q, std::log(value.q));
    EXPECT_NEAR(value.dlnq_dt, 20.0 * upper / (2.0 + upper) / (t * t), 1e-14 * value.dlnq_dt);
    EXPECT_EQ(value.relative_error, 0.0);
  }
}

TEST(LevelSum, LinearRotorAgreesWithTheEulerMaclaurinExpansion) {
  // McDowell 1988, J. Chem. Phys. 88, 356, eq. 3, rigid: Q = exp(beta/3)/beta (1 + beta^2/90 + 8
  // beta^3/2835), beta = hB/kT; the next term is of order beta^4/1000.
  const auto partition = partition_function_from_levels(rigid_linear_rotor(2.766, 200));
  for (const double t : {75.0, 150.0, 300.0, 1000.0}) {
    const double beta = 2.766 / t;
    const double expansion =
        std::exp(beta / 3.0) / beta * (1.0 + beta * beta / 90.0 + 8.0 * beta * beta * beta / 2835.0);
    EXPECT_NEAR(partition->at(t).q / expansion, 1.0, std::pow(beta, 4) / 100.0 + 1e-14) << t;
  }
}

TEST(LevelSum, SlopeIsTheDerivativeOfLnQ) {
  const auto partition =
      partition_function_from_levels(rigid_linear_rotor(2.766, 120), {.modes = {{600.0, 2}, {1500.0, 1}}});
  for (const double t : {3.0, 10.0, 50.0, 300.0, 900.0}) {
    const double step = 1e-4 * t;
    const double slope = (partition->at(t + step).ln_q - partition->at(t - step).ln_q) / (2.0 * step);
    EXPECT_NEAR(partition->at(t).dlnq_dt / slope, 1.0, 1e-7) << t;  // (step/t)^2 and rounding over the step
  }
}

TEST(LevelSum, VibrationMultipliesByTheHarmonicProduct) {
  const auto levels = rigid_linear_rotor(2.0, 120);
  const auto rotation = partition_function_from_levels(levels);
  const auto both = partition_function_from_levels(levels, {.modes = {{600.0, 2}, {1500.0, 1}}});
  for (const double t : {10.0, 150.0, 300.0, 1000.0}) {
    const double product = std::pow(1.0 - std::exp(-600.0 / t), -2) / (1.0 - std::exp(-1500.0 / t));
    EXPECT_NEAR(both->at(t).q / rotation->at(t).q / product, 1.0, 1e-14) << t;
  }
}

TEST(LevelSum, LeavingOutHighLevelsAndThinningChangesNothing) {
  // 1e5 levels, of which a few hundred matter at 1 K; from 18 K on, windows of 1.2 K stand in for the levels.
  std::vector<Level> levels;
  std::mt19937_64 random(20240611);
  std::uniform_real_distribution<double> energy(0.0, 1e4);
  levels.push_back({"0", 0.0, 1.0, ""});
  for (int i = 0; i < 100000; ++i) levels.push_back({"", energy(random), 1.0 + i % 7, ""});
  const auto partition = partition_function_from_levels(levels, complete_list(1e4));
  for (const double t : {0.05, 1.0, 17.99, 18.01, 30.0, 1000.0}) {
    long double q = 0.0L;
    for (const Level& level : levels)
      q += level.degeneracy * std::exp(-static_cast<long double>(level.energy_k) / t);
    EXPECT_NEAR(partition->at(t).q / static_cast<double>(q), 1.0, 1e-12) << t;
  }
}

TEST(LevelSum, TruncationEstimateIsNearTheTruthForALinearRotor) {
  const auto full = partition_function_from_levels(rigid_linear_rotor(1.0, 400));
  const auto cut = partition_function_from_levels(rigid_linear_rotor(1.0, 30));
  for (const double t : {60.0, 100.0, 150.0, 190.0}) {
    const double missing = full->at(t).q / cut->at(t).q - 1.0;
    const double estimate = cut->at(t).relative_error;
    // The estimate is an integral; the levels near the cut are as far apart as 60 K.
    EXPECT_GT(estimate, missing / 2.0) << t;
    EXPECT_LT(estimate, missing * 2.0) << t;
  }
}

TEST(LevelSum, RefusesTemperaturesWhereTooMuchIsCutOff) {
  const auto cut = partition_function_from_levels(rigid_linear_rotor(1.0, 30));
  EXPECT_NEAR(cut->highest_k(), 930.0 / std::log(100.0), 12.0);  // where exp(-E_last/T) is about 1 %
  EXPECT_NEAR(cut->at(cut->highest_k()).relative_error, kMostTruncation, 1e-5);
  EXPECT_THROW((void)cut->at(1.01 * cut->highest_k()), DomainError);
  EXPECT_THROW((void)cut->at(0.0), DomainError);
  EXPECT_THROW((void)cut->at(-5.0), DomainError);
  EXPECT_THROW((void)cut->at(std::numeric_limits<double>::quiet_NaN()), DomainError);
  EXPECT_THROW(
      (void)partition_function_from_levels(rigid_linear_rotor(1.0, 30), {.highest_k = 50.0})->at(51.0),
      DomainError);
}

TEST(LevelSum, EstimatesTruncationFromWhereLevelsBeginToMiss) {
  std::vector<Level> levels = rigid_linear_rotor(1.0, 30);
  levels.push_back({"60", 3660.0, 121.0, ""});  // one more, far above a gap
  LevelSumOptions options;
  options.complete_to_k = 930.0;
  const auto partition = partition_function_from_levels(levels, options);
  const auto without = partition_function_from_levels(rigid_linear_rotor(1.0, 30));
  EXPECT_NEAR(partition->highest_k() / without->highest_k(), 1.0, 1e-4);
  EXPECT_GT(partition_function_from_levels(levels)->highest_k(), 2.0 * without->highest_k());
  options.complete_to_k = 0.0;
  EXPECT_THROW((void)partition_function_from_levels(levels, options), DomainError);
}

TEST(LevelSum, CountsFromAZeroThatIsNoLevel) {
  // The lowest level allowed to a species may lie above the zero of its energies: Q then falls as T goes to
  // 0.
  const auto partition =
      partition_function_from_levels({{"1", 20.0, 3.0, ""}, {"2", 50.0, 5.0, ""}}, complete_list(1e4));
  for (const double t : {5.0, 40.0, 300.0}) {
    const double q = 3.0 * std::exp(-20.0 / t) + 5.0 * std::exp(-50.0 / t);
    EXPECT_NEAR(partition->at(t).q / q, 1.0, 1e-15);
    const double mean_energy = (60.0 * std::exp(-20.0 / t) + 250.0 * std::exp(-50.0 / t)) / q;
    EXPECT_NEAR(partition->at(t).dlnq_dt * t * t / mean_energy, 1.0, 1e-14);
  }
  EXPECT_NEAR(partition->at(0.01).ln_q, std::log(3.0) - 2000.0, 1e-12);  // Q itself underflows
}

TEST(LevelSum, MeanEnergyStaysFiniteAtTheLowestTemperature) {
  const PartitionValue value =
      partition_function_from_levels(rigid_linear_rotor(2.0, 10))->at(kLowestTemperatureK);
  EXPECT_EQ(value.q, 1.0);
  EXPECT_EQ(value.ln_q, 0.0);
  EXPECT_EQ(value.dlnq_dt, 0.0);
}

TEST(LevelSum, NamesTheLevelThatIsWrong) {
  const double nan = std::numeric_limits<double>::quiet_NaN();
  EXPECT_THROW((void)partition_function_from_levels({}), DomainError);
  EXPECT_THROW((void)partition_function_from_levels({{"0", 0.0, 1.0, ""}}, {.modes = {{-5.0, 1}}}),
               DomainError);
  EXPECT_THROW((void)partition_function_from_levels({{"0", 0.0, 1.0, ""}}, {.modes = {{5.0, 0}}}),
               DomainError);
  for (const Level& bad :
       {Level{"2(1)", -1.0, 1.0, ""}, Level{"2(1)", nan, 1.0, ""}, Level{"2(1)", 5.0, 0.0, ""}}) {
    try {
      (void)partition_function_from_levels({{"0", 0.0, 1.0, ""}, bad});
      FAIL() << "a level that cannot be was accepted";
    } catch (const DomainError& error) {
      EXPECT_NE(std::string(error.what()).find("2(1)"), std::string::npos) << error.what();
    }
  }
}

TEST(LevelSum, SaysWhatItIs) {
  EXPECT_EQ(partition_function_from_levels(rigid_linear_rotor(2.0, 10))->description(), "sum over 11 levels");
  EXPECT_EQ(partition_function_from_levels({{"0", 0.0, 1.0, ""}}, {.modes = {{900.0, 1}}})->description(),
            "sum over 1 level times 1 vibrational mode");
}

// ---- tables

TEST(PartitionTable, GoesThroughItsPoints) {
  const Points points = {{5, 2.2}, {10, 4.1}, {20, 9.0}, {50, 30.0}, {100, 80.0}, {300, 400.0}};
  const auto partition = partition_function_from_table(points);
  for (const auto& [t, q] : points) EXPECT_NEAR(partition->at(t).q, q, 1e-13 * q);
  EXPECT_EQ(partition->lowest_k(), 5.0);
  EXPECT_EQ(partition->highest_k(), 300.0);
  EXPECT_EQ(partition->description(), "table of 6 temperatures");
}

TEST(PartitionTable, ReproducesPowerLawsExactly) {
  Points points;
  for (const double t : {9.375, 18.75, 37.5, 75.0, 150.0, 225.0, 300.0})
    points.emplace_back(t, 0.3 * std::pow(t, 1.5));
  const auto partition = partition_function_from_table(points);
  for (double t = 9.375; t <= 300.0; t += 7.3) {
    EXPECT_NEAR(partition->at(t).q, 0.3 * std::pow(t, 1.5), 1e-13 * std::pow(t, 1.5));
    EXPECT_NEAR(partition->at(t).dlnq_dt * t, 1.5, 1e-12);
    EXPECT_LT(partition->at(t).relative_error, 1e-13);
  }
}

TEST(PartitionTable, NeverFalls) {
  std::mt19937_64 random(7);
  std::exponential_distribution<double> step(1.0);
  for (int round = 0; round < 200; ++round) {
    Points points = {{5.0, 1.0}};
    for (int i = 0; i < 8; ++i) {
      const double rise = i % 3 == 0 ? 0.0 : std::exp(4.0 * step(random) - 4.0);
      points.emplace_back(points.back().first * (1.05 + step(random)), points.back().second * (1.0 + rise));
    }
    const auto partition = partition_function_from_table(points);
    double last = 0.0;
    for (double t = 5.0; t < points.back().first; t *= 1.01) {
      const PartitionValue value = partition->at(t);
      EXPECT_GE(value.q, last * (1.0 - 1e-13));
      EXPECT_GE(value.dlnq_dt, -1e-12);
      last = value.q;
    }
  }
}

TEST(PartitionTable, SlopeIsTheDerivativeOfLnQ) {
  const auto partition =
      partition_function_from_table({{5, 2.2}, {10, 4.1}, {20, 9.0}, {50, 30.0}, {100, 80.0}, {300, 400.0}});
  for (const double t : {6.0, 15.0, 33.0, 70.0, 250.0}) {
    const double step = 1e-5 * t;
    const double slope = (partition->at(t + step).ln_q - partition->at(t - step).ln_q) / (2.0 * step);
    EXPECT_NEAR(partition->at(t).dlnq_dt / slope, 1.0, 1e-7) << t;
  }
}

TEST(PartitionTable, RefusesWhatIsOutsideAndTablesThatAreNone) {
  const Points good = {{5, 2}, {10, 4}, {20, 9}, {50, 30}, {100, 80}};
  const auto partition = partition_function_from_table(good);
  EXPECT_THROW((void)partition->at(4.999), DomainError);
  EXPECT_THROW((void)partition->at(100.001), DomainError);
  EXPECT_THROW((void)partition->at(std::numeric_limits<double>::quiet_NaN()), DomainError);
  EXPECT_THROW((void)partition_function_from_table({{5, 2}, {10, 4}, {20, 9}, {50, 30}}), DomainError);
  for (const auto& [place, bad] : std::map<std::size_t, std::pair<double, double>>{
           {0, {0.0, 2.0}}, {1, {5.0, 4.0}}, {2, {20.0, 3.9}}, {3, {50, NAN}}, {4, {NAN, 80}}}) {
    Points points = good;
    points[place] = bad;
    EXPECT_THROW((void)partition_function_from_table(points), DomainError) << place;
  }
}

// Published tables of Q in steps of 1 K: from the seven usual temperatures alone, the interpolation must stay
// within its own estimate of its error everywhere between them.
class TabulatedSpecies : public testing::TestWithParam<const char*> {};

Points read_table(const std::string& path) {
  std::map<double, double> rows;
  std::istringstream text(read_file(path));
  for (std::string line; std::getline(text, line);) {
    if (line.starts_with('#')) continue;
    std::istringstream fields(line);
    double t = 0.0;
    double q = 0.0;
    if (fields >> t >> q) rows[t] = q;
  }
  return {rows.begin(), rows.end()};
}

TEST_P(TabulatedSpecies, InterpolationErrorIsWithinItsEstimate) {
  const auto path = test::reference_file(std::string("partition/") + GetParam());
  if (path.empty()) GTEST_SKIP() << "no reference files here";
  const Points table = read_table(path.string());
  ASSERT_EQ(table.size(), 1000u);
  const auto fine = partition_function_from_table(table);
  Points usual;
  for (const double t : {9.375, 18.75, 37.5, 75.0, 150.0, 225.0, 300.0}) usual.emplace_back(t, fine->at(t).q);
  const auto coarse = partition_function_from_table(usual);
  double worst = 0.0;
  for (const auto& [t, q] : table) {
    if (t < usual.front().first || t > usual.back().first) continue;
    const double error = std::abs(coarse->at(t).q / q - 1.0);
    worst = std::max(worst, error);
    EXPECT_LE(error, coarse->at(t).relative_error + 1e-6) << t;
  }
  RecordProperty("worst_relative_error", fmt::format("{:.2e}", worst));
  EXPECT_LT(worst, 0.005);  // straight lines between the logarithms are wrong by 1 to 7 %
}

INSTANTIATE_TEST_SUITE_P(Published, TabulatedSpecies,
                         testing::Values("co_tag028503.qtable.txt", "ch3cn_tag041505.qtable.txt",
                                         "h2coh_tag031515.qtable.txt", "h2s_tag034002.qtable.txt",
                                         "oc33s_tag061999.qtable.txt"));

// ---- comparison

TEST(PartitionComparison, FindsAConstantFactor) {
  std::vector<Level> once = rigid_linear_rotor(2.0, 60);
  std::vector<Level> thrice = once;
  for (Level& level : thrice) level.degeneracy *= 3.0;
  const auto comparison = compare(*partition_function_from_levels(thrice),
                                  *partition_function_from_levels(once), {5.0, 10.0, 100.0, 300.0, 1e5});
  EXPECT_NEAR(comparison.constant_factor, 3.0, 1e-12);
  EXPECT_LT(comparison.spread, 1e-12);
  EXPECT_TRUE(comparison.is_difference_of_convention);
  EXPECT_EQ(comparison.ratios.size(), 4u);  // 1e5 K is beyond both
}

TEST(PartitionComparison, TellsVibrationFromConvention) {
  const auto rotation = partition_function_from_levels(rigid_linear_rotor(2.0, 60));
  const auto both = partition_function_from_levels(rigid_linear_rotor(2.0, 60), {.modes = {{500.0, 2}}});
  const auto comparison = compare(*both, *rotation, {10.0, 75.0, 150.0, 225.0, 300.0});
  EXPECT_GT(comparison.spread, 0.3);  // (1 - exp(-500/300))^-2 = 1.54 against 1.15 at 150 K
  EXPECT_FALSE(comparison.is_difference_of_convention);
  EXPECT_FALSE(compare(*both, *both, {10.0, 300.0}).is_difference_of_convention);
}

TEST(PartitionComparison, IsEmptyWithoutCommonTemperatures) {
  const auto partition = partition_function_from_levels(rigid_linear_rotor(2.0, 60));
  const auto comparison = compare(*partition, *partition, {});
  EXPECT_TRUE(comparison.ratios.empty());
  EXPECT_TRUE(std::isnan(comparison.constant_factor));
  EXPECT_FALSE(comparison.is_difference_of_convention);
}

}  // namespace
}  // namespace trotline
