#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <unistd.h>

#include <filesystem>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/report/write_outputs.hpp>

#include "report/invented_results.hpp"

namespace trotline {
namespace {

namespace fs = std::filesystem;
using namespace testing_room;
using testing::ElementsAre;

fs::path unused_path(const std::string& name) {
  return fs::temp_directory_path() / ("trotline-outputs-" + std::to_string(::getpid()) + "-" + name);
}

TEST(WriteOutputs, StagesEveryOutput) {
  const fs::path target = unused_path("all");
  {
    OutputFolder folder(target);
    write_outputs(invented_result({.limits = 1}), folder);
    EXPECT_FALSE(fs::exists(target / "result.json")) << "nothing shows before it is committed";
    EXPECT_THAT(folder.commit(), ElementsAre("diagram-labels.tsv", "diagram-line.tsv", "diagram-points.tsv",
                                             "diagram-text.tsv", "diagram.gp", "diagram.pdf", "diagram.png",
                                             "diagram.svg", "lines.ecsv", "report.txt", "result.json"));
  }
  fs::remove_all(target);
}

TEST(WriteOutputs, WritesDrawsWhereTheResultHoldsThem) {
  const fs::path target = unused_path("draws");
  {
    Result result = invented_result();
    result.parameters = {{"ln_temperature_k", 4.0, 0.1}, {"background_k", 2.7, 0.1}};
    result.posterior.draws = {{4.1, 3.9, 4.0}, {2.6, 2.8, kNotKnown}};
    OutputFolder folder(target);
    write_outputs(result, folder, {.formats = {}});
    EXPECT_THAT(folder.commit(), testing::Contains("samples.ecsv"));
    const std::string text = read_file((target / "samples.ecsv").string());
    EXPECT_TRUE(text.starts_with("# %ECSV 1.0\n"));
    EXPECT_TRUE(text.ends_with("ln_temperature_k,background_k\n4.1,2.6\n3.9,2.8\n4.0,\n") ||
                text.ends_with("ln_temperature_k,background_k\n4.1,2.6\n3.9,2.8\n4,\n"));
  }
  fs::remove_all(target);
}

TEST(WriteOutputs, LeavesTheFigureOutWhereNoneIsAsked) {
  const fs::path target = unused_path("plain");
  {
    OutputFolder folder(target);
    write_outputs(invented_result(), folder, {.formats = {}});
    EXPECT_THAT(folder.commit(), ElementsAre("lines.ecsv", "report.txt", "result.json"));
  }
  fs::remove_all(target);
}

TEST(WriteOutputs, LeavesNothingBehindWhenItFails) {
  const fs::path target = unused_path("failed");
  {
    OutputFolder folder(target);
    EXPECT_THROW(write_outputs(invented_result(), folder, {.figure_size = {1.0, 1.0}}), Error);
  }
  EXPECT_FALSE(fs::exists(target));
}

}  // namespace
}  // namespace trotline
