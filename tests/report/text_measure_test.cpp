#include <gtest/gtest.h>

#include <string>

#include <trotline/report/text_measure.hpp>

namespace trotline {
namespace {

// Advance widths: table hmtx of Linux Biolinum O 5.3.0, H 726, C 677, O 741, N 718, 1 465 thousandths
// (regular).
TEST(TextMeasure, AddsTheAdvanceWidthsOfTheFont) {
  EXPECT_NEAR(text_width_em("HCN"), 0.726 + 0.677 + 0.718, 1e-12);
  EXPECT_NEAR(text_width_em("11"), 2 * 0.465, 1e-12);
  EXPECT_EQ(text_width_em(""), 0.0);
}

TEST(TextMeasure, BoldIsWider) {
  EXPECT_GT(text_width_em("Lantern Cloud", true), text_width_em("Lantern Cloud"));
}

TEST(TextMeasure, CountsCharactersAndNotBytes) {
  EXPECT_LT(text_width_em("CH₃"), text_width_em("CH3"));
  EXPECT_EQ(text_width_em("星"), 1.0);
  EXPECT_EQ(text_width_em("e\u0301"), text_width_em("e"));
}

TEST(TextMeasure, GrowsWithTheText) {
  std::string text;
  double width = 0.0;
  for (int code = 0x20; code < 0x7F; ++code) {
    text += static_cast<char>(code);
    EXPECT_GT(text_width_em(text), width);
    width = text_width_em(text);
  }
}

}  // namespace
}  // namespace trotline
