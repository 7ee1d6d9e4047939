#include <fmt/format.h>
#include <nlohmann/json.hpp>

#include "../../src/cli/survey_progress.hpp"
#include "program_fixture.hpp"

namespace trotline {
namespace {

using ::testing::HasSubstr;

class Survey : public ProgramTest {
 protected:
  /// Three sources of CO (invented).
  std::string description(const std::string& outputs = "{tables: [csv], figures: no, page: no}") const {
    std::string rows = "source,species,transition,intensity [K km/s],intensity_error [K km/s]\n";
    for (int i = 0; i < 3; ++i) {
      rows += fmt::format("Buoy {0},CO,1-0,{1},0.08\nBuoy {0},CO,2-1,{2},0.25\nBuoy {0},CO,3-2,{3},0.41\n", i,
                          4.2 + i, 11.9 + i, 14.0 - i);
    }
    folder_.file("lines.csv", rows);
    return folder_.file("survey.yaml", "tables: lines.csv\nspecies: CO\noutputs: " + outputs + "\n");
  }
  [[nodiscard]] std::string out() const { return (folder_.path() / "out").string(); }
};

TEST_F(Survey, RunsAndSaysWhatItDidAndThenKeepsEverything) {
  const std::string survey = description();
  const Outcome first = run({"survey", survey, "--out", out()});
  EXPECT_EQ(first.code, ExitCode::done) << first.err;
  EXPECT_THAT(first.out, HasSubstr("3 jobs: done 3, weak 0, failed 0"));
  EXPECT_THAT(first.out, HasSubstr("3  new"));
  EXPECT_THAT(first.out, HasSubstr("wrote results.csv"));
  const Outcome second = run({"survey", survey, "--out", out(), "--jobs", "2"});
  EXPECT_THAT(second.out, HasSubstr("3  kept"));
  EXPECT_THAT(names_in("out"), ::testing::ElementsAre("ledger.lock", "ledger.sqlite", "results.csv"));
}

TEST_F(Survey, ADryRunTellsAndChangesNothing) {
  const std::string survey = description();
  const Outcome before = run({"survey", survey, "--out", out(), "--dry-run"});
  EXPECT_EQ(before.code, ExitCode::done) << before.err;
  EXPECT_THAT(before.out, HasSubstr("3 jobs from 1 table with 1 species; 3 to compute"));
  EXPECT_THAT(before.out, HasSubstr("This survey has not run before."));
  EXPECT_FALSE(std::filesystem::exists(out()));
  run({"survey", survey, "--out", out()});
  const Outcome after = run({"survey", survey, "--out", out(), "--dry-run", "--again", "*"});
  EXPECT_THAT(after.out, HasSubstr("3  asked for"));
  EXPECT_THAT(after.out, HasSubstr("computed 3 jobs in"));
}

TEST_F(Survey, JsonIsOneDocumentOfThePlanOrTheSummary) {
  const std::string survey = description();
  const auto plan = nlohmann::json::parse(run({"survey", survey, "--out", out(), "--dry-run", "--json"}).out);
  EXPECT_EQ(plan["to_compute"], 3);
  EXPECT_EQ(plan["last_run"], nullptr);
  const auto summary = nlohmann::json::parse(run({"survey", survey, "--out", out(), "--json"}).out);
  EXPECT_EQ(summary["done"], 3);
  EXPECT_EQ(summary["reasons"]["new"], 3);
}

TEST_F(Survey, ExportWritesFromTheLedgerAlone) {
  const std::string survey = description();
  EXPECT_EQ(run({"survey", survey, "--out", out(), "--export", "fits"}).code, ExitCode::bad_input);
  run({"survey", survey, "--out", out()});
  const Outcome exported = run({"survey", survey, "--out", out(), "--export", "fits, votable,result"});
  EXPECT_EQ(exported.code, ExitCode::done) << exported.err;
  EXPECT_THAT(names_in("out"), ::testing::IsSupersetOf({"results.fits", "results.vot", "sources"}));
  EXPECT_EQ(run({"survey", survey, "--out", out(), "--export", "fitz"}).code, ExitCode::wrong_command_line);
}

TEST_F(Survey, TellsEveryErrorOfADescriptionOnALineOfItsOwn) {
  const std::string survey =
      folder_.file("bad.yaml", "tabels: a.csv\nspecies: CO\ndefaults: {backgroud: 1 K}\n");
  const Outcome outcome = run({"survey", survey, "--out", out()});
  EXPECT_EQ(outcome.code, ExitCode::bad_input);
  EXPECT_EQ(std::count(outcome.err.begin(), outcome.err.end(), '\n'), 3);
  EXPECT_FALSE(std::filesystem::exists(out()));
}

TEST_F(Survey, WrongCommandLinesAreRefused) {
  const std::string survey = description();
  EXPECT_EQ(run({"survey"}).code, ExitCode::wrong_command_line);
  EXPECT_EQ(run({"survey", survey}).code, ExitCode::wrong_command_line);
  EXPECT_EQ(run({"survey", survey, "--out", out(), "--jobs", "0"}).code, ExitCode::wrong_command_line);
  EXPECT_EQ(run({"survey", survey, "--out", out(), "--jobs", "many"}).code, ExitCode::wrong_command_line);
}

TEST(SurveyProgressLine, TellsJobsRateTimeLeftAndCounts) {
  SurveyProgress progress;
  progress.finished = 250;
  progress.to_compute = 1000;
  progress.counts = {240, 7, 3};
  progress.seconds = 5.0;
  EXPECT_EQ(progress_line(progress, 100, false),
            "[=======.......................] 250/1000, 50/s, 15 s left; done 240, weak 7, failed 3");
  EXPECT_EQ(progress_line(progress, 40, false).size(), 40u);
}

}  // namespace
}  // namespace trotline
