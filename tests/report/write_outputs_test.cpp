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
