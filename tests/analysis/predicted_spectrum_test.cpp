#include <trotline/analysis/predicted_spectrum.hpp>

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <trotline/base/errors.hpp>
#include <trotline/excitation/thin_line.hpp>
#include <trotline/physics/constants.hpp>
#include <trotline/physics/planck.hpp>
#include <trotline/species/library.hpp>

#include "observation/simulated_spectra.hpp"

namespace trotline {
namespace {

constexpr double kLightKmS = constants::kLightMPerS * 1e-3;

PredictedSource carbon_monoxide(double column_cm2) {
  PredictedSource source;
  source.species = SpeciesLibrary(SpeciesLibrary::standard_folders()).find("CO");
  source.temperature_k = 30.0;
  source.column_density_cm2 = column_cm2;
  source.background_k = 2.7255;
  return source;
}

Eigen::ArrayXd frequencies(double rest_hz, double step_km_s, int half) {
  Eigen::ArrayXd frequency(2 * half + 1);
  for (int i = -half; i <= half; ++i) frequency(i + half) = rest_hz * (1.0 - (3.0 + i * step_km_s) / kLightKmS);
  return frequency;
}

TEST(PredictedSpectrum, AThinLineHasTheIntensityOfItsUpperColumn) {
  const PredictedSource source = carbon_monoxide(1e10);
  const Transition& line = source.species.transitions.front();
  const Level& upper = source.species.levels[line.upper];
  const auto brightness =
      predicted_brightness_k({source}, {3.0, 2.0}, 0.0, frequencies(line.frequency_hz, 0.01, 1000));
  const double upper_column = 1e10 / source.species.partition->at(30.0).q * upper.degeneracy *
                              std::exp(-upper.energy_k / 30.0);
  const double expected =
      upper_column *
      intensity_per_upper_column_k_km_s_cm2(
          {line.frequency_hz, upper.energy_k, upper.degeneracy, line.einstein_a_per_s}) *
      background_contrast(line.frequency_hz, 30.0, 2.7255);
  // The optical depth, 1e-6, is what is neglected.
  EXPECT_NEAR(brightness.sum() * 0.01 / expected, 1.0, 5e-6);
}

TEST(PredictedSpectrum, AThickLineReachesTheTemperatureOfTheGasAndNoMore) {
  const PredictedSource source = carbon_monoxide(1e20);
  const double rest_hz = source.species.transitions.front().frequency_hz;
  const auto brightness = predicted_brightness_k({source}, {3.0, 2.0}, 0.0, frequencies(rest_hz, 0.1, 50));
  const double limit =
      planck_equivalent_temperature_k(rest_hz, 30.0) - planck_equivalent_temperature_k(rest_hz, 2.7255);
  EXPECT_NEAR(brightness(50), limit, 1e-12);
  EXPECT_LE(brightness.maxCoeff(), limit * (1.0 + 1e-12));
}

TEST(PredictedSpectrum, OpacityOfTwoSpeciesAddsUp) {
  // Twice the same gas shades itself as one with twice the column density does.
  const PredictedSource half = carbon_monoxide(5e16);
  const auto frequency = frequencies(half.species.transitions[1].frequency_hz, 0.1, 40);
  const Eigen::ArrayXd two = predicted_brightness_k({half, half}, {3.0, 2.0}, 0.0, frequency);
  const Eigen::ArrayXd one = predicted_brightness_k({carbon_monoxide(1e17)}, {3.0, 2.0}, 0.0, frequency);
  EXPECT_LT((two - one).abs().maxCoeff(), 1e-12 * one.maxCoeff());
}

TEST(PredictedSpectrum, ASmallSourceFillsItsBeamInPart) {
  PredictedSource source = carbon_monoxide(1e16);
  const auto frequency = frequencies(source.species.transitions[0].frequency_hz, 0.1, 5);
  const Eigen::ArrayXd full = predicted_brightness_k({source}, {3.0, 2.0}, 1e-4, frequency);
  source.source_size_rad = 1e-4;
  const Eigen::ArrayXd small = predicted_brightness_k({source}, {3.0, 2.0}, 1e-4, frequency);
  EXPECT_NEAR(small(5) / full(5), 0.5, 1e-12);  // theta_s^2 / (theta_s^2 + theta_b^2)
}

TEST(PredictedSpectrum, GoesIntoPanelsInTheScaleOfTheSpectrum) {
  std::mt19937_64 random(4);
  simulation::Setup setup;
  setup.lines = {{0.0, 40.0, 1.0}};
  Spectrum spectrum = simulation::spectrum(setup, random);
  spectrum.scale = IntensityScale::antenna;
  Species species = carbon_monoxide(1.0).species;
  for (Transition& transition : species.transitions) transition.frequency_hz *= simulation::kRestHz / 115.2712018e9;
  PredictedSource source = carbon_monoxide(1e16);
  source.species = species;
  MeasurementOptions options;
  options.window_km_s = 4.0;
  options.keep_panels = true;
  SpeciesMeasurement measured = measure_species({spectrum}, species, {}, options);
  const PredictedProfile profile = profile_of(measured, {});
  EXPECT_NEAR(profile.fwhm_km_s, 1.0, 0.1);
  EXPECT_THROW(add_predictions({source}, profile, measured), InputError);
  measured.spectra[0].forward_efficiency = 1.0;
  measured.spectra[0].main_beam_efficiency = 0.5;
  add_predictions({source}, profile, measured);
  const LinePanel& panel = *measured.spectra[0].lines[0].panel;
  Eigen::Index at = 0;
  (panel.velocity_km_s - profile.velocity_km_s).abs().minCoeff(&at);
  const double rest_hz = measured.spectra[0].lines[0].rest_frequency_hz;
  const Eigen::ArrayXd frequency =
      Eigen::ArrayXd::Constant(1, rest_hz * (1.0 - panel.velocity_km_s(at) / kLightKmS));
  EXPECT_NEAR(panel.prediction(at) - panel.baseline(at),
              0.5 * predicted_brightness_k({source}, profile, 0.0, frequency)(0), 1e-6);
}

TEST(PredictedSpectrum, RefusesWhatMakesNoSense) {
  PredictedSource source = carbon_monoxide(1e14);
  const Eigen::ArrayXd frequency = Eigen::ArrayXd::Constant(1, 115e9);
  EXPECT_THROW((void)predicted_brightness_k({source}, {0.0, 0.0}, 0.0, frequency), DomainError);
  source.column_density_cm2 = -1.0;
  EXPECT_THROW((void)predicted_brightness_k({source}, {0.0, 1.0}, 0.0, frequency), DomainError);
}

}  // namespace
}  // namespace trotline
