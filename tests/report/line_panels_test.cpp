#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <filesystem>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/report/line_panels.hpp>
#include <trotline/report/measurement_report.hpp>

#include "observation/simulated_spectra.hpp"
#include "support/temporary_folder.hpp"

namespace trotline {
namespace {

using testing::HasSubstr;
using testing::Not;

/// An invented species with a strong line, and a neighbour whose name tries to leave its text.
SpeciesMeasurement measured(const std::string& neighbour = "ZZ \"2\\n`date`") {
  std::mt19937_64 random(11);
  simulation::Setup setup;
  setup.lines = {{0.0, 40.0, 1.5}};
  Spectrum spectrum = simulation::spectrum(setup, random);
  spectrum.name = "invented <pond> & \"reed\".fits";
  spectrum.object = "Invented pond";
  MeasurementOptions options;
  options.window_km_s = 5.0;
  options.keep_panels = true;
  SpeciesMeasurement result;
  result.spectra.push_back(measure_lines(spectrum,
                                         {{"1-0", simulation::kRestHz, "XY"},
                                          {"5", simulation::kRestHz + 6e5, neighbour, false, {}}},
                                         options));
  return result;
}

TEST(LinePanels, FilesOfAPageAreTheSameEachTime) {
  const testing_support::TemporaryFolder one;
  const testing_support::TemporaryFolder two;
  const auto names = write_line_panels(measured(), one.path());
  EXPECT_THAT(names, testing::UnorderedElementsAre("panels-data.tsv", "panels-text.tsv", "panels.gp",
                                                   "panels.svg", "panels.pdf", "panels.png"));
  (void)write_line_panels(measured(), two.path());
  for (const std::string& name : names) {
    EXPECT_EQ(read_file((one.path() / name).string()), read_file((two.path() / name).string())) << name;
  }
}

TEST(LinePanels, TextFromOutsideStaysOutOfTheScript) {
  const testing_support::TemporaryFolder folder;
  (void)write_line_panels(measured(), folder.path(), {.formats = {FigureFormat::svg}});
  const std::string script = read_file((folder.path() / "panels.gp").string());
  for (const char* text : {"date", "pond", "XY", "reed"}) EXPECT_THAT(script, Not(HasSubstr(text)));
  const std::string svg = read_file((folder.path() / "panels.svg").string());
  EXPECT_THAT(svg, HasSubstr("Invented pond"));
  EXPECT_THAT(svg, HasSubstr("ZZ \"2\\n`date`"));  // a digit behind a quote once became a part of its escape
  EXPECT_THAT(svg, HasSubstr("&lt;pond>"));
}

TEST(LinePanels, ManyLinesFillSeveralPages) {
  SpeciesMeasurement many = measured();
  many.spectra[0].lines.resize(kPanelsOnAPage + 1, many.spectra[0].lines[0]);
  EXPECT_EQ(count_line_panels(many), kPanelsOnAPage + 1);
  const testing_support::TemporaryFolder folder;
  const auto names = write_line_panels(many, folder.path(), {.formats = {FigureFormat::svg}});
  EXPECT_THAT(names, testing::IsSupersetOf({"panels.svg", "panels-2.svg", "panels-2.gp"}));
  EXPECT_THAT(read_file((folder.path() / "panels-2.svg").string()), HasSubstr("page 2 of 2"));
}

TEST(LinePanels, NothingMeasuredIsNothingDrawn) {
  const testing_support::TemporaryFolder folder;
  EXPECT_TRUE(write_line_panels({}, folder.path()).empty());
}

TEST(LinePanels, AMissingProgramIsSaid) {
  const testing_support::TemporaryFolder folder;
  LinePanelOptions options;
  options.program = "no-such-program";
  EXPECT_THROW((void)write_line_panels(measured(), folder.path(), options), SystemError);
}

TEST(MeasurementReport, TextKeepsToTheWidthAndNamesTheFlags) {
  const SpeciesMeasurement result = measured();
  for (const std::size_t width : {50U, 92U, 140U}) {
    std::istringstream text(measurement_text(result, {.width = width, .unicode = false}));
    for (std::string line; std::getline(text, line);) EXPECT_LE(line.size(), width) << line;
  }
  EXPECT_THAT(measurement_text(result, {.width = 140}), HasSubstr("neighbour"));
}

TEST(MeasurementReport, JsonKeepsEveryDigit) {
  const SpeciesMeasurement result = measured();
  const std::string json = measurement_json(result);
  const LineMeasurement& line = result.spectra[0].lines[0];
  EXPECT_THAT(json, HasSubstr(fmt::format("\"intensity\": {}", line.intensity)));
  EXPECT_THAT(json, HasSubstr("\"flags\": [\n            \"neighbour\""));
}

}  // namespace
}  // namespace trotline
