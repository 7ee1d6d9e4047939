#include <gtest/gtest.h>

#include <trotline/report/font_coverage.hpp>

namespace trotline {
namespace {

TEST(FontCoverage, KeepsLatinGreekAndCyrillic) {
  const std::string text = "Cloud 4 (é, ß) Ωμega Жук CH₃CN ¹³CO 10⁻¹⁴ − – … χ²";
  EXPECT_EQ(drawable_text(text), text);
}

TEST(FontCoverage, ReplacesWhatNoFontHolds) {
  // U+0378 and U+10FFF0 are not assigned (Unicode 15), so no font shows them.
  EXPECT_EQ(drawable_text("a\u0378b"), "a□b");
  EXPECT_EQ(drawable_text("\U0010FFF0"), "□");
  EXPECT_EQ(drawable_text("\xFF"), drawable_text("\uFFFD"));
}

TEST(FontCoverage, LeavesTextWithoutSurprisesAlone) {
  EXPECT_EQ(drawable_text(""), "");
  EXPECT_EQ(drawable_text("a\\b\"c"), "a\\b\"c");
}

}  // namespace
}  // namespace trotline
