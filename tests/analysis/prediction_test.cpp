#include <trotline/analysis/prediction.hpp>

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>
#include <numbers>

#include <trotline/base/errors.hpp>
#include <trotline/excitation/curve_of_growth.hpp>

namespace trotline {
namespace {

using ::testing::HasSubstr;
using ::testing::ThrowsMessage;

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
    species.transitions.push_back({j, j - 1, 40e9 * j, 0.0, 1.2e-7 * j * j * j * j / (2.0 * j + 1.0)});
  }
  species.partition = partition_function_from_levels(species.levels);
  return species;
}

PredictionOptions options_of(const std::vector<std::pair<std::string, std::string>>& settings) {
  PredictionOptions options;
  const std::vector<std::pair<std::string, std::string>> source = {
      {"temperature", "30 K"}, {"column_density", "1e13 cm-2"}, {"line_width", "2 km/s"}};
  for (const auto& list : {source, settings}) {
    for (const auto& [key, value] : list) {
      for (const PredictionOption& option : prediction_option_table()) {
        if (option.key == key) option.set(options, value);
      }
    }
  }
  return options;
}

/// W of J = 3-2 written out from PHYSICS as in tests of the forward model: curve of growth, filling, background.
double intensity_of_three_two(double filling) {
  const Species species = rotor();
  const Transition& t = species.transitions[2];
  const Level& upper = species.levels[3];
  const LineConstants line{t.frequency_hz, upper.energy_k, upper.degeneracy, t.einstein_a_per_s};
  const double column = 1e13 / species.partition->at(30.0).q * upper.degeneracy * std::exp(-upper.energy_k / 30.0);
  const double tau = central_optical_depth(line, column, 30.0, 2.0);
  return filling * column * intensity_per_upper_column_k_km_s_cm2(line) *
         background_contrast(t.frequency_hz, 30.0, 2.7255) / curve_of_growth_correction(tau).factor;
}

TEST(Prediction, IntensitiesAreThoseOfTheTextbook) {
  const Prediction full = predict(rotor(), options_of({}));
  ASSERT_GE(full.lines.size(), 10U);
  EXPECT_EQ(full.lines[2].transition, "3-2");
  EXPECT_NEAR(full.lines[2].intensity_k_km_s / intensity_of_three_two(1.0), 1.0, 1e-9);
  // 20 m at 120 GHz: 1.2 c / (120 GHz 20 m) = 30.92 arcsec.
  const Prediction diluted = predict(rotor(), options_of({{"source_size", "10 arcsec"}, {"dish", "20 m"}}));
  const double beam = 1.2 * 299792458.0 / 120e9 / 20.0 / kRadPerArcsec;
  EXPECT_NEAR(diluted.lines[2].beam_fwhm_arcsec, beam, 1e-9);
  const double filling = 100.0 / (100.0 + beam * beam);
  EXPECT_NEAR(diluted.lines[2].filling, filling, 1e-12);
  EXPECT_NEAR(diluted.lines[2].intensity_k_km_s / intensity_of_three_two(filling), 1.0, 1e-9);
}

TEST(Prediction, NoiseFollowsTheRadiometerEquation) {
  // f T_sys / sqrt(channel time) with T_sys = 100 K, 1 MHz, 100 s and f = 1: 10 mK.
  const Prediction timed = predict(rotor(), options_of({{"time", "100 s"},
                                                        {"system_temperature", "100 K"},
                                                        {"channel", "1 MHz"},
                                                        {"noise_factor", "1"},
                                                        {"least_snr", "0"}}));
  EXPECT_NEAR(timed.lines[0].rms_k, 0.010, 1e-12);
  // At 40 GHz 1 MHz is 7.4948 km/s; the sum over 4 km/s has an error of rms sqrt(7.4948 * 4).
  EXPECT_NEAR(timed.lines[0].intensity_error_k_km_s, 0.010 * std::sqrt(7.49481145 * 4.0), 1e-8);
  const Prediction back = predict(rotor(), options_of({{"rms", "10 mK"},
                                                       {"bands", "30 GHz..50 GHz at 100 K"},
                                                       {"channel", "1 MHz"},
                                                       {"noise_factor", "1"},
                                                       {"least_snr", "0"}}));
  ASSERT_EQ(back.lines.size(), 1U);
  EXPECT_NEAR(back.lines[0].time_s, 100.0, 1e-9);
}

TEST(Prediction, ChoosesLinesThatBeatTheBrightest) {
  const Prediction plan =
      predict(rotor(), options_of({{"rms", "10 mK"}, {"channel", "0.5 km/s"}, {"choose", "3"}}));
  ASSERT_GE(plan.sizes.size(), 2U);
  for (const ChoiceSize& size : plan.sizes) {
    EXPECT_LE(size.best.temperature_error_k, size.brightest.temperature_error_k * (1.0 + 1e-12));
    EXPECT_GE(size.best.temperature_error_k, plan.all_lines.temperature_error_k * (1.0 - 1e-12));
  }
  EXPECT_LT(plan.sizes[1].best.temperature_error_k, 0.8 * plan.sizes[1].brightest.temperature_error_k);
  const auto chosen = std::count_if(plan.lines.begin(), plan.lines.end(), [](const auto& l) { return l.chosen; });
  EXPECT_EQ(chosen, 3);
}

TEST(Prediction, LinesNearerThanTheirWidthAreOneMeasurement) {
  Species species = rotor();
  Transition twin = species.transitions[2];
  twin.frequency_hz += 120e9 * 1.0 / 299792.458;  // 1 km/s away, at a width of 2 km/s
  twin.einstein_a_per_s *= 0.5;
  species.transitions.insert(species.transitions.begin() + 3, twin);
  const Prediction prediction = predict(species, options_of({}));
  ASSERT_GE(prediction.lines.size(), 4U);
  EXPECT_EQ(prediction.lines[2].blended_with, std::vector<std::string>{"3-2"});
  EXPECT_NEAR(prediction.lines[2].intensity_k_km_s / intensity_of_three_two(1.0), 1.5, 0.02);  // thin: tau adds up
  EXPECT_EQ(prediction.lines[3].transition, "4-3");
}

void expect_refusal(const std::vector<std::pair<std::string, std::string>>& settings, const char* text) {
  EXPECT_THAT([&] { (void)predict(rotor(), options_of(settings)); }, ThrowsMessage<InputError>(HasSubstr(text)));
}

TEST(Prediction, RefusesWhatDoesNotFitTogether) {
  EXPECT_THAT([&] { (void)predict(rotor(), {}); }, ThrowsMessage<InputError>(HasSubstr("no temperature is given")));
  expect_refusal({{"beam", "20 arcsec"}, {"dish", "30 m"}}, "a beam and a dish");
  expect_refusal({{"source_size", "8 arcsec"}}, "without a beam");
  expect_refusal({{"rms", "10 mK"}}, "without the width of a channel");
  expect_refusal({{"rms", "10 mK"}, {"time", "1 h"}, {"channel", "1 MHz"}}, "an rms and a time");
  expect_refusal({{"time", "1 h"}, {"channel", "1 MHz"}}, "without the system temperature");
  expect_refusal({{"choose", "3"}}, "without their noise");
  expect_refusal({{"rms", "10 K"}, {"channel", "1 MHz"}, {"choose", "3"}}, "3 lines are to be chosen");
  expect_refusal({{"bands", "1 GHz..2 GHz"}}, "no line in these bands");
  expect_refusal({{"temperature", "1e6 K"}}, "is not known");
}

}  // namespace
}  // namespace trotline
