#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <trotline/analysis/measurement.hpp>
#include <trotline/base/errors.hpp>

#include "observation/simulated_spectra.hpp"

namespace trotline {
namespace {

/// An invented species: three levels above the ground, one strong, one weak and one hot line.
Species invented() {
  Species species;
  species.name = "XY";
  species.levels = {{"0", 0.0, 1.0, ""}, {"1", 5.0, 3.0, ""}, {"2", 15.0, 5.0, ""}, {"9", 2000.0, 9.0, ""}};
  species.transitions = {
      {1, 0, 100e9, 0.0, 1e-6}, {2, 1, 100.002e9, 0.0, 1e-6}, {3, 2, 100.004e9, 0.0, 1e-6}};
  return species;
}

TEST(RequestsFor, LeavesOutWhatIsTooWeakAtTheTemperature) {
  const std::vector<QuantityRange> band = {{99e9, 101e9}};
  LineSelection selection;
  const auto cold = requests_for(invented(), band, selection);
  ASSERT_EQ(cold.size(), 2U);
  EXPECT_EQ(cold[0].label, "1-0");
  EXPECT_EQ(cold[0].tag, "XY");
  selection.excitation_k = 1000.0;
  EXPECT_EQ(requests_for(invented(), band, selection).size(), 3U);
  EXPECT_TRUE(requests_for(invented(), {{200e9, 300e9}}, selection).empty());
}

TEST(RequestsFor, NamedLinesAreNeverTooWeak) {
  LineSelection selection;
  selection.only_lines = {"9-2"};
  const auto requests = requests_for(invented(), {{99e9, 101e9}}, selection);
  ASSERT_EQ(requests.size(), 1U);
  EXPECT_EQ(requests[0].label, "9-2");
  selection.only_lines = {"7-6"};
  EXPECT_THROW((void)requests_for(invented(), {{99e9, 101e9}}, selection), InputError);
}

TEST(MeasureSpecies, GivesTheTableOfEveryCoveredLine) {
  std::mt19937_64 random(1);
  simulation::Setup setup;
  const double second_km_s =
      -simulation::kLightKmS * 0.002 / 100.0;  // 2 MHz up in the scale of the first line
  setup.lines = {{1.0, 40.0, 1.0}, {1.0 + second_km_s, 20.0, 1.0}};
  const Spectrum spectrum = simulation::spectrum(setup, random);
  MeasurementOptions options;
  options.vlsr_km_s = 1.0;
  options.window_km_s = 3.5;
  const auto measured = measure_species({spectrum}, invented(), {}, options);
  ASSERT_EQ(measured.table.rows.size(), 2U);
  EXPECT_EQ(measured.table.rows[0].transition, "1-0");
  EXPECT_EQ(measured.table.rows[0].species, "XY");
  EXPECT_NEAR(measured.table.rows[0].intensity, 40.0, 5.0 * measured.table.rows[0].intensity_sigma);
  EXPECT_NEAR(measured.table.rows[1].intensity, 20.0, 5.0 * measured.table.rows[1].intensity_sigma);
}

TEST(MeasureSpecies, CountsTheLinesThatStrengthLeavesOut) {
  std::mt19937_64 random(4);
  const Spectrum spectrum = simulation::spectrum({}, random);
  MeasurementOptions options;
  options.window_km_s = 3.5;
  const auto left_out = testing::AllOf(testing::HasSubstr("1 weaker line of XY"), testing::HasSubstr("9-2"),
                                       testing::HasSubstr("--least-strength or --excitation"));
  LineSelection selection;
  EXPECT_THAT(measure_species({spectrum}, invented(), selection, options).warnings,
              testing::Contains(left_out));
  selection.least_strength = 0.0;
  EXPECT_THAT(measure_species({spectrum}, invented(), selection, options).warnings,
              testing::Not(testing::Contains(testing::HasSubstr("weaker"))));
}

TEST(MeasureSpecies, MarksOtherSpeciesAndTheImageSideband) {
  std::mt19937_64 random(2);
  simulation::Setup setup;
  setup.lines = {{0.0, 40.0, 1.0}};
  const Spectrum spectrum = simulation::spectrum(setup, random);
  Species other = invented();
  other.name = "ZZ";
  other.transitions = {{1, 0, 100.0003e9, 0.0, 1e-6}, {2, 1, 110.0004e9, 0.0, 1e-6}};
  Confusion confusion;
  confusion.species = {other};
  confusion.local_oscillator_hz = 105e9;  // 110.0004 GHz appears at 2 x 105 - 110.0004 = 99.9996 GHz
  MeasurementOptions options;
  options.window_km_s = 5.0;
  const auto measured = measure_species({spectrum}, invented(), {}, options, confusion);
  const LineMeasurement& line = measured.spectra.at(0).lines.at(0);
  EXPECT_TRUE(line.has(LineFlag::neighbour));
  EXPECT_THAT(line.neighbours, testing::UnorderedElementsAre(testing::HasSubstr("ZZ 1-0 at"),
                                                             testing::HasSubstr("2-1 (image sideband) at")));
}

TEST(MeasureSpecies, SaysWhenNothingIsCovered) {
  std::mt19937_64 random(3);
  Species species = invented();
  for (Transition& transition : species.transitions) transition.frequency_hz *= 3.0;
  MeasurementOptions options;
  options.window_km_s = 5.0;
  const auto measured = measure_species({simulation::spectrum({}, random)}, species, {}, options);
  EXPECT_TRUE(measured.table.rows.empty());
  EXPECT_THAT(measured.warnings,
              testing::Contains(
                  testing::AllOf(testing::HasSubstr("no line of XY lies in the spectra"),
                                 testing::HasSubstr("99.9829 to 100.017 GHz"))));  // 102.4 km/s about 100 GHz
}

}  // namespace
}  // namespace trotline
