// The verb measure, and what fit makes of its tables.
#include <fmt/format.h>

#include <nlohmann/json.hpp>

#include <trotline/analysis/measure_description.hpp>
#include <trotline/observation/intensity_table.hpp>

#include "program_fixture.hpp"

namespace trotline {
namespace {

using ::testing::AllOf;
using ::testing::HasSubstr;

/// Rest frequencies of CO: Winnewisser et al. 1997, J. Mol. Spectrosc. 184, 468.
constexpr double kOneZeroHz = 115271.2018e6;
constexpr double kTwoOneHz = 230538.0e6;
constexpr double kThreeTwoHz = 345795.9899e6;

class Measure : public ProgramTest {
 protected:
  /// A text spectrum of an invented source at V_LSR 5 km/s: a Gaussian line of FWHM 2 km/s on a slope, and
  /// noise of 20 mK that needs no library of random numbers.
  [[nodiscard]] std::string spectrum(const std::string& name, double rest_hz, double area) const {
    std::string text =
        fmt::format("# object: Invented Cloud 7\n# rest_frequency: {:.4f} MHz\nv_lsr [km/s],intensity [K]\n",
                    rest_hz * 1e-6);
    unsigned state = 12345;
    for (int i = 0; i < 600; ++i) {
      const double v = -55.0 + 0.2 * i;
      double noise = 0.0;
      for (int k = 0; k < 12; ++k) {
        state = state * 1664525U + 1013904223U;
        noise += static_cast<double>(state >> 8U) / 16777216.0 - 0.5;
      }
      const double line = area * 0.9394372787 / 2.0 * std::exp(-4.0 * std::log(2.0) * (v - 5.0) * (v - 5.0) / 4.0);
      text += fmt::format("{:.3f},{:.6f}\n", v, 0.1 + 0.001 * v + 0.02 * noise + line);
    }
    return folder_.file(name, text);
  }

  [[nodiscard]] std::vector<std::string> arguments(const std::vector<std::string>& more) const {
    std::vector<std::string> all = {"measure",
                                    spectrum("one.csv", kOneZeroHz, 4.2),
                                    spectrum("two.csv", kTwoOneHz, 8.9),
                                    spectrum("three.csv", kThreeTwoHz, 7.0),
                                    "--species",
                                    "CO",
                                    "--vlsr",
                                    "5 km/s"};
    all.insert(all.end(), more.begin(), more.end());
    return all;
  }

