#include <fmt/format.h>
#include <gtest/gtest.h>

#include <cmath>
#include <limits>
#include <random>

#include <trotline/base/text.hpp>

namespace trotline {
namespace {

TEST(Text, TrimmedAndLowerCaseTouchOnlyAscii) {
  EXPECT_EQ(trimmed(" \t\r\n x y \v\f"), "x y");
  EXPECT_EQ(trimmed("   "), "");
  EXPECT_EQ(lower_case("HCO+ ÄÖ"), "hco+ ÄÖ");
}

TEST(Text, NumbersMustFillTheText) {
  EXPECT_EQ(parse_number("1.5"), 1.5);
  EXPECT_EQ(parse_number(" -2e3 "), -2000.0);
  EXPECT_EQ(parse_number("+4"), 4.0);
  EXPECT_EQ(parse_number(".5"), 0.5);
  EXPECT_EQ(parse_number("5."), 5.0);
  EXPECT_TRUE(std::isnan(parse_number("nan").value()));
  EXPECT_TRUE(std::isinf(parse_number("-inf").value()));
  for (const char* bad :
       {"", " ", "+", "-", "+-4", "++4", "-+4", "4x", "1,5", "1d5", "0x10", "1e", "1e999", "1 2", "e5"}) {
    EXPECT_FALSE(parse_number(bad).has_value()) << bad;
  }
}

TEST(Text, EveryDoubleSurvivesBeingWrittenAndRead) {
  std::mt19937_64 random(1);
  for (int i = 0; i < 20000; ++i) {
    const std::uint64_t bits = random();
    double value = 0.0;
    std::memcpy(&value, &bits, sizeof value);
    if (!std::isfinite(value)) continue;
    EXPECT_EQ(parse_number(fmt::format("{}", value)), value);
  }
}

TEST(Text, WholeNumbersMustFitAndFill) {
  EXPECT_EQ(parse_whole_number("-12"), -12);
  EXPECT_EQ(parse_whole_number(" +7 "), 7);
  EXPECT_EQ(parse_whole_number("9223372036854775807"), std::numeric_limits<long long>::max());
  for (const char* bad : {"", "1.0", "9223372036854775808", "1e3", "--1", "abc"}) {
    EXPECT_FALSE(parse_whole_number(bad).has_value()) << bad;
  }
}

TEST(Text, NearestNameCountsSwapsAsOneEdit) {
  const std::vector<std::string> names = {"intensity", "intensity_error", "transition"};
  EXPECT_EQ(nearest_name("intesnity", names), "intensity");
  EXPECT_EQ(nearest_name("INTENSITY_EROR", names), "intensity_error");
  EXPECT_FALSE(nearest_name("quux", names).has_value());
  EXPECT_FALSE(nearest_name("x", {}).has_value());
  EXPECT_FALSE(nearest_name(std::string(5000, 'x'), names).has_value());
  EXPECT_EQ(did_you_mean("transitoin", names), "did you mean 'transition'?");
  EXPECT_EQ(did_you_mean("quux", names), "");
}

TEST(Text, ListsAreCutShort) {
  EXPECT_EQ(listed({}), "");
  EXPECT_EQ(listed({"a", "b"}), "a, b");
  EXPECT_EQ(listed({"a", "b", "c"}, 2), "a, b and 1 more");
}

TEST(Text, Utf8IsCheckedForOverlongFormsAndSurrogates) {
  // Well-formed and ill-formed sequences: Unicode standard 15.0, table 3-7.
  for (const char* good : {"", "abc", "\xC2\x80", "\xDF\xBF", "\xE0\xA0\x80", "\xED\x9F\xBF", "\xEE\x80\x80",
                           "\xF0\x90\x80\x80", "\xF4\x8F\xBF\xBF"}) {
    EXPECT_TRUE(is_utf8(good)) << good;
  }
  for (const char* bad : {"\x80", "\xC0\x80", "\xC1\xBF", "\xC2", "\xC2\x41", "\xE0\x9F\xBF", "\xED\xA0\x80",
                          "\xE1\x80", "\xF0\x8F\xBF\xBF", "\xF4\x90\x80\x80", "\xF5\x80\x80\x80", "\xFF"}) {
    EXPECT_FALSE(is_utf8(bad)) << fingerprint(bad);
  }
}

TEST(Text, PrintableIsOneLineOfUtf8WhateverComesIn) {
  EXPECT_EQ(printable("a\nb\x1B[31m\x7F"), "a b [31m ");
  EXPECT_EQ(printable("x\xFFy"), "x\xEF\xBF\xBDy");
  EXPECT_EQ(printable("\xC2\x9B"), " ");  // a C1 control character
  std::mt19937 random(2);
  for (int i = 0; i < 2000; ++i) {
    std::string bytes(random() % 12, ' ');
    for (char& c : bytes) c = static_cast<char>(random());
    const std::string safe = printable(bytes);
    EXPECT_TRUE(is_utf8(safe));
    for (const char c : safe) EXPECT_TRUE(static_cast<unsigned char>(c) >= 0x20 && c != 0x7F);
  }
}

TEST(Text, FingerprintIsFnv1a) {
  // Test vectors of the 64-bit FNV-1a hash: Fowler, Noll & Vo, IETF draft-eastlake-fnv, appendix C (from
  // memory).
  EXPECT_EQ(fingerprint(""), "cbf29ce484222325");
  EXPECT_EQ(fingerprint("a"), "af63dc4c8601ec8c");
  EXPECT_EQ(fingerprint("foobar"), "85944171f73967e8");
}

}  // namespace
}  // namespace trotline
