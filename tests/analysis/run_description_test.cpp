#include <trotline/analysis/run_description.hpp>

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <trotline/base/errors.hpp>

namespace trotline {
namespace {

using ::testing::HasSubstr;
using ::testing::StartsWith;

TEST(RunDescription, ReadsKeysAndTakesPathsFromItsOwnFolder) {
  const auto run = parse_run_description(
      "species: CO\ntable: lines.csv\nsource_size: 12 arcsec\nwithout: [7-6, 8-7]\nsource: Reed\n", "runs/reed.yaml");
  EXPECT_EQ(run.table, "runs/lines.csv");
  EXPECT_EQ(run.species, "CO");
  EXPECT_EQ(*run.options.source, "Reed");
  EXPECT_NEAR(*run.options.source_size_rad, 5.817764173314432e-05, 1e-18);  // 12 pi / 648000
  EXPECT_THAT(run.options.without_lines, ::testing::ElementsAre("7-6", "8-7"));
}

TEST(RunDescription, MayMeasureSpectraInPlaceOfATable) {
  const auto run = parse_run_description(
      "species: CO\nmeasure:\n  spectra: [a.fits, {file: b.fits, beam: 11 arcsec, resolution: 0.5 km/s}]\n"
      "  vlsr: -3 km/s\n  beam: 22 arcsec\n  only: [1-0, 2-1]\nleast_snr: 3\n",
      "runs/reed.yaml");
  ASSERT_TRUE(run.measure.has_value());
  const MeasureDescription& measure = *run.measure;
  EXPECT_EQ(measure.species, "CO");
  EXPECT_EQ(measure.vlsr_km_s, -3.0);
  EXPECT_THAT(measure.selection.only_lines, ::testing::ElementsAre("1-0", "2-1"));
  ASSERT_EQ(measure.inputs.size(), 2U);
  EXPECT_EQ(measure.inputs[0].path, "runs/a.fits");
  EXPECT_NEAR(*measure.inputs[0].beam_fwhm_rad, 22.0 / 206264.80625, 1e-12);
  EXPECT_NEAR(*measure.inputs[1].beam_fwhm_rad, 11.0 / 206264.80625, 1e-12);
  EXPECT_EQ(measure.inputs[1].resolution_km_s, 0.5);
}

std::string refusal(const std::string& text) {
  try {
    (void)parse_run_description(text, "run.yaml");
  } catch (const InputError& error) {
    return error.what();
  }
  return "accepted";
}

TEST(RunDescription, NamesLineAndColumnOfWhatIsWrong) {
  EXPECT_THAT(refusal("species: CO\ntable: a.csv\nsorce_size: 3 arcsec\n"),
              ::testing::AllOf(StartsWith("run.yaml:3:1"), HasSubstr("did you mean 'source_size'?")));
  EXPECT_THAT(refusal("species: CO\ntable: a.csv\nsource_size: 3\n"),
              ::testing::AllOf(StartsWith("run.yaml:3:1"), HasSubstr("has no unit")));
  EXPECT_THAT(refusal("species: CO\nspecies: CS\ntable: a.csv\n"),
              ::testing::AllOf(StartsWith("run.yaml:2:1"), HasSubstr("given twice")));
  EXPECT_THAT(refusal("species: CO\n"), HasSubstr("'table' is missing"));
  EXPECT_THAT(refusal("table: a.csv\n"), HasSubstr("'species' is missing"));
  EXPECT_THAT(refusal("species: {a: b}\ntable: x\n"), HasSubstr("no plain value"));
  EXPECT_THAT(refusal("species: CO\n  table: [\n"), HasSubstr("no valid YAML"));
  EXPECT_THAT(refusal("species: CO\ntable: a\nmeasure: {spectra: a.fits, vlsr: 3 km/s}\n"),
              HasSubstr("both 'table' and 'measure'"));
  EXPECT_THAT(refusal("species: CO\nmeasure: {spectra: a.fits}\n"), HasSubstr("'vlsr' is missing"));
  EXPECT_THAT(refusal("species: CO\nmeasure: {vlsr: 3 km/s}\n"), HasSubstr("names no spectra"));
  EXPECT_THAT(refusal("species: CO\nmeasure:\n  spectra: a.fits\n  vlsr: 3\n"),
              ::testing::AllOf(StartsWith("run.yaml:4:3"), HasSubstr("has no unit")));
  EXPECT_THAT(refusal("species: CO\nmeasure:\n  spectra: [{beam: 3 arcsec}]\n  vlsr: 3 km/s\n"),
              HasSubstr("names no file"));
  EXPECT_THAT(refusal("species: CO\nmeasure:\n  spectra: [{file: a, vlsr: 3 km/s}]\n  vlsr: 3 km/s\n"),
              HasSubstr("holds for all files"));
  EXPECT_THAT(refusal("- a\n- b\n"), HasSubstr("no run description"));
  EXPECT_THAT(refusal("? [a, b]\n: c\n"), HasSubstr("no plain text"));
}

}  // namespace
}  // namespace trotline
