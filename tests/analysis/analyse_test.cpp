#include <trotline/analysis/analyse.hpp>

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>
#include <numbers>

#include <trotline/analysis/line_matching.hpp>
#include <trotline/base/errors.hpp>
#include <trotline/excitation/thin_line.hpp>

namespace trotline {
namespace {

using ::testing::HasSubstr;

constexpr double kRadPerArcsec = std::numbers::pi / 648000.0;

/// A rigid linear rotor of B = 20 GHz, built by hand.
Species rotor() {
  Species species;
  species.name = species.formula = "RX";
  species.kind = SpeciesKind::levels;
  for (int j = 0; j <= 60; ++j) {
    species.levels.push_back({std::to_string(j), 0.9598486 * j * (j + 1), 2.0 * j + 1.0, ""});
  }
  for (std::uint32_t j = 1; j <= 60; ++j) {
    const double nu = 40e9 * j;
    species.transitions.push_back({j, j - 1, nu, 0.0, 1.2e-7 * j * j * j * j / (2.0 * j + 1.0)});
  }
  species.partition = partition_function_from_levels(species.levels);
  return species;
}

struct Truth {
  double temperature_k = 40.0;
  double column_per_cm2 = 3e13;
  double background_k = constants::kCosmicBackgroundK;
  double source_arcsec = 0.0;  ///< 0: fills the beam
};

double true_intensity(const Species& species, std::size_t index, const Truth& truth, double beam_arcsec) {
  const Transition& t = species.transitions[index];
  const Level& u = species.levels[t.upper];
  const LineConstants line{t.frequency_hz, u.energy_k, u.degeneracy, t.einstein_a_per_s};
  const double n_upper = truth.column_per_cm2 / species.partition->at(truth.temperature_k).q * u.degeneracy *
                         std::exp(-u.energy_k / truth.temperature_k);
  const double filling = truth.source_arcsec > 0.0 ? gaussian_filling(truth.source_arcsec, beam_arcsec) : 1.0;
  return filling * n_upper * intensity_per_upper_column_k_km_s_cm2(line) *
         background_contrast(t.frequency_hz, truth.temperature_k, truth.background_k);
}

/// Noiseless rows of J = 1..lines, S/N 50, beams 1200 / J arcsec.
IntensityTable table_of(const Species& species, const Truth& truth, int lines) {
  IntensityTable table;
  table.file = "lines.csv";
  for (int j = 1; j <= lines; ++j) {
    IntensityRow row;
    row.line_number = static_cast<std::size_t>(j) + 1;
    row.transition = std::to_string(j) + "-" + std::to_string(j - 1);
    row.beam_fwhm_rad = 120.0 / j * kRadPerArcsec;
    row.intensity = true_intensity(species, static_cast<std::size_t>(j) - 1, truth, 120.0 / j);
    row.intensity_sigma = 0.02 * row.intensity;
    table.rows.push_back(row);
  }
  return table;
}

std::string refusal(const IntensityTable& table, const RunOptions& options = {}) {
  try {
    (void)analyse(rotor(), table, options);
  } catch (const InputError& error) {
    return error.what();
  }
  return "accepted";
}

Outcome outcome_of(const Result& result, const std::string& name) {
  for (const Check& check : result.checks) {
    if (check.name == name) return check.outcome;
  }
  ADD_FAILURE() << "no check '" << name << "'";
  return Outcome::not_testable;
}

TEST(Analyse, ReturnsTheTruthOfNoiselessLines) {
  const Species species = rotor();
  const Result result = analyse(species, table_of(species, {}, 8), {});
  ASSERT_EQ(result.status, Status::done);
  EXPECT_NEAR(result.temperature_k.value, 40.0, 1e-7);
  EXPECT_NEAR(result.column_density_cm2.value / 3e13, 1.0, 1e-8);
  EXPECT_EQ(result.dof, 6);
  EXPECT_EQ(result.verdict, "one temperature describes the lines");
  for (const LineResult& line : result.lines) EXPECT_NEAR(line.residual_sigma, 0.0, 1e-6);
}

TEST(Analyse, TakesBeamDilutionOffLineByLine) {
  const Species species = rotor();
  Truth truth;
  truth.source_arcsec = 60.0;
  const IntensityTable table = table_of(species, truth, 8);
  RunOptions options;
  options.source_size_rad = 60.0 * kRadPerArcsec;
  EXPECT_NEAR(analyse(species, table, options).temperature_k.value, 40.0, 1e-7);
  EXPECT_GT(std::abs(analyse(species, table, {}).temperature_k.value - 40.0), 5.0);  // wrong without
}

TEST(Analyse, ScalesOfFluxAndAntennaGiveTheSameResult) {
  const Species species = rotor();
  const IntensityTable table = table_of(species, {}, 6);
  const Result expected = analyse(species, table, {});
  IntensityTable antenna = table;
  IntensityTable flux = table;
  for (std::size_t i = 0; i < table.rows.size(); ++i) {
    antenna.rows[i].scale = IntensityScale::antenna;
    antenna.rows[i].intensity *= 0.6 / 0.9;
    antenna.rows[i].intensity_sigma *= 0.6 / 0.9;
    // Common practice: T[K] = 1.222e6 S[Jy/beam] / (nu[GHz]^2 theta1 theta2 [arcsec^2])
    const double kelvin_per_jansky = 1.222e6 / std::pow(40.0 * (double(i) + 1.0) * 120.0 / (double(i) + 1.0), 2);
    flux.rows[i].scale = IntensityScale::flux_per_beam;
    flux.rows[i].intensity /= kelvin_per_jansky;
    flux.rows[i].intensity_sigma /= kelvin_per_jansky;
  }
  RunOptions options;
  EXPECT_THAT(refusal(antenna), HasSubstr("forward_efficiency"));
  options.forward_efficiency = 0.9;
  options.main_beam_efficiency = 0.6;
  EXPECT_NEAR(analyse(species, antenna, options).temperature_k.value, expected.temperature_k.value, 1e-9);
  const Result from_flux = analyse(species, flux, {});
  EXPECT_NEAR(from_flux.temperature_k.value, expected.temperature_k.value, 1e-9);
  EXPECT_NEAR(from_flux.column_density_cm2.value / expected.column_density_cm2.value, 1.0, 5e-4);  // 1.222 has 4 digits
}

TEST(Analyse, MatchesByFrequencyAsByLabel) {
  const Species species = rotor();
  IntensityTable by_label = table_of(species, {}, 5);
  IntensityTable by_frequency = by_label;
  for (std::size_t i = 0; i < 5; ++i) {
    by_frequency.rows[i].transition.reset();
    by_frequency.rows[i].frequency_hz = 40e9 * (double(i) + 1.0) + 3e5;
  }
  EXPECT_EQ(analyse(species, by_label, {}).temperature_k.value, analyse(species, by_frequency, {}).temperature_k.value);
}

TEST(Analyse, RefusesRowsThatItCannotMatch) {
  const Species species = rotor();
  IntensityTable table = table_of(species, {}, 3);
  table.rows[1].transition = "2-2";
  EXPECT_THAT(refusal(table), ::testing::AllOf(HasSubstr("lines.csv:3"), HasSubstr("no transition '2-2'"),
                                               HasSubstr("did you mean")));
  table.rows[1].transition = "2-1";
  table.rows[1].frequency_hz = 81e9;
  EXPECT_THAT(refusal(table), HasSubstr("do not belong together"));
  table.rows[1].transition.reset();
  EXPECT_THAT(refusal(table), ::testing::AllOf(HasSubstr("within 0.5 MHz of 81.000000 GHz"),
                                               HasSubstr("nearest is 2-1"), HasSubstr("-1000.000 MHz")));
  RunOptions wide;
  wide.frequency_tolerance_hz = 60e9;
  EXPECT_THAT(refusal(table, wide), HasSubstr("transitions within"));
}

TEST(Analyse, NeedsOneSourceAndRowsOfTheSpecies) {
  const Species species = rotor();
  IntensityTable table = table_of(species, {}, 3);
  table.rows[0].source = "Reed";
  table.rows[1].source = table.rows[2].source = "Sedge";
  EXPECT_THAT(refusal(table), ::testing::AllOf(HasSubstr("2 sources"), HasSubstr("Reed, Sedge")));
  RunOptions options;
  options.source = "Sedge";
  EXPECT_EQ(analyse(species, table, options).lines.size(), 2U);
  options.source = "Burr";
  EXPECT_THAT(refusal(table, options), HasSubstr("no row of the source 'Burr'"));
  for (auto& row : table.rows) row.species = "CO";
  EXPECT_THAT(refusal(table), HasSubstr("no row of the species RX"));
  table.rows[2].species = "rx";
  table.rows[1].species = "RX";
  options.source = "Sedge";
  const Result result = analyse(species, table, options);
  EXPECT_THAT(result.warnings, ::testing::Contains(HasSubstr("1 rows of other species")));
}

TEST(Analyse, CalibrationWithinAGroupIsShared) {
  const Species species = rotor();
  IntensityTable table = table_of(species, {}, 6);
  const Result bare = analyse(species, table, {});
  for (auto& row : table.rows) {
    row.calibration_error = 0.1;
    row.calibration_group = "night 1";
  }
  const Result shared = analyse(species, table, {});
  EXPECT_NEAR(shared.temperature_k.error / bare.temperature_k.error, 1.0, 1e-7);
  EXPECT_NEAR(std::pow(shared.log10_column_density_cm2.error * std::numbers::ln10, 2),
              std::pow(bare.log10_column_density_cm2.error * std::numbers::ln10, 2) + 0.01, 1e-9);
  for (auto& row : table.rows) row.calibration_group.reset();
  const Result apart = analyse(species, table, {});
  EXPECT_GT(apart.temperature_k.error, 4.0 * bare.temperature_k.error);
  RunOptions options;
  options.calibration_shared = true;
  EXPECT_NEAR(analyse(species, table, options).temperature_k.error / shared.temperature_k.error, 1.0, 1e-9);
}

TEST(Analyse, ComparesLimitsWithTheModelAndDoesNotFitThem) {
  const Species species = rotor();
  IntensityTable table = table_of(species, {}, 6);
  table.rows[5].is_limit = true;
  table.rows[5].intensity *= 3.0;
  const Result kept = analyse(species, table, {});
  EXPECT_EQ(kept.dof, 3);
  EXPECT_FALSE(kept.lines[5].used);
  EXPECT_EQ(outcome_of(kept, "limits"), Outcome::pass);
  table.rows[5].intensity /= 30.0;
  const Result broken = analyse(species, table, {});
  EXPECT_EQ(outcome_of(broken, "limits"), Outcome::fail);
  EXPECT_THAT(broken.verdict, HasSubstr("does not describe"));
  EXPECT_EQ(broken.temperature_k.value, kept.temperature_k.value);
}

TEST(Analyse, LeavesOutLinesWithAReasonForEach) {
  const Species species = rotor();
  IntensityTable table = table_of(species, {}, 8);
  table.rows[3].intensity = -0.1;
  RunOptions options;
  options.without_lines = {"2-1"};
  options.upper_energy_k = QuantityRange{0.0, 60.0};
  const Result result = analyse(species, table, options);
  EXPECT_THAT(result.lines[1].why_unused, HasSubstr("'without'"));
  EXPECT_THAT(result.lines[3].why_unused, HasSubstr("not above zero"));
  EXPECT_THAT(result.lines[7].why_unused, HasSubstr("upper_energy"));
  EXPECT_EQ(result.dof, 3);
  EXPECT_NEAR(result.temperature_k.value, 40.0, 1e-7);
}

TEST(Analyse, WhatCannotBeAnsweredHasAStatusOfItsOwn) {
  const Species species = rotor();
  EXPECT_EQ(analyse(species, table_of(species, {}, 1), {}).status, Status::one_line);
  EXPECT_FALSE(analyse(species, table_of(species, {}, 1), {}).columns_at_temperatures.empty());
  const Result two = analyse(species, table_of(species, {}, 2), {});
  EXPECT_EQ(two.status, Status::done);
  EXPECT_EQ(two.dof, 0);
  EXPECT_TRUE(std::isnan(two.p_value));
  EXPECT_EQ(two.verdict, "these lines cannot tell");
  IntensityTable rising = table_of(species, {}, 4);
  for (std::size_t i = 0; i < 4; ++i) rising.rows[i].intensity *= std::exp(double(i * i));
  EXPECT_EQ(analyse(species, rising, {}).status, Status::not_thermal);
  IntensityTable limits = table_of(species, {}, 4);
  for (auto& row : limits.rows) row.is_limit = true;
  EXPECT_EQ(analyse(species, limits, {}).status, Status::only_limits);
}

/// Until 2026-12-01 a limit that 'without' had put aside still set the limit of N, and detections that an option
/// had put aside were called undetected.
TEST(Analyse, LinesPutAsideSetNoLimitAndAreNotCalledUndetected) {
  const Species species = rotor();
  IntensityTable limits = table_of(species, {}, 4);
  for (auto& row : limits.rows) row.is_limit = true;
  RunOptions options;
  options.temperature_k = 40.0;
  const double honest = analyse(species, limits, options).columns_at_temperatures.at(0).column_density_cm2;
  limits.rows[2].intensity *= 1e-3;  // a slip of the observer's
  const Result all = analyse(species, limits, options);
  EXPECT_NEAR(all.columns_at_temperatures.at(0).column_density_cm2 / honest, 1e-3, 1e-9);
  options.without_lines = {all.lines[2].transition};
  const Result without = analyse(species, limits, options);
  EXPECT_NEAR(without.columns_at_temperatures.at(0).column_density_cm2 / honest, 1.0, 1e-9);

  IntensityTable detected = table_of(species, {}, 4);
  detected.rows[3].is_limit = true;
  RunOptions demanding;
  demanding.least_snr = 1e9;
  EXPECT_EQ(analyse(species, detected, demanding).status, Status::no_lines);
}

TEST(Analyse, RefusesNoiseThatVanishesBesideTheCalibration) {
  const Species species = rotor();
  IntensityTable table = table_of(species, {}, 4);
  for (auto& row : table.rows) row.intensity_sigma = 1e-9 * row.intensity;
  RunOptions options;
  options.calibration_error = 0.1;
  EXPECT_THROW((void)analyse(species, table, options), InputError);
}

TEST(Analyse, LimitsAloneBoundNAtEachTemperatureOrAtTheGivenOne) {
  const Species species = rotor();
  IntensityTable limits = table_of(species, {}, 4);
  for (auto& row : limits.rows) row.is_limit = true;
  RunOptions options;
  options.temperature_k = 40.0;
  const Result at_truth = analyse(species, limits, options);
  ASSERT_EQ(at_truth.columns_at_temperatures.size(), 1U);
  EXPECT_TRUE(at_truth.columns_at_temperatures[0].upper_limit);
  EXPECT_NEAR(at_truth.columns_at_temperatures[0].column_density_cm2 / 3e13, 1.0, 1e-10);
}

TEST(Analyse, LinesThatTheOptionsCutAwayAreNotCalledUndetected) {
  const Species species = rotor();
  RunOptions options;
  options.least_snr = 1e9;
  EXPECT_EQ(analyse(species, table_of(species, {}, 4), options).status, Status::no_lines);
}

TEST(Analyse, ATemperatureThatTheDataDoNotSetIsNotCalledADescription) {
  const Species species = rotor();
  IntensityTable noisy = table_of(species, {}, 3);
  for (auto& row : noisy.rows) row.intensity_sigma = 0.7 * row.intensity;
  const Result result = analyse(species, noisy, {});
  ASSERT_EQ(result.status, Status::done);
  EXPECT_TRUE(std::isnan(result.temperature_k.high95));
  EXPECT_EQ(result.verdict, "these lines cannot tell");
}

TEST(Analyse, ImplausibleIntensitiesAreRefusedWithTheirLine) {
  const Species species = rotor();
  for (const double factor : {1e300, 1e-300}) {
    IntensityTable table = table_of(species, {}, 3);
    table.rows[1].intensity *= factor;
    EXPECT_THAT(refusal(table), ::testing::AllOf(HasSubstr("lines.csv:3"), HasSubstr("check value and unit")));
    table = table_of(species, {}, 3);
    table.rows[1].intensity_sigma *= factor;
    EXPECT_THAT(refusal(table), HasSubstr("an intensity error"));
  }
  IntensityTable many = table_of(species, {}, 3);
  many.rows.resize(kMostRowsOfASource + 1, many.rows[0]);
  EXPECT_THAT(refusal(many), HasSubstr("at most 1000"));
}

TEST(Analyse, ALineFarBelowZeroIsWarnedOf) {
  const Species species = rotor();
  IntensityTable table = table_of(species, {}, 5);
  table.rows[2].intensity *= -1.0;
  EXPECT_THAT(analyse(species, table, {}).warnings, ::testing::Contains(HasSubstr("negative by more than 3")));
}

TEST(Analyse, ATransitionThatStandsTwiceIsWarnedOf) {
  const Species species = rotor();
  IntensityTable table = table_of(species, {}, 5);
  table.rows.push_back(table.rows[2]);
  EXPECT_THAT(analyse(species, table, {}).warnings, ::testing::Contains(HasSubstr("3-2 stands 2 times")));
}

TEST(Analyse, OneLineAtItsTrueTemperatureGivesTheTrueN) {
  const Species species = rotor();
  RunOptions options;
  options.temperature_k = 40.0;
  const Result result = analyse(species, table_of(species, {}, 1), options);
  ASSERT_EQ(result.status, Status::done);
  EXPECT_NEAR(result.column_density_cm2.value / 3e13, 1.0, 1e-10);
  EXPECT_NEAR(result.column_density_cm2.error / result.column_density_cm2.value, 0.02, 1e-10);
  EXPECT_TRUE(std::isnan(result.temperature_k.error));
}

TEST(Analyse, TheOrderOfRowsDoesNotMatter) {
  const Species species = rotor();
  IntensityTable table = table_of(species, {}, 7);
  for (std::size_t i = 0; i < 7; ++i) table.rows[i].intensity *= 1.0 + 0.02 * std::sin(7.0 * double(i));
  const Result forward = analyse(species, table, {});
  std::reverse(table.rows.begin(), table.rows.end());
  const Result backward = analyse(species, table, {});
  EXPECT_NEAR(forward.temperature_k.value / backward.temperature_k.value, 1.0, 1e-11);
  EXPECT_NEAR(forward.chi2 / backward.chi2, 1.0, 1e-9);
}

}  // namespace
}  // namespace trotline
