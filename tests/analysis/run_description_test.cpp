#include <trotline/analysis/run_description.hpp>

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <trotline/base/errors.hpp>

namespace trotline {
namespace {

using ::testing::HasSubstr;
using ::testing::StartsWith;

TEST(RunDescription, ReadsKeysAndTakesPathsFromItsOwnFolder) {
  const auto run = parse_run_description(
      "species: CO\ntable: lines.csv\nsource_size: 12 arcsec\nwithout: [7-6, 8-7]\nsource: Reed\n", "runs/reed.yaml");
  EXPECT_EQ(run.table, "runs/lines.csv");
  EXPECT_EQ(run.species, "CO");
  EXPECT_EQ(*run.options.source, "Reed");
  EXPECT_NEAR(*run.options.source_size_rad, 5.817764173314432e-05, 1e-18);  // 12 pi / 648000
  EXPECT_THAT(run.options.without_lines, ::testing::ElementsAre("7-6", "8-7"));
}

std::string refusal(const std::string& text) {
  try {
    (void)parse_run_description(text, "run.yaml");
  } catch (const InputError& error) {
    return error.what();
  }
  return "accepted";
}

TEST(RunDescription, NamesLineAndColumnOfWhatIsWrong) {
  EXPECT_THAT(refusal("species: CO\ntable: a.csv\nsorce_size: 3 arcsec\n"),
              ::testing::AllOf(StartsWith("run.yaml:3:1"), HasSubstr("did you mean 'source_size'?")));
  EXPECT_THAT(refusal("species: CO\ntable: a.csv\nsource_size: 3\n"),
              ::testing::AllOf(StartsWith("run.yaml:3:1"), HasSubstr("has no unit")));
  EXPECT_THAT(refusal("species: CO\nspecies: CS\ntable: a.csv\n"),
              ::testing::AllOf(StartsWith("run.yaml:2:1"), HasSubstr("given twice")));
  EXPECT_THAT(refusal("species: CO\n"), HasSubstr("'table' is missing"));
  EXPECT_THAT(refusal("table: a.csv\n"), HasSubstr("'species' is missing"));
  EXPECT_THAT(refusal("species: {a: b}\ntable: x\n"), HasSubstr("no plain value"));
  EXPECT_THAT(refusal("species: CO\n  table: [\n"), HasSubstr("no valid YAML"));
  EXPECT_THAT(refusal("- a\n- b\n"), HasSubstr("no run description"));
  EXPECT_THAT(refusal("? [a, b]\n: c\n"), HasSubstr("no plain text"));
}

}  // namespace
}  // namespace trotline
