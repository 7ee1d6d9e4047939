#include <nlohmann/json.hpp>

#include <trotline/base/files.hpp>

#include "program_fixture.hpp"

namespace trotline {
namespace {

using ::testing::HasSubstr;
using ::testing::IsSupersetOf;

class Fit : public ProgramTest {};

TEST_F(Fit, WritesResultLinesReportAndDiagram) {
  const std::string out = (folder_.path() / "out").string();
  const Outcome outcome = run({"fit", table(), "--species", "co", "--out", out});
  ASSERT_EQ(outcome.code, ExitCode::done) << outcome.err;
  EXPECT_THAT(names_in("out"), IsSupersetOf({"result.json", "lines.ecsv", "report.txt", "diagram.svg",
                                             "diagram.pdf", "diagram.png", "diagram.gp"}));
  for (const std::string& name : names_in("out")) EXPECT_NE(name.front(), '.') << name;
}

TEST_F(Fit, PutsOneJsonDocumentAndNothingElseOnStandardOutput) {
  const Outcome outcome = run({"fit", table(), "--species", "CO", "--json"});
  ASSERT_EQ(outcome.code, ExitCode::done) << outcome.err;
  const auto document = nlohmann::json::parse(outcome.out);
  EXPECT_EQ(document.at("species"), "CO");
  EXPECT_EQ(document.at("lines").size(), 3U);
  EXPECT_GT(document.at("temperature_k").at("value").get<double>(), 5.0);
  EXPECT_EQ(document.at("converged"), true);
}

TEST_F(Fit, TellsTheSameNumbersTwice) {
  const auto once = run({"fit", table(), "--species", "CO", "--json"});
  EXPECT_EQ(once.out, run({"fit", table(), "--species", "CO", "--json"}).out);
}

TEST_F(Fit, OneLineGivesNoTemperatureButNAtATemperature) {
  const std::string one =
      folder_.file("one.csv", "transition,intensity [K km/s],intensity_error [K km/s]\n1-0,4.21,0.08\n");
  const Outcome without = run({"fit", one, "--species", "CO"});
  EXPECT_EQ(without.code, ExitCode::no_answer);
  EXPECT_THAT(without.out, HasSubstr("one upper energy"));
  const Outcome with = run({"fit", one, "--species", "CO", "--temperature", "20 K", "--json"});
  ASSERT_EQ(with.code, ExitCode::done) << with.err;
  EXPECT_TRUE(nlohmann::json::parse(with.out).at("temperature_k").at("error").is_null());
}

TEST_F(Fit, RisingPopulationsAndLimitsAloneAreNoAnswer) {
  const std::string rising = folder_.file("rising.csv",
                                          "transition,intensity [K km/s],intensity_error [K km/s]\n"
                                          "1-0,1,0.08\n2-1,16,0.25\n3-2,80,0.41\n4-3,300,3\n");
  EXPECT_EQ(run({"fit", rising, "--species", "CO"}).code, ExitCode::no_answer);
  const std::string limits = folder_.file("limits.csv",
                                          "transition,intensity [K km/s],intensity_error [K km/s],limit\n"
                                          "1-0,0.3,0.1,true\n2-1,0.4,0.12,true\n");
  EXPECT_EQ(run({"fit", limits, "--species", "CO"}).code, ExitCode::no_answer);
}

TEST_F(Fit, OptionsOnTheCommandLineWinOverTheDescription) {
  (void)table();
  const std::string description =
      folder_.file("run.yaml", "species: CO\ntable: lines.csv\nbackground: 0 K\n");
  const auto plain = nlohmann::json::parse(run({"fit", description, "--json"}).out);
  const auto other = nlohmann::json::parse(run({"fit", description, "--background", "3 K", "--json"}).out);
  EXPECT_EQ(plain.at("background_k"), 0.0);
  EXPECT_EQ(other.at("background_k"), 3.0);
  EXPECT_NE(plain.at("temperature_k"), other.at("temperature_k"));
}

/// Until 2026-12-01 a table called lines.ecsv was replaced by the result of the same name, and a spectrum by
/// its table.
TEST_F(ProgramTest, NoVerbWritesOverItsInput) {
  const std::string folder = folder_.path().string();
  const std::string lines = table("lines.ecsv");
  const std::string before = read_file(lines);
  const Outcome fitted = run({"fit", lines, "--species", "CO", "--out", folder, "--figures", "none"});
  EXPECT_EQ(fitted.code, ExitCode::bad_input);
  EXPECT_THAT(fitted.err, ::testing::HasSubstr("written over"));
  EXPECT_EQ(read_file(lines), before);
  const std::string spectrum = folder_.file("in.ecsv", "# rest_frequency: 115.2712018 GHz\n0 1\n1 2\n2 1\n");
  const Outcome measured =
      run({"measure", spectrum, "--species", "CO", "--vlsr", "0 km/s", "--out", spectrum});
  EXPECT_EQ(measured.code, ExitCode::bad_input) << measured.err;
  EXPECT_THAT(read_file(spectrum), ::testing::HasSubstr("rest_frequency"));
}

TEST_F(ProgramTest, JsonHoldsNoCharacterThatSteersATerminal) {
  const std::string file = folder_.file("steer.csv",
                                        "source,transition,intensity [K km/s],intensity_error [K km/s]\n"
                                        "a\xC2\x9B"
                                        "31mb\xE2\x80\xAE,1-0,4.21,0.08\na\xC2\x9B"
                                        "31mb\xE2\x80\xAE,2-1,6.93,0.15\n");
  const Outcome outcome = run({"fit", file, "--species", "CO", "--json"});
  EXPECT_EQ(outcome.code, ExitCode::done) << outcome.err;
  EXPECT_THAT(outcome.out, ::testing::Not(::testing::HasSubstr("\xC2\x9B")));
  EXPECT_THAT(outcome.out, ::testing::Not(::testing::HasSubstr("\xE2\x80\xAE")));
}

/// Until 2026-12-01 a transition that stood twice in a blend counted twice, and of two errors the first was
/// taken.
TEST_F(ProgramTest, RowsOfABlendAreOneMeasurement) {
  const std::string head = "transition,intensity [K km/s],intensity_error [K km/s],blend\n";
  const std::string twice =
      folder_.file("twice.csv", head + "1-0,4.21,0.08,a\n1-0,4.21,0.08,a\n2-1,6.93,0.15,\n3-2,4,0.2,\n");
  EXPECT_THAT(run({"fit", twice, "--species", "CO", "--method", "likelihood"}).err,
              ::testing::HasSubstr("stands twice"));
  const std::string unlike =
      folder_.file("unlike.csv", head + "1-0,4.21,0.08,a\n2-1,4.21,80,a\n3-2,4,0.2,\n4-3,2,0.1,\n");
  const Outcome outcome = run({"fit", unlike, "--species", "CO", "--method", "likelihood"});
  EXPECT_EQ(outcome.code, ExitCode::bad_input);
  EXPECT_THAT(outcome.err, ::testing::HasSubstr("differ in error"));
}

}  // namespace
}  // namespace trotline
