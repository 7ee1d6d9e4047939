#include <trotline/species/line_list.hpp>

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <random>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>

#include "reference_files.hpp"

namespace trotline {
namespace {

using testing::ElementsAre;
using testing::HasSubstr;

// Made for these tests: an asymmetric top in the 80-column format.
const std::string kRow = "   12345.6789  0.0123 -4.5678 3   98.7654 21  99001 303 3 1 2       2 1 1       ";

std::string with(std::size_t column, const std::string& text, std::string row = kRow) {
  return row.replace(column - 1, text.size(), text);
}

LineListRow only_row(const std::string& text) {
  const LineList list = parse_line_list(text, "made.cat");
  EXPECT_EQ(list.rows.size(), 1u);
  return list.rows.at(0);
}

TEST(LineList, ReadsEveryColumn) {
  const LineListRow row = only_row(kRow + "\n");
  EXPECT_EQ(row.frequency_mhz, 12345.6789);
  EXPECT_EQ(row.frequency_sigma_mhz, 0.0123);
  EXPECT_EQ(row.log10_intensity, -4.5678);
  EXPECT_EQ(row.degrees_of_freedom, 3);
  EXPECT_EQ(row.lower_energy_per_cm, 98.7654);
  EXPECT_EQ(row.upper_degeneracy, 21);
  EXPECT_EQ(row.tag, 99001);
  EXPECT_FALSE(row.measured);
  EXPECT_EQ(row.quantum_format, 303);
  EXPECT_EQ(row.quanta, 3);
  EXPECT_THAT(std::vector<int>(row.upper.begin(), row.upper.begin() + 3), ElementsAre(3, 1, 2));
  EXPECT_THAT(std::vector<int>(row.lower.begin(), row.lower.begin() + 3), ElementsAre(2, 1, 1));
}

TEST(LineList, DecodesLettersOfDegeneracy) {
  EXPECT_EQ(only_row(with(42, "999")).upper_degeneracy, 999);
  EXPECT_EQ(only_row(with(42, "A00")).upper_degeneracy, 1000);
  EXPECT_EQ(only_row(with(42, "A05")).upper_degeneracy, 1005);
  EXPECT_EQ(only_row(with(42, "B21")).upper_degeneracy, 1121);
  EXPECT_EQ(only_row(with(42, "Z99")).upper_degeneracy, 3599);
}

TEST(LineList, DecodesEveryQuantumNumberOfTwoCharacters) {
  const auto decoded = [](const char* text) {
    std::int16_t value = -999;
    EXPECT_TRUE(decode_quantum_number(text[0], text[1], value)) << text;
    return value;
  };
  EXPECT_EQ(decoded(" 7"), 7);
  EXPECT_EQ(decoded("00"), 0);
  EXPECT_EQ(decoded("99"), 99);
  EXPECT_EQ(decoded("A0"), 100);
  EXPECT_EQ(decoded("A4"), 104);
  EXPECT_EQ(decoded("Z9"), 359);
  EXPECT_EQ(decoded("-3"), -3);
  EXPECT_EQ(decoded("-9"), -9);
  EXPECT_EQ(decoded("a0"), -10);
  EXPECT_EQ(decoded("a4"), -14);
  EXPECT_EQ(decoded("b1"), -21);
  EXPECT_EQ(decoded("z9"), -269);
  std::int16_t value = 0;
  for (const char* text : {"  ", "7 ", "+3", "3-", "AA", "*1", "1.", "--"}) {
    EXPECT_FALSE(decode_quantum_number(text[0], text[1], value)) << text;
  }
}

TEST(LineList, ReadsFieldsThatRunTogether) {
  // Facts of this kind stand in published lists: "-180031404" and "664866.5624608.8969".
  LineListRow row = only_row(with(45, " -18003", with(52, "1404", with(62, " 0", with(74, " 0")))));
  EXPECT_TRUE(row.measured);
  EXPECT_EQ(row.tag, 18003);
  EXPECT_EQ(row.quantum_format, 1404);
  row = only_row(with(1, "  664866.5624608.8969"));
  EXPECT_EQ(row.frequency_mhz, 664866.5624);
  EXPECT_EQ(row.frequency_sigma_mhz, 608.8969);
}

TEST(LineList, ReadsNumbersWithoutAZeroBeforeThePoint) {
  const LineListRow row = only_row(with(14, "   .0277", with(32, "     .0000")));
  EXPECT_EQ(row.frequency_sigma_mhz, 0.0277);
  EXPECT_EQ(row.lower_energy_per_cm, 0.0);
}

TEST(LineList, ReadsMoreThanSixQuantumNumbersBeyondColumn80) {
  const std::string row =
      "   13985.2839  3.4492 -7.0805 3   74.2865 17  990013488 8 1 7 0 9 8 0 8 7 2 6 1 8 7 0 7";
  const LineListRow read = only_row(row);
  EXPECT_EQ(read.quanta, 8);
  EXPECT_THAT(std::vector<int>(read.upper.begin(), read.upper.begin() + 8),
              ElementsAre(8, 1, 7, 0, 9, 8, 0, 8));
  EXPECT_THAT(std::vector<int>(read.lower.begin(), read.lower.begin() + 8),
              ElementsAre(7, 2, 6, 1, 8, 7, 0, 7));
  EXPECT_TRUE(read.is_half_integer(4));  // J, the fourth from the last: H = 8
  EXPECT_FALSE(read.is_half_integer(7));
}

TEST(LineList, UnderstandsShortRowsLongRowsAndBothLineEnds) {
  const std::string stripped = kRow.substr(0, kRow.find_last_not_of(' ') + 1);
  const std::string text =
      stripped + "\r\n" + kRow + " a comment\n\n   \r\n" + kRow.substr(0, 79) + "\n" + kRow;
  const LineList list = parse_line_list(text, "made.cat");
  ASSERT_EQ(list.rows.size(), 4u);
  for (const LineListRow& row : list.rows) EXPECT_EQ(row, list.rows[0]);
  EXPECT_THAT(list.line_numbers, ElementsAre(1u, 2u, 5u, 6u));
  EXPECT_TRUE(list.warnings.empty());
}

TEST(LineList, KeepsRowsThatArePrintedTwice) {
  EXPECT_EQ(parse_line_list(kRow + "\n" + kRow + "\n", "made.cat").rows.size(), 2u);
}

TEST(LineList, TakesANegativeUncertaintyForWavenumbers) {
  const LineList list = parse_line_list(with(1, "    2143.2711 -0.0005"), "made.cat");
  // c = 29979.2458 MHz per 1/cm exactly.
  EXPECT_DOUBLE_EQ(list.rows[0].frequency_mhz, 2143.2711 * 29979.2458);
  EXPECT_DOUBLE_EQ(list.rows[0].frequency_sigma_mhz, 0.0005 * 29979.2458);
  ASSERT_EQ(list.warnings.size(), 1u);
  EXPECT_THAT(list.warnings[0], HasSubstr("cm-1"));
}

TEST(LineList, WarnsOfSeveralTags) {
  const LineList list = parse_line_list(kRow + "\n" + with(45, "  99002") + "\n", "made.cat");
  ASSERT_EQ(list.warnings.size(), 1u);
  EXPECT_THAT(list.warnings[0], HasSubstr("99001, 99002"));
}

std::string printed_quantum(int value) {
  if (value > 99) return fmt::format("{}{}", static_cast<char>('A' + value / 10 - 10), value % 10);
  if (value < -9) return fmt::format("{}{}", static_cast<char>('a' - value / 10 - 1), -value % 10);
  return fmt::format("{:2}", value);
}

std::string printed(const LineListRow& row) {
  std::string text =
      fmt::format("{:13.4f}{:8.4f}{:8.4f}{:2}{:10.4f}", row.frequency_mhz, row.frequency_sigma_mhz,
                  row.log10_intensity, row.degrees_of_freedom, row.lower_energy_per_cm);
  const int g = row.upper_degeneracy;
  text += g < 1000 ? fmt::format("{:3}", g)
                   : fmt::format("{}{:02}", static_cast<char>('A' + g / 100 - 10), g % 100);
  text += fmt::format("{:7}{:4}", row.measured ? -row.tag : row.tag, row.quantum_format);
  const std::size_t n = static_cast<std::size_t>(row.quanta);
  for (std::size_t i = 0; i < n; ++i) text += printed_quantum(row.upper[i]);
  text.resize(std::max<std::size_t>(text.size(), n > 6 ? 0 : 67), ' ');
  for (std::size_t i = 0; i < n; ++i) text += printed_quantum(row.lower[i]);
  return text;
}

TEST(LineList, ReadsBackWhatIsPrintedInItsFormat) {
  std::mt19937_64 random(11);
  const auto draw = [&](int low, int high) { return std::uniform_int_distribution<int>(low, high)(random); };
  const auto decimal = [&](int low, int high) { return draw(low, high) / 10000.0; };
  for (int i = 0; i < 20000; ++i) {
    LineListRow row;
    row.frequency_mhz = 10000.0 * draw(0, 9999) + decimal(1, 99999999);
    row.frequency_sigma_mhz = decimal(0, 9999999);
    row.log10_intensity = decimal(-999999, 99999);
    row.degrees_of_freedom =
        static_cast<std::int8_t>(std::array{0, 2, 3}[static_cast<std::size_t>(draw(0, 2))]);
    row.lower_energy_per_cm = decimal(0, 999999999);
    row.upper_degeneracy = draw(1, 3599);
    row.tag = draw(1, 999999);
    row.measured = draw(0, 1) == 1;
    row.quanta = static_cast<std::int8_t>(draw(1, 9));
    row.quantum_format = static_cast<std::int16_t>(10 * draw(0, 999) + row.quanta);
    for (std::size_t k = 0; k < static_cast<std::size_t>(row.quanta); ++k) {
      row.upper[k] = static_cast<std::int16_t>(draw(-269, 359));
      row.lower[k] = static_cast<std::int16_t>(draw(-269, 359));
    }
    LineListRow read = only_row(printed(row));
    EXPECT_NEAR(read.frequency_mhz, row.frequency_mhz, 1e-8);  // the sum above rounds, the text does not
    read.frequency_mhz = row.frequency_mhz;
    ASSERT_EQ(read, row) << printed(row);
  }
}

// ---- what is refused, and how

struct BrokenRow {
  const char* name;
  std::string text;
  std::size_t line;
  std::size_t column;
  const char* found;
  const char* expected;
};

class BrokenLineList : public testing::TestWithParam<BrokenRow> {};

TEST_P(BrokenLineList, NamesLineColumnFaultAndCure) {
  const BrokenRow& broken = GetParam();
  try {
    (void)parse_line_list(broken.text, "broken.cat");
    FAIL() << "the broken list was accepted";
  } catch (const InputError& error) {
    EXPECT_EQ(error.place().file, "broken.cat");
    EXPECT_EQ(error.place().line, broken.line) << error.what();
    EXPECT_EQ(error.place().column, broken.column) << error.what();
    EXPECT_THAT(error.complaint().found, HasSubstr(broken.found));
    EXPECT_THAT(error.complaint().expected, HasSubstr(broken.expected));
  }
}

/// A vector, not testing::Values: the latter takes the compiler a minute.
std::vector<BrokenRow> broken_rows() {
  return {
      {"Empty", "", 0, 0, "holds no rows", "line list"},
      {"OnlyBlankLines", "\n   \n\r\n", 0, 0, "holds no rows", "line list"},
      {"TextInTheFrequency", with(3, "abc"), 1, 1, "(frequency) hold '  abc345.6789'", "decimal point"},
      {"FrequencyWithoutPoint", with(1, "     12345678"), 1, 1, "(frequency)", "decimal point"},
      {"FrequencyOfZero", with(1, "       0.0000"), 1, 1, "(frequency)", "above 0"},
      {"NegativeFrequency", with(1, "  -12345.6789"), 1, 1, "(frequency)", "above 0"},
      {"BlankUncertainty", kRow + "\n" + with(14, "        "), 2, 14, "columns 14-21 (uncertainty)",
       "number"},
      {"UncertaintyOfStars", with(14, "********"), 1, 14, "(uncertainty) hold '********'", "number"},
      {"WavenumberAboveAllReason", with(1, "  115271.2018 -0.0005"), 1, 14, "uncertainty is negative", "MHz"},
      {"IntensityWithAComma", with(22, " -4,5678"), 1, 22, "(log10 of intensity)", "decimal point"},
      {"IntensityIsNotANumber", with(22, "     NaN"), 1, 22, "hold '     NaN'", "number"},
      {"UnknownDegreesOfFreedom", with(30, " 7"), 1, 30, "(degrees of freedom) hold ' 7'", "0, 2 or 3"},
      {"EnergyWithAGap", with(32, "   98 .765"), 1, 32, "(lower-state energy)", "decimal point"},
      {"EnergyInExponents", with(32, " 9.8765E+1"), 1, 32, "(lower-state energy)", "decimal point"},
      {"DegeneracyOfZero", with(42, "  0"), 1, 42, "(upper-state degeneracy)", "above 0"},
      {"DegeneracyOfSmallLetters", with(42, "a05"), 1, 42, "(upper-state degeneracy)", "'A05' for 1005"},
      {"TagWithALetter", with(45, "  99x01"), 1, 45, "(species tag)", "whole number"},
      {"FormatWithoutQuantumNumbers", with(52, " 300"), 1, 52, "(quantum-number format)", "1 to 9"},
      {"MissingUpperQuantumNumber", with(58, "  "), 1, 58, "quantum number of the upper state", "'A4' (104)"},
      {"MissingLowerQuantumNumbers", kRow.substr(0, 70), 1, 70, "quantum number of the lower state", "'12'"},
      {"RowCutShort", kRow + "\n\n" + kRow.substr(0, 40), 3, 40, "ends in column 40", "69 columns"},
      {"TabsForBlanks", with(1, "\t\t"), 1, 1, "(frequency)", "decimal point"},
      {"BytesThatAreNoText", with(45, std::string("\xff\x00\x1b", 3)), 1, 45, "(species tag)",
       "whole number"},
      {"ACommaSeparatedTable", "frequency,err,lgint,dr,elow,gup,tag,qnfmt,qn_upper,qn_lower,name", 1, 1,
       "(frequency) hold 'frequency,err'", "decimal point"}};
}

INSTANTIATE_TEST_SUITE_P(Rows, BrokenLineList, testing::ValuesIn(broken_rows()),
                         [](const auto& broken) { return std::string(broken.param.name); });

TEST(LineList, RecognisesRowsOfASearchResult) {
  try {
    (void)parse_line_list("  115271.2018     0.0005    -7.1425 2    0.0000  3 -28503 101 1           0",
                          "found.cat");
    FAIL() << "columns of another layout were accepted";
  } catch (const InputError& error) {
    EXPECT_THAT(error.what(), HasSubstr("search result"));
  }
}

// ---- published lists: what stands in them, row by row counted by other means (wc, cut)

struct Published {
  const char* file;
  std::size_t rows;
  std::int32_t tag;
  double first_frequency_mhz;
  double last_frequency_mhz;
};

class PublishedLineList : public testing::TestWithParam<Published> {};

TEST_P(PublishedLineList, IsReadWhole) {
  const auto path = test::reference_file(std::string("line_lists/") + GetParam().file);
  if (path.empty()) GTEST_SKIP() << "no reference files here";
  const LineList list = parse_line_list(read_file(path.string()), path.filename().string());
  EXPECT_EQ(list.rows.size(), GetParam().rows);
  EXPECT_EQ(list.rows.front().frequency_mhz, GetParam().first_frequency_mhz);
  EXPECT_EQ(list.rows.back().frequency_mhz, GetParam().last_frequency_mhz);
  for (const LineListRow& row : list.rows) EXPECT_EQ(row.tag, GetParam().tag);
  EXPECT_TRUE(list.warnings.empty());
}

INSTANTIATE_TEST_SUITE_P(
    Files, PublishedLineList,
    testing::Values(Published{"c018003_H2O_sample.cat", 52, 18003, 8006.5805, 826549.8880},
                    Published{"c058501_H2C2S.cat", 3, 58501, 114.9627, 689.7699},
                    Published{"ch3cn_tag041505_v2008.cat", 3357, 41505, 18397.7830, 1806588.3161},
                    Published{"co_tag028503_v2008.cat", 95, 28503, 115271.2021, 10329359.5031},
                    Published{"csf_v2008.cat", 99, 146001, 10979.8593, 32940.2524},
                    Published{"h2coh_tag031515_v2008_87col.cat", 6241, 31515, 13985.2839, 999931.3403},
                    Published{"h2s_tag034002_ref79col.cat", 1513, 34002, 35028.1777, 9979095.8362},
                    Published{"h2s_tag034002_v2008.cat", 1513, 34002, 35028.1777, 9979095.8362},
                    Published{"o2_v2008.cat", 170, 32508, 41903.3427, 11157474.7716},
                    Published{"oc33s_tag061999_ref79col.cat", 427, 61999, 5.9262, 11740.7058},
                    Published{"oc33s_tag061999_v2008.cat", 427, 61999, 5.9262, 11740.7058}));

TEST(LineList, DecodesNegativeQuantumNumbersOfAPublishedList) {
  const auto path = test::reference_file("line_lists/ch3cn_tag041505_v2008.cat");
  if (path.empty()) GTEST_SKIP() << "no reference files here";
  const LineList list = parse_line_list(read_file(path.string()), "ch3cn");
  // Line 145: "... 4150513041312 013    12a2 012": K = 12 above, K = -12 below.
  const LineListRow& row = list.rows.at(144);
  EXPECT_THAT(std::vector<int>(row.upper.begin(), row.upper.begin() + 4), ElementsAre(13, 12, 0, 13));
  EXPECT_THAT(std::vector<int>(row.lower.begin(), row.lower.begin() + 4), ElementsAre(12, -12, 0, 12));
}

}  // namespace
}  // namespace trotline
