#include <nlohmann/json.hpp>

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
  EXPECT_THAT(names_in("out"), IsSupersetOf({"result.json", "lines.ecsv", "report.txt", "diagram.svg", "diagram.pdf",
                                             "diagram.png", "diagram.gp"}));
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
  const std::string one = folder_.file("one.csv",
                                       "transition,intensity [K km/s],intensity_error [K km/s]\n1-0,4.21,0.08\n");
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
  const std::string description = folder_.file("run.yaml", "species: CO\ntable: lines.csv\nbackground: 0 K\n");
  const auto plain = nlohmann::json::parse(run({"fit", description, "--json"}).out);
  const auto other = nlohmann::json::parse(run({"fit", description, "--background", "3 K", "--json"}).out);
  EXPECT_EQ(plain.at("background_k"), 0.0);
  EXPECT_EQ(other.at("background_k"), 3.0);
  EXPECT_NE(plain.at("temperature_k"), other.at("temperature_k"));
}

}  // namespace
}  // namespace trotline