  [[nodiscard]] std::string path(const std::string& name) const { return (folder_.path() / name).string(); }
};

TEST_F(Measure, WritesATableThatFitReads) {
  for (const std::string name : {"lines.ecsv", "lines.fits"}) {
    const Outcome measured = run(arguments({"--out", path(name), "--beam", "22 arcsec, 11 arcsec, 7 arcsec"}));
    ASSERT_EQ(measured.code, ExitCode::done) << measured.err;
    EXPECT_THAT(measured.err, HasSubstr("wrote 3 lines"));
    const IntensityTable table = read_intensity_table(path(name));
    ASSERT_EQ(table.rows.size(), 3U);
    const std::vector<double> truth = {4.2, 8.9, 7.0};
    for (std::size_t i = 0; i < 3; ++i) {
      const IntensityRow& row = table.rows[i];
      EXPECT_NEAR(row.intensity, truth[i], 4.0 * row.intensity_sigma) << name;
      // The textbook error of 30 channels of 20 mK: 0.02 K sqrt(30) 0.2 km/s, and a few percent of baseline.
      EXPECT_NEAR(row.intensity_sigma, 0.022, 0.006) << name;
      EXPECT_EQ(row.source, "Invented Cloud 7");
      EXPECT_NEAR(row.fwhm_km_s.value_or(0.0), 2.0, 0.05);
    }
    EXPECT_NEAR(table.rows[1].beam_fwhm_rad.value_or(0.0), 11.0 / 206264.806, 1e-10);
    const Outcome fitted = run({"fit", path(name), "--species", "CO", "--json"});
    EXPECT_EQ(fitted.code, ExitCode::done) << fitted.err;
    EXPECT_TRUE(nlohmann::json::parse(fitted.out)["temperature_k"]["value"].is_number());
  }
}

TEST_F(Measure, ReportsEveryNumberAsJson) {
  const Outcome outcome = run(arguments({"--json", "--window", "7 km/s", "--neighbours", "13CO"}));
  ASSERT_EQ(outcome.code, ExitCode::done) << outcome.err;
  const auto json = nlohmann::json::parse(outcome.out);
  EXPECT_EQ(json["schema"], "trotline-measurement-1");
  ASSERT_EQ(json["spectra"].size(), 3U);
  const auto line = json["spectra"][0]["lines"][0];
  EXPECT_EQ(line["transition"], "1-0");
  EXPECT_EQ(line["status"], "measured");
  EXPECT_NEAR(line["gaussian"]["velocity_km_s"]["value"].get<double>(), 5.0, 0.05);
  EXPECT_NEAR(line["rms"].get<double>(), 0.02, 0.003);
  EXPECT_EQ(json["provenance"]["vlsr"], "5 km/s");
  EXPECT_EQ(json["provenance"]["window"], "7 km/s");
}

TEST_F(Measure, DoesNotDependOnTheNumberOfThreads) {
  EXPECT_EQ(run(arguments({"--json", "--jobs", "1"})).out, run(arguments({"--json", "--jobs", "4"})).out);
}

TEST_F(Measure, SummaryFitsTheTerminalAndNamesTheLines) {
  const Outcome outcome = run(arguments({}));
  EXPECT_THAT(outcome.out, AllOf(HasSubstr("Invented Cloud 7"), HasSubstr("115271.202"), HasSubstr("±")));
  std::istringstream text(outcome.out);
  for (std::string line; std::getline(text, line);) EXPECT_LE(line.size(), 2 * 92U) << line;
}

TEST_F(Measure, ARunDescriptionMeasuresAndFitsInOneGo) {
  (void)arguments({});
  const std::string file = folder_.file("run.yaml",
                                        "species: CO\n"
                                        "measure:\n"
                                        "  spectra: [one.csv, two.csv, {file: three.csv, beam: 7 arcsec}]\n"
                                        "  vlsr: 5 km/s\n"
                                        "  window: 7 km/s\n"
                                        "  beam: 20 arcsec\n"
                                        "upper_energy: 0 K..100 K\n");
  const Outcome outcome = run({"fit", file, "--out", path("result"), "--figures", "none"});
  ASSERT_EQ(outcome.code, ExitCode::done) << outcome.err;
  const IntensityTable table = read_intensity_table(path("result/measured.ecsv"));
  ASSERT_EQ(table.rows.size(), 3U);
  EXPECT_NEAR(table.rows[0].beam_fwhm_rad.value_or(0.0), 20.0 / 206264.806, 1e-10);
  EXPECT_NEAR(table.rows[2].beam_fwhm_rad.value_or(0.0), 7.0 / 206264.806, 1e-10);
  std::ifstream result(path("result/result.json"));
  const auto json = nlohmann::json::parse(result);
  EXPECT_EQ(json["provenance"]["options"]["measure.window"], "7 km/s");
}

TEST_F(Measure, DrawsPanelsWithAModelOverThem) {
  ASSERT_EQ(run(arguments({"--out", path("lines.ecsv")})).code, ExitCode::done);
  ASSERT_EQ(run({"fit", path("lines.ecsv"), "--species", "CO", "--out", path("result"), "--figures", "none"}).code,
            ExitCode::done);
  const Outcome outcome = run(arguments(
      {"--panels", path("view"), "--figures", "svg", "--model", path("result/result.json"), "--window", "7 km/s"}));
  ASSERT_EQ(outcome.code, ExitCode::done) << outcome.err;
  EXPECT_THAT(names_in("view"),
              ::testing::ElementsAre("panels-data.tsv", "panels-text.tsv", "panels.gp", "panels.svg"));
  EXPECT_THAT(run(arguments({"--model", path("result/result.json")})).err, HasSubstr("--panels"));
  EXPECT_THAT(run(arguments({"--panels", path("view"), "--model", path("lines.ecsv")})).err,
              AllOf(HasSubstr("lines.ecsv"), HasSubstr("result.json")));
}

TEST_F(Measure, MissingUnitsAndFramesNameTheirOptions) {
  const std::string rows = "1,0.1\n2,0.2\n3,0.1\n";
  const std::string no_frame = folder_.file("frame.csv", "# rest_frequency: 115.2712 GHz\nvelocity [km/s],intensity [K]\n" + rows);
  const std::string no_unit = folder_.file("unit.csv", "# rest_frequency: 115.2712 GHz\nv_lsr [km/s],intensity\n" + rows);
  EXPECT_THAT(run({"measure", no_frame, "--species", "CO", "--vlsr", "2 km/s"}).err, HasSubstr("--frame LSRK"));
  EXPECT_THAT(run({"measure", no_unit, "--species", "CO", "--vlsr", "2 km/s"}).err, HasSubstr("--unit K"));
}

struct WrongCall {
  std::vector<std::string> more;
  ExitCode code;
  std::vector<std::string> words;
};

TEST_F(Measure, WrongCallsSayWhatToDo) {
  const ExitCode usage = ExitCode::wrong_command_line;
  const std::vector<WrongCall> calls = {
      {{"--window", "7"}, usage, {"--window", "no unit", "km/s"}},
      {{"--window", "-1 km/s"}, usage, {"--window", "not above zero"}},
      {{"--beam", "22 arcsec, 11 arcsec"}, usage, {"--beam", "2 values are given for 3 files"}},
      {{"--frame", "moon"}, usage, {"--frame", "moon", "LSRK"}},
      {{"--scale", "Tsys"}, usage, {"--scale", "Tsys", "Tmb"}},
      {{"--baseline-order", "many"}, usage, {"--baseline-order", "many", "auto"}},
      {{"--line-windows", "1-0"}, usage, {"--line-windows", "1-0: -3..8 km/s"}},
      {{"--line-windows", "1-0: 8..-3 km/s"}, usage, {"--line-windows"}},
      {{"--only", "9-8x"}, ExitCode::bad_input, {"9-8x"}},
      {{"--out", "lines.txt"}, usage, {"--out", "lines.txt", ".ecsv"}},
      {{"--jobs", "0"}, usage, {"--jobs"}},
      {{"--noise", "1 Jy/beam"}, ExitCode::bad_input, {"one.csv", "K", "noise"}},
      {{"--windw", "7 km/s"}, usage, {"--windw", "did you mean '--window'"}},
  };
  for (const WrongCall& call : calls) {
    const Outcome outcome = run(arguments(call.more));
    EXPECT_EQ(static_cast<int>(outcome.code), static_cast<int>(call.code)) << call.more[0] << outcome.err;
    for (const std::string& word : call.words) EXPECT_THAT(outcome.err, HasSubstr(word)) << call.more[0];
  }
  EXPECT_THAT(run({"measure", "a.fits", "--species", "CO"}).err, HasSubstr("--vlsr"));
  EXPECT_THAT(run({"measure", "a.fits", "--vlsr", "5 km/s"}).err, HasSubstr("--species"));
  EXPECT_THAT(run({"measure"}).err, HasSubstr("SPECTRUM"));
}

TEST_F(Measure, SpectraWithoutTheLineAreNoAnswerAndNoTable) {
  const Outcome outcome = run({"measure", spectrum("one.csv", 100e9, 1.0), "--species", "CO", "--vlsr", "5 km/s",
                               "--out", path("lines.ecsv")});
  EXPECT_EQ(outcome.code, ExitCode::no_answer);
  EXPECT_THAT(outcome.out, HasSubstr("no line of CO lies in the spectra"));
  EXPECT_FALSE(std::filesystem::exists(path("lines.ecsv")));
}

}  // namespace
}  // namespace trotline
