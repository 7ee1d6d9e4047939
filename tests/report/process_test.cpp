#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <chrono>
#include <cstdlib>

#include <trotline/base/errors.hpp>
#include <trotline/report/process.hpp>

namespace trotline {
namespace {

using testing::HasSubstr;
using testing::Not;
using testing::ThrowsMessage;

TEST(Process, PassesArgumentsAsTheyAre) {
  const std::string text = "a b;`touch x` $HOME \"q\" 'r' \\n *";
  EXPECT_EQ(run_process({"printf", "%s", text}).output, text);
}

TEST(Process, ReportsExitCodesAndSignals) {
  EXPECT_EQ(run_process({"true"}).exit_code, 0);
  EXPECT_EQ(run_process({"sh", "-c", "exit 7"}).exit_code, 7);
  EXPECT_EQ(run_process({"sh", "-c", "kill -TERM $$"}).exit_code, 128 + 15);
}

TEST(Process, CollectsBothStreams) {
  EXPECT_EQ(run_process({"sh", "-c", "echo one; echo two >&2"}).output, "one\ntwo\n");
}

TEST(Process, RunsInTheFolderAsked) {
  EXPECT_EQ(run_process({"pwd"}, {.folder = "/"}).output, "/\n");
  EXPECT_THAT([] { (void)run_process({"pwd"}, {.folder = "/no/such/folder"}); },
              ThrowsMessage<SystemError>(HasSubstr("pwd: cannot be started")));
}

TEST(Process, HidesTheEnvironmentOfTheUser) {
  ::setenv("GNUTERM", "x11", 1);
  ::setenv("GNUPLOT_LIB", "/tmp", 1);
  ::setenv("LC_NUMERIC", "de_DE.UTF-8", 1);
  const std::string seen = run_process({"env"}).output;
  ::unsetenv("GNUTERM");
  ::unsetenv("GNUPLOT_LIB");
  ::unsetenv("LC_NUMERIC");
  EXPECT_THAT(seen, Not(HasSubstr("GNU")));
  EXPECT_THAT(seen, Not(HasSubstr("LC_NUMERIC")));
  EXPECT_THAT(seen, HasSubstr("LC_ALL=C.UTF-8"));
}

TEST(Process, GivesNoInput) { EXPECT_EQ(run_process({"cat"}).output, ""); }

TEST(Process, SaysWhichProgramIsMissing) {
  EXPECT_THAT([] { (void)run_process({"no-such-program-anywhere"}); },
              ThrowsMessage<SystemError>(HasSubstr("no-such-program-anywhere: cannot be started")));
  EXPECT_THROW((void)run_process({}), SystemError);
}

TEST(Process, StopsWhatDoesNotEndInTime) {
  const auto start = std::chrono::steady_clock::now();
  EXPECT_THAT(
      [] {
        (void)run_process({"sleep", "30"}, {.timeout_s = 0.2});
      },
      ThrowsMessage<SystemError>(HasSubstr("has not ended after 0.2 s")));
  // A child of the child holds the pipe open as well: the whole group is stopped.
  EXPECT_THROW((void)run_process({"sh", "-c", "sleep 30 & wait"}, {.timeout_s = 0.2}), SystemError);
  EXPECT_LT(std::chrono::steady_clock::now() - start, std::chrono::seconds(10));
}

TEST(Process, KeepsOnlySoMuchOutput) {
  const auto outcome = run_process({"head", "-c", "300000", "/dev/zero"}, {.most_bytes = 1000});
  EXPECT_EQ(outcome.exit_code, 0);
  EXPECT_EQ(outcome.output.size(), 1000U);
}

}  // namespace
}  // namespace trotline
