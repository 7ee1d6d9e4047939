#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <random>

#include <trotline/report/display_text.hpp>

namespace trotline {
namespace {

using testing::ElementsAre;

TEST(DisplayText, KeepsLettersOfEveryScript) {
  EXPECT_EQ(display_text("Ωμέγα 星 Ж 🌟 \"q\" `b` <b>&"), "Ωμέγα 星 Ж 🌟 \"q\" `b` <b>&");
}

TEST(DisplayText, DropsWhatControlsOrReordersTheLine) {
  EXPECT_EQ(display_text("a\nb\tc\x1b[31m"), "a b c [31m");
  EXPECT_EQ(display_text("a\u202Eb\u2028c\u2066d"), "a b c d");
  EXPECT_EQ(display_text("a\xEF\xBF\xBF"
                         "b"),
            "a b");  // U+FFFF
  EXPECT_EQ(display_text("a\xFF"), "a\uFFFD");
}

// Widths by Unicode Standard Annex 11 and the general category Mn, from memory.
TEST(DisplayText, CountsColumnsAndNotBytes) {
  EXPECT_EQ(display_width(""), 0U);
  EXPECT_EQ(display_width("CH₃CN"), 5U);
  EXPECT_EQ(display_width("星雲"), 4U);
  EXPECT_EQ(display_width("e\u0301"), 1U);
  EXPECT_EQ(display_width("🌟"), 2U);
}

TEST(DisplayText, ShortensAtWholeCharacters) {
  EXPECT_EQ(shortened("abcdef", 6), "abcdef");
  EXPECT_EQ(shortened("abcdefg", 6), "abcde…");
  EXPECT_EQ(shortened("abcdefg", 6, true), "abcde~");
  EXPECT_EQ(shortened("星雲星雲", 6), "星雲…");
  EXPECT_EQ(shortened("abc", 0), "");
}

TEST(DisplayText, PadsByColumns) {
  EXPECT_EQ(padded_right("星", 4), "星  ");
  EXPECT_EQ(padded_left("±1", 4), "  ±1");
  EXPECT_EQ(padded_left("abcdef", 4), "abcdef");
}

TEST(DisplayText, WrapsAtSpaces) {
  EXPECT_THAT(wrapped("one two three", 7), ElementsAre("one two", "three"));
  EXPECT_THAT(wrapped("abcdefghij", 4), ElementsAre("abcd", "efgh", "ij"));
  EXPECT_THAT(wrapped("", 4), ElementsAre(""));
}

TEST(DisplayText, WrappedLinesHoldEveryWordAndNoneIsTooLong) {
  std::mt19937 random(7);
  for (int draw = 0; draw < 500; ++draw) {
    std::string text;
    for (int i = 0; i < 60; ++i) text += random() % 4 == 0 ? " " : random() % 5 == 0 ? "星" : "x";
    std::string joined;
    for (const std::string& line : wrapped(text, 11)) {
      EXPECT_LE(display_width(line), 11U);
      joined += line;
    }
    const auto without_spaces = [](std::string s) { return std::erase(s, ' '), s; };
    EXPECT_EQ(without_spaces(joined), without_spaces(text));
  }
}

TEST(DisplayText, DecodesCodePoints) {
  EXPECT_EQ(code_point_of("a"), U'a');
  EXPECT_EQ(code_point_of("é"), U'é');
  EXPECT_EQ(code_point_of("星"), U'星');
  EXPECT_EQ(code_point_of("🌟"), U'🌟');
  EXPECT_EQ(code_point_of("\xFF"), U'\uFFFD');
  EXPECT_EQ(characters_of("é\xFF"
                          "a")
                .size(),
            3U);
}

}  // namespace
}  // namespace trotline
