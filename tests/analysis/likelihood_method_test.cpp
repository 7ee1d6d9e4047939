#include <gmock/gmock.h>
#include <fmt/format.h>
#include <gtest/gtest.h>

#include <cmath>

#include <trotline/base/errors.hpp>

#include "analysis/simulated_table.hpp"

namespace trotline {
namespace {

using namespace simulated_table;
using ::testing::Contains;
using ::testing::HasSubstr;

constexpr double kDouble = 1e-6;  // the model's curve of growth and the sum over velocity agree to this

const Check& check_named(const Result& result, const std::string& name) {
  for (const Check& check : result.checks) {
    if (check.name == name) return check;
  }
  ADD_FAILURE() << "no check '" << name << "'";
  static const Check none;
  return none;
}

std::string refusal(const Species& species, const IntensityTable& table, const RunOptions& options) {
  try {
    (void)analyse(species, table, options);
  } catch (const InputError& error) {
    return error.what();
  }
  return "accepted";
}

TEST(LikelihoodMethod, ReturnsTheTruthOfNoiselessLinesFromThinToOpaque) {
  const Species species = rotor();
  for (const double tau0 : {0.01, 1.0, 10.0, 100.0}) {
    const double n = column_for(species, tau0, 40.0, 8);
    const IntensityTable table = table_of(species, {{40.0, n}}, 8);
    for (const char* method : {"likelihood", "robust"}) {
      const Result result = analyse(species, table, by(method));
      ASSERT_EQ(result.status, Status::done) << tau0 << result.message;
      EXPECT_NEAR(result.temperature_k.value / 40.0, 1.0, kDouble) << tau0;
      EXPECT_NEAR(result.column_density_cm2.value / n, 1.0, 20.0 * kDouble) << tau0;
      EXPECT_LT(result.temperature_k.low95, result.temperature_k.low68);
      EXPECT_LT(result.temperature_k.low68, 40.0);
      EXPECT_GT(result.temperature_k.high95, result.temperature_k.high68);
      EXPECT_EQ(result.parameters.size(), 2U);
      for (std::size_t i = 0; i < 8; ++i) {
        EXPECT_NEAR(result.lines[i].optical_depth / depth(species, species.transitions[i], {40.0, n}), 1.0, 1e-4);
        EXPECT_NEAR(result.lines[i].residual_sigma, 0.0, 1e-3);
        // The corrected points lie on the line of the model.
        const double line = result.diagram_line.intercept +
                            result.diagram_line.slope_per_k * result.lines[i].upper_energy_k;
        EXPECT_NEAR(result.lines[i].ln_nu_gu, line, 1e-4);
      }
    }
  }
}

TEST(LikelihoodMethod, SaysThatWidthsOfTheTableAreThoseOfThinLines) {
  const Species species = rotor();
  const auto warned = Contains(HasSubstr("'fwhm' is the width that a line would have were it thin"));
  const auto warnings = [&](double tau0, const RunOptions& options, bool with_widths) {
    IntensityTable table = table_of(species, {{40.0, column_for(species, tau0, 40.0, 8)}}, 8);
    for (auto& row : table.rows) {
      if (!with_widths) row.fwhm_km_s.reset();
    }
    return analyse(species, table, options).warnings;
  };
  EXPECT_THAT(warnings(5.8, by("likelihood"), true), warned);
  EXPECT_THAT(warnings(0.3, by("likelihood"), true), ::testing::Not(warned));
  RunOptions stated = by("likelihood");
  stated.fwhm_km_s = kFwhmKmS;
  EXPECT_THAT(warnings(5.8, stated, false), ::testing::Not(warned));
}

TEST(LikelihoodMethod, AgreesWithTheStraightLineForBrightThinLines) {
  const Species species = rotor();
  IntensityTable table = table_of(species, {{40.0, 1e11}}, 8, 0.002);
  std::mt19937_64 engine(11);
  add_noise(table, engine);
  for (auto& row : table.rows) {
    row.calibration_error = 0.05;
    row.calibration_group = row.line_number < 6 ? "a" : "b";
  }
  RunOptions thin = by("likelihood");
  thin.opacity = "thin";
  const Result line = analyse(species, table, by("line"));
  const Result fit = analyse(species, table, thin);
  // The calibration enters one as a factor and the other as a covariance: alike to some c^2.
  EXPECT_NEAR(fit.temperature_k.value, line.temperature_k.value, 0.1 * line.temperature_k.error);
  EXPECT_NEAR(fit.temperature_k.error / line.temperature_k.error, 1.0, 0.02);
  EXPECT_NEAR(fit.log10_column_density_cm2.error / line.log10_column_density_cm2.error, 1.0, 0.02);
  EXPECT_NEAR(fit.chi2 / line.chi2, 1.0, 0.05);
  EXPECT_NEAR(fit.diagram_line.slope_variance / line.diagram_line.slope_variance, 1.0, 0.05);
  EXPECT_NEAR(fit.diagram_line.intercept_variance / line.diagram_line.intercept_variance, 1.0, 0.05);
  EXPECT_NEAR(fit.correlation_ln_n_t, line.correlation_ln_n_t, 0.02);
}

TEST(LikelihoodMethod, ABlendIsOneDatumWhoseSharesAreThoseOfTheModel) {
  Species species = rotor();
  species.transitions[4].frequency_hz = species.transitions[3].frequency_hz * (1.0 - 1.5 / 299792.458);  // 1.5 km/s
  const double n = column_for(species, 2.0, 40.0, 8);
  IntensityTable table = table_of(species, {{40.0, n}}, 8);
  table.rows[4].beam_fwhm_rad = table.rows[3].beam_fwhm_rad;
  const double whole = intensity(species, {3, 4}, {40.0, n}, 10.0);
  for (const std::size_t i : {3U, 4U}) {
    table.rows[i].intensity = whole;
    table.rows[i].intensity_sigma = 0.02 * whole;
    table.rows[i].blend = "a";
  }
  const Result result = analyse(species, table, by("likelihood"));
  ASSERT_EQ(result.status, Status::done) << result.message;
  EXPECT_NEAR(result.temperature_k.value / 40.0, 1.0, 1e-5);
  EXPECT_EQ(result.dof, 5);
  EXPECT_NEAR(result.lines[3].model_intensity_k_km_s / whole, 1.0, 1e-5);
  EXPECT_NE(result.lines[3].ln_nu_gu, result.lines[4].ln_nu_gu);
  table.rows[4].intensity *= 1.1;
  EXPECT_THAT(refusal(species, table, by("likelihood")), HasSubstr("rows of blend 'a' differ"));
  RunOptions options = by("likelihood");
  table.rows[4].intensity = whole;
  options.without_lines = {"5-4"};
  EXPECT_THAT(analyse(species, table, options).lines[3].why_unused, HasSubstr("its blend"));
}

TEST(LikelihoodMethod, LimitsAndNegativeIntensitiesAreData) {
  const Species species = rotor();
  IntensityTable table = table_of(species, {{20.0, 1e12}}, 8);
  const Result bare = analyse(species, table, by("likelihood"));
  table.rows[6].intensity = -0.3 * table.rows[6].intensity_sigma;
  table.rows[7].is_limit = true;
  table.rows[7].intensity *= 1.0 + 3.0 * 0.02;
  const Result result = analyse(species, table, by("likelihood"));
  ASSERT_EQ(result.status, Status::done);
  EXPECT_TRUE(result.lines[6].used);
  EXPECT_TRUE(result.lines[7].used);
  EXPECT_EQ(result.dof, 5);
  EXPECT_LT(result.temperature_k.value, bare.temperature_k.value);  // the negative line pulls
  table.rows[7].intensity_sigma = std::nan("");
  EXPECT_EQ(analyse(species, table, by("likelihood")).status, Status::done);  // a limit without error is 3 sigma
}

TEST(LikelihoodMethod, AFreeSizeIsHeldByBeamsAndNotWithoutThem) {
  const Species species = rotor();
  const double n = column_for(species, 1.0, 40.0, 8);
  IntensityTable table = table_of(species, {{40.0, n, 25.0}}, 8);
  RunOptions options = by("likelihood");
  options.source_size_free = true;
  const Result held = analyse(species, table, options);
  ASSERT_EQ(held.status, Status::done) << held.message;
  EXPECT_NEAR(held.source_size_arcsec, 25.0, 1e-3);
  EXPECT_NEAR(held.temperature_k.value, 40.0, 1e-3);
  EXPECT_LT(held.source_size_fit_arcsec.low95, 25.0);
  // Thin lines in one beam: N and size cannot be told apart, and no number looks as if they could.
  IntensityTable one_beam = table_of(species, {{40.0, 1e11}}, 8);
  for (auto& row : one_beam.rows) row.beam_fwhm_rad = 30.0 * kRadPerArcsec;
  const Result lost = analyse(species, one_beam, options);
  EXPECT_NE(lost.status, Status::done);
  EXPECT_TRUE(std::isnan(lost.column_density_cm2.value));
  EXPECT_FALSE(lost.message.empty());
  // A source that fills every beam: the size has a lower limit, and T and N stand.
  const IntensityTable wide = table_of(species, {{40.0, n}}, 8);
  const Result fills = analyse(species, wide, options);
  ASSERT_EQ(fills.status, Status::done) << fills.message;
  EXPECT_NEAR(fills.temperature_k.value, 40.0, 0.1);
  EXPECT_TRUE(std::isnan(fills.source_size_fit_arcsec.value));
  EXPECT_GT(fills.source_size_fit_arcsec.low95, 100.0);
  IntensityTable no_beam = wide;
  no_beam.rows[2].beam_fwhm_rad.reset();
  EXPECT_THAT(refusal(species, no_beam, options), HasSubstr("no beam"));
}

TEST(LikelihoodMethod, TwoComponentsAreFoundByRisingTemperature) {
  const Species species = rotor();
  const IntensityTable table = table_of(species, {{80.0, 2e11}, {12.0, 1e12}}, 12, 0.005);
  RunOptions options = by("likelihood");
  options.components = 2;
  const Result result = analyse(species, table, options);
  ASSERT_EQ(result.status, Status::done) << result.message;
  ASSERT_EQ(result.components.size(), 2U);
  EXPECT_NEAR(result.components[0].temperature_k.value, 12.0, 0.01);
  EXPECT_NEAR(result.components[1].temperature_k.value, 80.0, 0.05);
  EXPECT_NEAR(result.column_density_cm2.value / 1.2e12, 1.0, 1e-3);
  EXPECT_NEAR(result.temperature_k.value, 12.0, 0.01);
  EXPECT_EQ(result.diagram_curves.size(), 1U);
  EXPECT_TRUE(std::isnan(result.diagram_line.intercept));
  EXPECT_EQ(result.dof, 8);
  EXPECT_EQ(result.verdict, "two temperatures describe the lines");
}

TEST(LikelihoodMethod, SpinIsomersApartEachHaveTheirN) {
  const Species species = rotor(true);
  IntensityTable table = table_of(species, {{40.0, 1e12}}, 8);
  for (std::size_t i = 0; i < 8; ++i) {
    if (species.levels[species.transitions[i].upper].spin == "ortho") {
      table.rows[i].intensity *= 2.0;
      table.rows[i].intensity_sigma *= 2.0;
    }
  }
  RunOptions options = by("likelihood");
  options.opacity = "thin";
  options.isomers_apart = true;
  const Result apart = analyse(species, table, options);
  ASSERT_EQ(apart.status, Status::done) << apart.message;
  ASSERT_EQ(apart.components.size(), 2U);
  EXPECT_EQ(apart.components[0].name, "ortho");
  EXPECT_NEAR(apart.temperature_k.value, 40.0, 0.02);  // thin where the sum has some 0.1 % of opacity
  double ortho = 0.0;
  double all = 0.0;
  for (const Level& level : species.levels) {
    const double term = level.degeneracy * std::exp(-level.energy_k / 40.0);
    all += term;
    ortho += level.spin == "ortho" ? term : 0.0;
  }
  const double share = ortho / all;
  EXPECT_NEAR(apart.components[0].column_density_cm2.value / (2e12 * share), 1.0, 2e-3);
  EXPECT_NEAR(apart.components[1].column_density_cm2.value / (1e12 * (1.0 - share)), 1.0, 2e-3);
  EXPECT_THAT(refusal(rotor(), table_of(rotor(), {{40.0, 1e12}}, 4), options), HasSubstr("no spin isomers"));
  // Together they do not fit, and the check says so: the N differ and not the T.
  const Result together = analyse(species, table, by("likelihood"));
  EXPECT_EQ(check_named(together, "temperature by spin isomer").outcome, Outcome::fail);
  EXPECT_EQ(together.subset_temperatures.size() >= 2, true);
  EXPECT_THAT(check_named(together, "temperature by spin isomer").meaning,
              HasSubstr("ortho and para differ in N, not in T: try --isomers apart"));
}

TEST(LikelihoodMethod, RobustForgivesOneOutlierAndTheChecksNameIt) {
  const Species species = rotor();
  IntensityTable table = table_of(species, {{40.0, 1e12}}, 9);
  table.rows[8].intensity *= 1.8;  // 40 sigma
  const Result plain = analyse(species, table, by("likelihood"));
  const Result robust = analyse(species, table, by("robust"));
  EXPECT_GT(std::abs(plain.temperature_k.value - 40.0), 3.0);
  EXPECT_LT(std::abs(robust.temperature_k.value - 40.0), 0.5);
  EXPECT_TRUE(std::isnan(robust.chi2));
  EXPECT_EQ(check_named(robust, "outlying lines").outcome, Outcome::fail);
  EXPECT_THAT(check_named(robust, "outlying lines").meaning, HasSubstr("9-8"));
}

TEST(LikelihoodMethod, WhatIsGivenIsNotFitted) {
  const Species species = rotor();
  const double n = column_for(species, 2.0, 40.0, 6);
  const IntensityTable table = table_of(species, {{40.0, n}}, 6);
  RunOptions options = by("likelihood");
  options.temperature_k = 40.0;
  const Result fixed_t = analyse(species, table, options);
  EXPECT_NEAR(fixed_t.column_density_cm2.value / n, 1.0, 1e-5);
  EXPECT_TRUE(std::isnan(fixed_t.temperature_k.error));
  EXPECT_EQ(fixed_t.dof, 5);
  options = by("likelihood");
  options.column_density_per_cm2 = n;
  const Result fixed_n = analyse(species, table, options);
  EXPECT_NEAR(fixed_n.temperature_k.value, 40.0, 1e-3);
  EXPECT_EQ(fixed_n.dof, 5);
  options = by("likelihood");
  options.background_free = true;
  const Result background = analyse(species, table_of(species, {{40.0, n, 0.0, 8.0}}, 6, 0.002), options);
  ASSERT_EQ(background.status, Status::done) << background.message;
  EXPECT_NEAR(background.background_k, 8.0, 0.05);
  options = by("likelihood");
  options.temperature_prior_k = PriorKnowledge{30.0, 0.03};
  EXPECT_NEAR(analyse(species, table, options).temperature_k.value, 30.0, 0.3);
}

TEST(LikelihoodMethod, OneLineGivesNAtEachTemperatureAndAtTheTrueOneTheTrueN) {
  const Species species = rotor();
  const double n = column_for(species, 5.0, 40.0, 1);
  const IntensityTable table = table_of(species, {{40.0, n}}, 1);
  const Result listed = analyse(species, table, by("likelihood"));
  EXPECT_EQ(listed.status, Status::one_line);
  EXPECT_TRUE(std::isnan(listed.temperature_k.value));
  ASSERT_GT(listed.columns_at_temperatures.size(), 4U);
  for (const auto& row : listed.columns_at_temperatures) {
    if (row.temperature_k == 40.0) {
      EXPECT_NEAR(row.column_density_cm2 / n, 1.0, 1e-5);
    }
  }
  RunOptions options = by("likelihood");
  options.temperature_k = 40.0;
  EXPECT_NEAR(analyse(species, table, options).column_density_cm2.value / n, 1.0, 1e-5);
}

// One limit L with error sigma: a line of L + 1.645 sigma is seen above it in 95 % of cases.
TEST(LikelihoodMethod, LimitsAloneGiveTheNThatWouldBeSeen) {
  const Species species = rotor();
  IntensityTable table = table_of(species, {{40.0, 1e11}}, 1);
  const double seen = table.rows[0].intensity;
  table.rows[0].is_limit = true;
  table.rows[0].intensity_sigma = seen / (3.0 + 1.6448536269514722);
  table.rows[0].intensity = 3.0 * table.rows[0].intensity_sigma;
  RunOptions options = by("likelihood");
  options.temperature_k = 40.0;
  const Result result = analyse(species, table, options);
  EXPECT_EQ(result.status, Status::only_limits);
  ASSERT_EQ(result.columns_at_temperatures.size(), 1U);
  EXPECT_TRUE(result.columns_at_temperatures[0].upper_limit);
  EXPECT_NEAR(result.columns_at_temperatures[0].column_density_cm2 / 1e11, 1.0, 1e-4);  // 4 digits of -ln 0.05
  options.temperature_k.reset();
  options.temperature_range_k = QuantityRange{20.0, 80.0};
  EXPECT_EQ(analyse(species, table, options).columns_at_temperatures.size(), 7U);
}

TEST(LikelihoodMethod, LinesOfNoSignificanceGiveALimitAndNoTemperature) {
  const Species species = rotor();
  IntensityTable table = table_of(species, {{40.0, 1e11}}, 6);
  std::mt19937_64 engine(3);
  std::normal_distribution<double> normal;
  for (auto& row : table.rows) {
    row.intensity_sigma = 0.1;
    row.intensity = 0.1 * normal(engine);
  }
  const Result result = analyse(species, table, by("likelihood"));
  EXPECT_EQ(result.status, Status::only_limits);
  EXPECT_TRUE(std::isnan(result.temperature_k.value));
  for (const auto& row : result.columns_at_temperatures) EXPECT_TRUE(row.upper_limit);
}

TEST(LikelihoodMethod, SaysThatOpacityIsNotSeenWithoutWidths) {
  const Species species = rotor();
  IntensityTable table = table_of(species, {{40.0, 1e12}}, 6);
  table.rows[3].fwhm_km_s.reset();
  EXPECT_THAT(analyse(species, table, by("likelihood")).warnings, Contains(HasSubstr("optically thin")));
  RunOptions options = by("likelihood");
  options.opacity = "curve-of-growth";
  EXPECT_THAT(refusal(species, table, options), HasSubstr("has no width"));
  EXPECT_THAT(refusal(species, table, by("opacity-line")), HasSubstr("has no width"));
  options.fwhm_km_s = kFwhmKmS;
  EXPECT_EQ(refusal(species, table, options), "accepted");
}

TEST(LikelihoodMethod, OptionsThatAMethodCannotHonourAreRefused) {
  const Species species = rotor();
  const IntensityTable table = table_of(species, {{40.0, 1e12}}, 6);
  for (const char* method : {"line", "opacity-line"}) {
    for (const auto& [key, value] : std::vector<std::pair<std::string, std::string>>{{"source_size", "free"},
                                                                                     {"background", "free"},
                                                                                     {"components", "2"},
                                                                                     {"isomers", "apart"},
                                                                                     {"column_density", "1e13 cm-2"}}) {
      RunOptions options = by(method);
      set_run_option(options, key, value);
      EXPECT_THAT(refusal(species, table, options), HasSubstr("cannot fit")) << method << key;
    }
  }
  RunOptions options = by("line");
  options.opacity = "curve-of-growth";
  EXPECT_THAT(refusal(species, table, options), HasSubstr("contradict"));
  options = by("opacity-line");
  options.opacity = "thin";
  EXPECT_THAT(refusal(species, table, options), HasSubstr("contradict"));
  options = by("likelihood");
  options.components = 2;
  options.temperature_k = 40.0;
  EXPECT_THAT(refusal(species, table, options), HasSubstr("two components"));
}

TEST(LikelihoodMethod, ThePosteriorOfBrightLinesIsTheProfile) {
  const Species species = rotor();
  const double n = column_for(species, 1.0, 40.0, 8);
  IntensityTable table = table_of(species, {{40.0, n}}, 8, 0.02);
  std::mt19937_64 engine(21);
  add_noise(table, engine);
  RunOptions options = by("likelihood");
  const Result profile = analyse(species, table, options);
  options.intervals = "posterior";
  const Result posterior = analyse(species, table, options);
  EXPECT_EQ(posterior.posterior.method, "quadrature");
  EXPECT_TRUE(posterior.posterior.draws.empty());
  EXPECT_EQ(posterior.temperature_k.value, profile.temperature_k.value);
  const double sigma = profile.temperature_k.error;
  EXPECT_NEAR(posterior.temperature_k.error, sigma, 0.05 * sigma);
  EXPECT_NEAR(posterior.temperature_k.low68, profile.temperature_k.low68, 0.1 * sigma);
  EXPECT_NEAR(posterior.temperature_k.high95, profile.temperature_k.high95, 0.1 * sigma);
  options.keep_samples = true;
  options.seed = 5;
  const Result drawn = analyse(species, table, options);
  ASSERT_EQ(drawn.posterior.draws.size(), 2U);
  EXPECT_EQ(drawn.posterior.seed, 5U);
  double mean = 0.0;
  for (const double ln_t : drawn.posterior.draws[1]) mean += ln_t / static_cast<double>(drawn.posterior.draws[1].size());
  EXPECT_NEAR(std::exp(mean), profile.temperature_k.value, 0.2 * sigma);
  EXPECT_EQ(analyse(species, table, options).posterior.draws, drawn.posterior.draws);
  options.intervals = "profile";
  EXPECT_THAT(refusal(species, table, options), HasSubstr("without a posterior"));
}

// A limit at an absurd height made the prediction ask for the opacity of more than 1e12 (December 2026).
TEST(OpacityLineMethod, PredictsLinesOfAnyOpacity) {
  const Species species = rotor();
  IntensityTable table = table_of(species, {{40.0, 1e13}}, 5);
  table.rows[4].is_limit = true;
  table.rows[4].fwhm_km_s = 1e-14;
  EXPECT_EQ(analyse(species, table, by("opacity-line")).status, Status::done);
  EXPECT_NO_THROW((void)analyse(species, table, by("likelihood")));
}

TEST(OpacityLineMethod, ReturnsTheTruthOrSaysThatThereIsNoSolution) {
  const Species species = rotor();
  for (const double tau0 : {0.1, 1.0, 3.0, 10.0}) {
    const double n = column_for(species, tau0, 40.0, 8);
    const Result result = analyse(species, table_of(species, {{40.0, n}}, 8), by("opacity-line"));
    if (result.status == Status::no_solution) {
      EXPECT_TRUE(std::isnan(result.temperature_k.value));
      continue;
    }
    ASSERT_EQ(result.status, Status::done) << tau0;
    EXPECT_NEAR(result.temperature_k.value, 40.0, 1e-3) << tau0;
    EXPECT_NEAR(result.column_density_cm2.value / n, 1.0, 1e-4) << tau0;
    EXPECT_NEAR(result.chi2, 0.0, 1e-4);
    for (const LineResult& line : result.lines) EXPECT_NEAR(line.residual_sigma, 0.0, 1e-2);
  }
}

// The hard case: CH3CN 12-11, K = 0 to 6, 70 K, noise-free; the likelihood returns T and N within 0.1 % at any
// opacity, the corrected line too or says that it found no solution.
TEST(MethylCyanideTable, ComesBackFromThinToOpaque) {
  const Species species = SpeciesLibrary(SpeciesLibrary::standard_folders()).find("CH3CN");
  for (const double tau0 : {0.1, 1.0, 3.0, 5.0, 10.0, 30.0}) {
    IntensityTable table;
    table.file = "lines.csv";
    double most = 0.0;
    std::vector<std::size_t> members;
    for (int k = 0; k <= 6; ++k) {
      members.push_back(transitions_labelled(species, fmt::format("12({0})-11({0})", k)).at(0));
      most = std::max(most, depth(species, species.transitions[members.back()], {70.0, 1e13}));
    }
    const double n = 1e13 * tau0 / most;
    for (const std::size_t member : members) {
      IntensityRow row;
      row.line_number = table.rows.size() + 2;
      row.transition = transition_label(species, species.transitions[member]);
      row.fwhm_km_s = kFwhmKmS;
      row.intensity = intensity(species, {member}, {70.0, n}, 10.0);
      row.intensity_sigma = 0.05 * row.intensity;
      table.rows.push_back(row);
    }
    const Result fit = analyse(species, table, by("likelihood"));
    ASSERT_EQ(fit.status, Status::done) << tau0 << fit.message;
    EXPECT_NEAR(fit.temperature_k.value, 70.0, 0.07) << tau0;
    EXPECT_NEAR(fit.column_density_cm2.value / n, 1.0, 1e-3) << tau0;
    const Result line = analyse(species, table, by("opacity-line"));
    if (line.status == Status::done) {
      EXPECT_NEAR(line.chi2, 0.0, 1e-3) << tau0;
      EXPECT_NEAR(line.temperature_k.value, 70.0, 0.07) << tau0;
    } else {
      EXPECT_EQ(line.status, Status::no_solution) << tau0;
      EXPECT_TRUE(std::isnan(line.temperature_k.value));
    }
  }
}

TEST(OpacityLineMethod, TheCorrectionAtLineCentreAsksForTooMuch) {
  const Species species = rotor();
  const double n = column_for(species, 2.0, 40.0, 8);
  RunOptions options = by("opacity-line");
  options.opacity = "line-centre";
  const Result result = analyse(species, table_of(species, {{40.0, n}}, 8), options);
  if (result.status == Status::done) {
    EXPECT_GT(result.column_density_cm2.value, 1.02 * n);
  }
}

TEST(ModelComparison, PrefersTheModelThatMadeTheLines) {
  const Species species = rotor();
  RunOptions options = by("likelihood");
  options.compare_models = true;
  const auto best_of = [&](const IntensityTable& table) {
    const Result result = analyse(species, table, options);
    EXPECT_FALSE(result.model_choice.empty());
    for (const ModelEntry& model : result.models) {
      if (model.delta_aicc == 0.0) return model.name;
    }
    return std::string("none");
  };
  std::mt19937_64 engine(8);
  IntensityTable two = table_of(species, {{80.0, 2e11}, {12.0, 1e12}}, 12, 0.01);
  add_noise(two, engine);
  EXPECT_EQ(best_of(two), "two components");
  IntensityTable opaque = table_of(species, {{40.0, column_for(species, 3.0, 40.0, 12)}}, 12, 0.02);
  add_noise(opaque, engine);
  EXPECT_EQ(best_of(opaque), "one component, with opacity");
  IntensityTable compact = table_of(species, {{40.0, column_for(species, 0.3, 40.0, 12), 15.0}}, 12, 0.02);
  add_noise(compact, engine);
  EXPECT_EQ(best_of(compact), "source size free");
}

}  // namespace
}  // namespace trotline
