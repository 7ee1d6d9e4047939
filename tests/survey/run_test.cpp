#include <fcntl.h>
#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <signal.h>
#include <sqlite3.h>
#include <sys/wait.h>
#include <unistd.h>

#include <cstdlib>
#include <set>

#include <trotline/survey/run.hpp>

#include "invented_survey.hpp"

namespace trotline {
namespace {

using namespace testing_survey;
using ::testing::ElementsAre;
using ::testing::HasSubstr;
using ::testing::IsEmpty;
using ::testing::Pair;
using testing_support::TemporaryFolder;
namespace fs = std::filesystem;

class SurveyRun : public ::testing::Test {
 protected:
  std::string description(const std::string& more = "") const {
    return folder.file("survey.yaml", "tables: lines.csv\nspecies: [RX]\n" + more);
  }
  [[nodiscard]] fs::path out() const { return folder.path() / "out"; }

  /// Why each job would be computed, with numbers.
  [[nodiscard]] std::vector<std::pair<std::string, std::int64_t>> reasons(const std::string& path) const {
    Ledger ledger = Ledger::open(out());
    return reasons_of(planned(path, &ledger));
  }

  TemporaryFolder folder;
};

TEST_F(SurveyRun, ComputesEveryJobOnceAndThenNothing) {
  folder.file("lines.csv", long_table(40));
  const std::string survey = description();
  const SurveyOutcome first = run(survey, out());
  EXPECT_EQ(first.progress.finished, 40);
  EXPECT_EQ(first.progress.counts.done, 40);
  const auto before = content(out());
  EXPECT_EQ(before.size(), 40u);
  EXPECT_THAT(before[7], HasSubstr("7|Reef 7|RX|done"));
  const SurveyOutcome second = run(survey, out());
  EXPECT_EQ(second.progress.finished, 0);
  EXPECT_EQ(content(out()), before);
}

TEST_F(SurveyRun, ResultsDoNotDependOnTheNumberOfThreads) {
  folder.file("lines.csv", long_table(300));
  const std::string survey = description();
  std::vector<std::vector<std::string>> contents;
  for (const int threads : {1, 2, 8}) {
    const fs::path into = folder.path() / std::to_string(threads);
    run(survey, into, {threads, {}, {}});
    contents.push_back(content(into));
  }
  EXPECT_EQ(contents[0], contents[1]);
  EXPECT_EQ(contents[0], contents[2]);
}

TEST_F(SurveyRun, RecomputesWhatHasChangedAndSaysWhy) {
  folder.file("lines.csv", long_table(10));
  run(description(), out());
  EXPECT_THAT(reasons(description()), ElementsAre(Pair("kept", 10)));

  folder.file("lines.csv", long_table(12));  // two more sources
  EXPECT_THAT(reasons(description()), ElementsAre(Pair("kept", 10), Pair("new", 2)));

  std::string changed = long_table(10);
  changed.replace(changed.find("Reef 3,RX,1-0,") + 14, 1, "9");
  folder.file("lines.csv", changed);
  EXPECT_THAT(reasons(description()), ElementsAre(Pair("kept", 9), Pair("its rows have changed", 1)));

  folder.file("lines.csv", long_table(10));
  const std::string exception = description("exceptions: [{sources: Reef 3, background: 0 K}]\n");
  EXPECT_THAT(reasons(exception), ElementsAre(Pair("kept", 9), Pair("options have changed: background", 1)));

  folder.file("lines.csv", "# a comment\n" + long_table(10));
  EXPECT_THAT(reasons(description()), ElementsAre(Pair("its rows stand elsewhere", 10)));
}

TEST_F(SurveyRun, SourcesThatAreAskedForAreComputedAgain) {
  folder.file("lines.csv", long_table(12));
  run(description(), out());
  const auto before = content(out());
  EXPECT_EQ(run(description(), out(), {}, {"Reef 1*"}).progress.finished, 3);  // 1, 10, 11
  EXPECT_EQ(content(out()), before);
}

TEST_F(SurveyRun, SourcesThatLeaveAndComeBackCostNothing) {
  folder.file("lines.csv", long_table(10));
  run(description(), out());
  const auto all = content(out());
  folder.file("lines.csv", long_table(6));
  EXPECT_EQ(run(description(), out()).progress.finished, 0);
  EXPECT_EQ(content(out()).size(), 6u);
  folder.file("lines.csv", long_table(10));
  EXPECT_EQ(run(description(), out()).progress.finished, 0);
  EXPECT_EQ(content(out()), all);
}

TEST_F(SurveyRun, ABadSourceCostsOneLine) {
  folder.file("lines.csv",
              long_table(3) + "Bad,RX,1-0,much,0.1\nShort,RX,1-0\nLost,RX,99-98,1,0.1\nOne,RX,1-0,1,0.1\n");
  const SurveyOutcome outcome = run(description(), out());
  EXPECT_EQ(outcome.progress.counts.done, 3);
  EXPECT_EQ(outcome.progress.counts.weak, 1);
  EXPECT_EQ(outcome.progress.counts.failed, 3);
  const auto jobs = content(out());
  EXPECT_THAT(jobs[3], HasSubstr("3|Bad|RX|failed|"));
  EXPECT_THAT(jobs[3], HasSubstr("lines.csv:20: column 'intensity' holds 'much'"));
  EXPECT_THAT(jobs[4], HasSubstr("lines.csv:21: 3 cells"));
  EXPECT_THAT(jobs[5], HasSubstr("lines.csv:22: RX has no transition '99-98'"));
  EXPECT_THAT(jobs[6], HasSubstr("|weak|"));
  EXPECT_EQ(run(description(), out()).progress.finished, 0) << "a wrong input stays wrong until it changes";
}

TEST_F(SurveyRun, ATableThatCannotBeReadCostsItsOwnSourcesOnly) {
  folder.file("good.csv", long_table(2));
  folder.file("bad.csv", "source;intensity\nA;1\n");
  const std::string survey = folder.file("survey.yaml", "tables: '*.csv'\nspecies: RX\n");
  EXPECT_EQ(run(survey, out()).progress.counts.done, 2);
  const auto unread = Ledger::open_to_read(out())->unread_tables();
  ASSERT_EQ(unread.size(), 1u);
  EXPECT_THAT(unread[0].message, HasSubstr("bad.csv:1"));
}

TEST_F(SurveyRun, TablesGiveSourceAndSpeciesToRowsThatNameNone) {
  const std::string rows =
      "transition,intensity [K km/s],intensity_error [K km/s]\n1-0,1,0.1\n2-1,2,0.1\n3-2,2.5,0.1\n";
  folder.file("Lantern 4.csv", rows);
  folder.file("b.csv", rows);
  folder.file("c.csv", rows);
  const std::string survey =
      folder.file("survey.yaml",
                  "tables: [{files: Lantern 4.csv, species: rx},"
                  " {files: b.csv, species: RY, source: Reef}, c.csv]\nspecies: [RX, RY]\n");
  run(survey, out());
  const auto jobs = content(out());
  ASSERT_EQ(jobs.size(), 3u);
  EXPECT_THAT(jobs[0], HasSubstr("0|Lantern 4|RX|done"));
  EXPECT_THAT(jobs[1], HasSubstr("1|Reef|RY|done"));
  EXPECT_THAT(jobs[2], HasSubstr("2|c|RX|failed|the rows name no species, and the survey has 2"));
}

TEST_F(SurveyRun, RowsInTwoTablesOrWithoutASourceAreRefusedOneByOne) {
  folder.file("a.csv", long_table(2));
  folder.file("b.csv", std::string(kHeader) +
                           "Reef 1,rx,1-0,1,0.1\nReef 1,RX,2-1,1,0.1\nReef 9,RX,1-0,1,0.1\n,RX,1-0,1,0.1\n");
  const std::string survey = folder.file("survey.yaml", "tables: [a.csv, b.csv]\nspecies: RX\n");
  run(survey, out());
  const auto jobs = content(out());
  ASSERT_EQ(jobs.size(), 4u);
  EXPECT_THAT(jobs[1], HasSubstr("its rows stand in two tables"));
  EXPECT_THAT(jobs[3], HasSubstr("b.csv:5: the row names no source"));
}

TEST_F(SurveyRun, SpellingsOfASpeciesAreOneJob) {
  folder.file("lines.csv", std::string(kHeader) + "A,RX,1-0,1,0.1\nA,rx,2-1,2,0.1\nA,Rx,3-2,2.5,0.1\n");
  run(description(), out());
  const auto jobs = content(out());
  ASSERT_EQ(jobs.size(), 1u);
  EXPECT_THAT(jobs[0], HasSubstr("\"dof\":1"));
}

TEST_F(SurveyRun, AStopEndsTheRunAndTheNextOneFinishesIt) {
  folder.file("lines.csv", long_table(200));
  run(description(), folder.path() / "whole");
  int asked = 0;
  const SurveyOutcome stopped = run(description(), out(), {2, {}, [&] { return ++asked > 50; }});
  EXPECT_TRUE(stopped.stopped);
  EXPECT_EQ(stopped.progress.finished, 50);
  const SurveyOutcome rest = run(description(), out());
  EXPECT_FALSE(rest.stopped);
  EXPECT_EQ(rest.progress.finished, 150);
  EXPECT_EQ(content(out()), content(folder.path() / "whole"));
}

TEST_F(SurveyRun, ProgressEndsWithWhatWasDone) {
  folder.file("lines.csv", long_table(50));
  SurveyProgress last;
  run(description(), out(), {2, [&](const SurveyProgress& progress) { last = progress; }, {}});
  EXPECT_EQ(last.finished, 50);
  EXPECT_EQ(last.to_compute, 50);
  EXPECT_EQ(last.counts.all(), 50);
}

TEST_F(SurveyRun, PlansSayEverythingThatStandsInTheWay) {
  folder.file("lines.csv", long_table(2));
  const auto checked =
      parse_survey_description("tables: [linse.csv, lines.csv, 'l*.csv']\nspecies: [RX, RZ]\n",
                               (folder.path() / "survey.yaml").string());
  const PlannedSurvey plan = plan_survey(checked.survey, nullptr, {{}, find_species});
  ASSERT_EQ(plan.errors.size(), 3u);
  EXPECT_THAT(plan.errors[0].what(), HasSubstr("there is no species 'RZ'"));
  EXPECT_THAT(plan.errors[1].what(), HasSubstr("survey.yaml:1:10: no file fits"));
  EXPECT_THAT(plan.errors[1].what(), HasSubstr("did you mean 'lines.csv'?"));
  EXPECT_THAT(plan.errors[2].what(), HasSubstr("is matched here and in line 1"));
}

TEST_F(SurveyRun, PlansWarnOfWhatHasNoEffect) {
  folder.file("lines.csv", long_table(3) + rows_of({"Reef 1"}, "RY", 1));
  Ledger ledger = Ledger::open(folder.path());
  const SurveyPlan plan =
      planned(description("exceptions: [{sources: Ref 1, method: line}]\n"), &ledger, {"Reef 77"});
  ASSERT_EQ(plan.warnings.size(), 3u);
  EXPECT_THAT(plan.warnings[0], HasSubstr("6 rows of 'RY' were passed over"));
  EXPECT_THAT(plan.warnings[1],
              HasSubstr("survey.yaml:3:14: this exception fits no source; did you mean 'Reef 1'?"));
  EXPECT_THAT(plan.warnings[2], HasSubstr("no source fits 'Reef 77'"));
}

TEST_F(SurveyRun, ASecondRunOnOneFolderIsRefusedAndToldWhy) {
  const FolderLock first(out());
  EXPECT_THAT([&] { FolderLock{out()}; }, ::testing::ThrowsMessage<SystemError>(::testing::AllOf(
                                              HasSubstr("another run is at work in"),
                                              HasSubstr(fmt::format("process {} on ", getpid())))));
}

TEST_F(SurveyRun, AFolderThatCannotBeMadeIsRefusedBeforeWork) {
  folder.file("plain", "a file");
  EXPECT_THAT([&] { FolderLock{folder.path() / "plain" / "out"}; },
              ::testing::ThrowsMessage<SystemError>(HasSubstr("cannot be written to")));
  EXPECT_THAT([&] { FolderLock{"/proc/nothing/out"}; },
              ::testing::ThrowsMessage<SystemError>(HasSubstr("cannot be written to")));
}

TEST_F(SurveyRun, AFileThatIsNoLedgerIsNotTouched) {
  const std::string path = folder.file("out/ledger.sqlite", "my notes on the weather");
  EXPECT_THAT([&] { (void)Ledger::open(out()); },
              ::testing::ThrowsMessage<InputError>(HasSubstr("is no SQLite file")));
  EXPECT_EQ(read_file(path), "my notes on the weather");
  sqlite3* other = nullptr;
  fs::remove(path);
  ASSERT_EQ(sqlite3_open(path.c_str(), &other), SQLITE_OK);
  ASSERT_EQ(sqlite3_exec(other, "CREATE TABLE song (title TEXT)", nullptr, nullptr, nullptr), SQLITE_OK);
  sqlite3_close(other);
  EXPECT_THAT([&] { (void)Ledger::open(out()); },
              ::testing::ThrowsMessage<InputError>(HasSubstr("no ledger of a survey")));
}

// Kills. The run that is killed is this program, started anew as one hidden test; it ends itself by SIGKILL from
// one of its threads after a number of jobs, so that every kill finds work under way however fast the machine is.
// Kills from outside at moments of the clock are in tests/validation/survey_endurance.

constexpr int kJobsToKill = 400;
constexpr const char* kKillAfter = "TROTLINE_TEST_KILL_AFTER";

TEST(SurveyKilled, DISABLED_Child) {
  const char* folder = std::getenv("TROTLINE_TEST_FOLDER");
  const char* after = std::getenv(kKillAfter);
  ASSERT_TRUE(folder != nullptr && after != nullptr);
  int jobs_left = std::atoi(after);
  SurveyRunOptions options;
  options.threads = 2;
  options.seconds_between_commits = 1e-3;
  options.stop = [&] {
    if (jobs_left-- == 0) raise(SIGKILL);
    return false;
  };
  run((fs::path(folder) / "survey.yaml").string(), fs::path(folder) / "out", options);
}

int run_child(const fs::path& folder, int kill_after) {
  const pid_t child = fork();
  if (child == 0) {
    setenv("TROTLINE_TEST_FOLDER", folder.c_str(), 1);
    setenv(kKillAfter, std::to_string(kill_after).c_str(), 1);
    const int nowhere = open("/dev/null", O_WRONLY);
    dup2(nowhere, STDOUT_FILENO);
    execl("/proc/self/exe", "survey_test", "--gtest_filter=SurveyKilled.DISABLED_Child",
          "--gtest_also_run_disabled_tests", nullptr);
    _exit(127);
  }
  int status = 0;
  waitpid(child, &status, 0);
  return status;
}

TEST(SurveyKilled, TwentyKillsLeaveTheResultsOfAnUndisturbedRun) {
  TemporaryFolder folder;
  folder.file("lines.csv", long_table(kJobsToKill));
  const std::string survey = folder.file("survey.yaml", "tables: lines.csv\nspecies: [RX]\n");
  run(survey, folder.path() / "whole");
  std::mt19937_64 random(20);
  std::uniform_int_distribution<int> jobs(0, 19);
  std::set<std::size_t> states;
  for (int kill_number = 0; kill_number < 20; ++kill_number) {
    const int status = run_child(folder.path(), jobs(random));
    ASSERT_TRUE(WIFSIGNALED(status) && WTERMSIG(status) == SIGKILL);
    states.insert(content(folder.path() / "out").size());
  }
  EXPECT_GT(states.size(), 3u) << "the kills must find something kept";
  run(survey, folder.path() / "out");
  EXPECT_EQ(content(folder.path() / "out"), content(folder.path() / "whole"));
  auto ledger = Ledger::open_to_read(folder.path() / "out");
  EXPECT_EQ(ledger->counts().all(), kJobsToKill);
}

}  // namespace
}  // namespace trotline
