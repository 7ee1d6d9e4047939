#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <limits>

#include <trotline/report/display_text.hpp>
#include <trotline/report/text_table.hpp>

namespace trotline {
namespace {

using testing::ElementsAre;

TEST(TextTable, AlignsNumbersRightAndWordsLeft) {
  EXPECT_THAT(text_table({{"line", {"a", "bcd"}, false}, {"W", {"1.5", "10.25"}}}, 40),
              ElementsAre("line      W", "a       1.5", "bcd   10.25"));
}

TEST(TextTable, ShortensTheFirstColumnToFit) {
  EXPECT_THAT(text_table({{"line", {"abcdefghijkl"}, false}, {"W", {"1.5"}}}, 13),
              ElementsAre("line        W", "abcdefg…  1.5"));
}

TEST(TextTable, NeverExceedsItsWidth) {
  for (std::size_t width = 1; width < 40; ++width) {
    for (const std::string& line :
         text_table({{"line", {"星雲星雲星雲"}, false}, {"W", {"(1.5 ± 0.1) × 10¹⁴"}}}, width)) {
      EXPECT_LE(display_width(line), width);
    }
  }
}

TEST(ResidualBar, ShowsSizeAndSideInStepsOfHalfASigma) {
  EXPECT_EQ(residual_bar(0.0), "     │     ");
  EXPECT_EQ(residual_bar(1.4), "     │█▌   ");
  EXPECT_EQ(residual_bar(-1.4), "   ▐█│     ");
  EXPECT_EQ(residual_bar(5.0), "     │█████");
  EXPECT_EQ(residual_bar(1.4, Glyphs::ascii), "     |#:   ");
}

TEST(ResidualBar, PointsBeyondItsEnd) {
  EXPECT_EQ(residual_bar(7.0), "     │████▶");
  EXPECT_EQ(residual_bar(-7.0), "◀████│     ");
  EXPECT_EQ(residual_bar(-std::numeric_limits<double>::infinity(), Glyphs::ascii), "<####|     ");
}

TEST(ResidualBar, IsEmptyForNothing) {
  EXPECT_EQ(residual_bar(std::numeric_limits<double>::quiet_NaN()), "");
}

}  // namespace
}  // namespace trotline
