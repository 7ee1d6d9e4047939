#include <trotline/analysis/run_options.hpp>

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <trotline/base/errors.hpp>

namespace trotline {
namespace {

using ::testing::HasSubstr;

std::string refusal(const std::string& key, const std::string& value) {
  RunOptions options;
  try {
    set_run_option(options, key, value);
  } catch (const InputError& error) {
    return error.what();
  }
  return "accepted";
}

TEST(RunOptions, EveryExampleIsAcceptedAndShownAsAValueThatIsAcceptedAgain) {
  for (const RunOption& option : run_option_table()) {
    RunOptions once;
    ASSERT_NO_THROW(option.set(once, option.example)) << option.key;
    const std::string text = option.show(once);
    EXPECT_NE(text, "not given") << option.key;
    RunOptions twice;
    ASSERT_NO_THROW(option.set(twice, text)) << option.key << ": " << text;
    EXPECT_EQ(option.show(twice), text) << option.key;
  }
}

TEST(RunOptions, QuantitiesNeedTheirUnitAndDimension) {
  EXPECT_THAT(refusal("source_size", "8"), HasSubstr("no unit"));
  EXPECT_THAT(refusal("source_size", "8 K"), HasSubstr("a unit of a temperature"));
  EXPECT_THAT(refusal("beam", "0 arcsec"), HasSubstr("not above zero"));
  EXPECT_THAT(refusal("temperature", "-5 K"), HasSubstr("not above zero"));
  EXPECT_THAT(refusal("background", "-1 K"), HasSubstr("outside 0 to 1000 K"));
  EXPECT_THAT(refusal("background", "nan K"), HasSubstr("finite"));
  EXPECT_THAT(refusal("calibration_error", "130 %"), HasSubstr("outside 0 to 1"));
  EXPECT_THAT(refusal("upper_energy", "300 K..10 K"), HasSubstr("lower value first"));
  EXPECT_THAT(refusal("frequency", "80 GHz"), HasSubstr("no range"));
  EXPECT_THAT(refusal("calibration_shared", "maybe"), HasSubstr("'yes' or 'no'"));
  EXPECT_THAT(refusal("method", "lime"), HasSubstr("did you mean 'line'?"));
  EXPECT_THAT(refusal("only", " , "), HasSubstr("no label"));
  EXPECT_THAT(refusal("backgroud", "3 K"), HasSubstr("did you mean 'background'?"));
}

TEST(RunOptions, LabelsKeepTheCommasInsideTheirBrackets) {
  RunOptions options;
  set_run_option(options, "only", "3(1,2)-2(1,1), 4(0,4)-3(0,3)");
  EXPECT_THAT(options.only_lines, ::testing::ElementsAre("3(1,2)-2(1,1)", "4(0,4)-3(0,3)"));
}

TEST(RunOptions, ShowEveryOptionForProvenance) {
  EXPECT_EQ(shown(RunOptions{}).size(), run_option_table().size());
}

}  // namespace
}  // namespace trotline
