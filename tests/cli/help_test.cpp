#include <regex>
#include <set>

#include <trotline/analysis/measure_description.hpp>
#include <trotline/analysis/prediction.hpp>
#include <trotline/analysis/run_options.hpp>

#include "program_fixture.hpp"

namespace trotline {
namespace {

using ::testing::HasSubstr;

class Help : public ProgramTest {};

std::set<std::string> options_in(const std::string& text) {
  static const std::regex kOption(R"((?:^|\n) +--([a-z][a-z-]*))");  // at the start of a line: where it is described
  std::set<std::string> names;
  for (std::sregex_iterator i(text.begin(), text.end(), kOption), end; i != end; ++i) names.insert((*i)[1]);
  return names;
}

TEST_F(Help, OfFitDescribesEveryOptionAndNoOther) {
  const Outcome outcome = run({"fit", "--help"});
  EXPECT_EQ(outcome.code, ExitCode::done);
  std::set<std::string> expected = {"species", "out", "figures", "json", "help"};
  for (const RunOption& option : run_option_table()) {
    std::string name = option.key;
    std::replace(name.begin(), name.end(), '_', '-');
    expected.insert(name);
  }
  EXPECT_EQ(options_in(outcome.out), expected);
}

TEST_F(Help, OfPredictDescribesEveryOptionAndNoOther) {
  std::set<std::string> expected = {"out", "no-figure", "json", "help"};
  for (const PredictionOption& option : prediction_option_table()) {
    std::string name = option.key;
    std::replace(name.begin(), name.end(), '_', '-');
    expected.insert(name);
  }
  EXPECT_EQ(options_in(run({"predict", "--help"}).out), expected);
}

TEST_F(Help, OfMeasureDescribesEveryOptionAndNoOther) {
  std::set<std::string> expected = {"species", "out", "panels", "figures",
                                    "model",   "json", "jobs",   "help"};
  for (const MeasureOption& option : measure_option_table()) {
    std::string name = option.key;
    std::replace(name.begin(), name.end(), '_', '-');
    expected.insert(name);
  }
  EXPECT_EQ(options_in(run({"measure", "--help"}).out), expected);
}

TEST_F(Help, OfEveryVerbIsReachedInEveryWay) {
  EXPECT_THAT(run({"--help"}).out, HasSubstr("fit"));
  EXPECT_THAT(run({"help"}).out, HasSubstr("species"));
  EXPECT_THAT(run({"species", "--help"}).out, HasSubstr("--partition"));
  EXPECT_THAT(run({"fit", "x.csv", "-h"}).out, HasSubstr("--source-size"));
  EXPECT_THAT(run({"--version"}).out, HasSubstr("trotline "));
}

TEST_F(Help, FitsIntoNinetyColumns) {
  for (const std::string verb : {"fit", "measure", "survey", "predict", "species"}) {
    std::istringstream text(run({verb, "--help"}).out);
    for (std::string line; std::getline(text, line);) EXPECT_LE(line.size(), 90U) << line;
  }
}

}  // namespace
}  // namespace trotline
