// Expected texts: rounded by hand from the rule "two significant digits of the error, value to the same
// decimals".
#include <gtest/gtest.h>

#include <cmath>
#include <limits>
#include <random>
#include <regex>

#include <trotline/report/rounding.hpp>

namespace trotline {
namespace {

constexpr double kNan = std::numeric_limits<double>::quiet_NaN();
constexpr double kInfinity = std::numeric_limits<double>::infinity();

TEST(Rounding, GivesTheErrorTwoDigitsAndTheValueTheSameDecimals) {
  EXPECT_EQ(value_with_error(62.347, 3.09), "62.3 ± 3.1");
  EXPECT_EQ(value_with_error(62.347, 0.309), "62.35 ± 0.31");
  EXPECT_EQ(value_with_error(62.347, 30.9), "62 ± 31");
  EXPECT_EQ(value_with_error(-0.0123, 0.0045), "−0.0123 ± 0.0045");
  EXPECT_EQ(value_with_error(0.0, 1.0), "0.0 ± 1.0");
}

TEST(Rounding, RoundsToTensWhereTheErrorIsAboveNinetyNine) {
  EXPECT_EQ(value_with_error(12345.0, 230.0), "12350 ± 230");
  EXPECT_EQ(value_with_error(12345.0, 2345.0), "12300 ± 2300");
}

TEST(Rounding, KeepsTwoDigitsWhenTheErrorRoundsUpToAPowerOfTen) {
  EXPECT_EQ(value_with_error(62.347, 0.0996), "62.35 ± 0.10");
  EXPECT_EQ(value_with_error(62.347, 9.96), "62 ± 10");
  EXPECT_EQ(value_with_error(62.347, 99.6), "60 ± 100");
}

TEST(Rounding, TakesThePowerOfTenOutOfBoth) {
  EXPECT_EQ(value_with_error(1.2341e14, 4.3e12), "(1.234 ± 0.043) × 10¹⁴");
  EXPECT_EQ(value_with_error(1.2341e14, 4.3e12, Glyphs::ascii), "(1.234 +/- 0.043) x 10^14");
  EXPECT_EQ(value_with_error(1.2e-5, 3e-6), "(1.20 ± 0.30) × 10⁻⁵");
}

TEST(Rounding, ChoosesThePowerAfterRounding) {
  EXPECT_EQ(value_with_error(9.9996e13, 4.3e11), "(1.0000 ± 0.0043) × 10¹⁴");
  EXPECT_EQ(value_with_error(9.996e13, 4.3e12), "(1.000 ± 0.043) × 10¹⁴");
}

TEST(Rounding, UsesThePowerOfTheLargerOfValueAndError) {
  EXPECT_EQ(value_with_error(3e12, 2.2e14), "(0.0 ± 2.2) × 10¹⁴");
}

TEST(Rounding, WritesNoNegativeZero) {
  EXPECT_EQ(value_with_error(-0.004, 1.2), "0.0 ± 1.2");
  EXPECT_EQ(fixed_decimals(-0.04, 1), "0.0");
  EXPECT_EQ(fixed_decimals(-0.06, 1), "−0.1");
}

TEST(Rounding, SaysWhatIsNotKnown) {
  EXPECT_EQ(value_with_error(kNan, 1.0), "not known");
  EXPECT_EQ(value_with_error(kInfinity, 1.0), "unbounded");
  EXPECT_EQ(value_with_error(62.347, kNan), "62.35 (error not known)");
  EXPECT_EQ(value_with_error(62.347, -1.0), "62.35 (error not known)");
  EXPECT_EQ(value_with_error(62.347, kInfinity), "62.35 (error not known)");
  EXPECT_EQ(significant(kNan, 2), "not known");
  EXPECT_EQ(fixed_decimals(kNan, 2), "–");
  EXPECT_EQ(fixed_decimals(kNan, 2, Glyphs::ascii), "-");
}

TEST(Rounding, TakesAnErrorOfZeroForAnExactValue) {
  EXPECT_EQ(value_with_error(75.0, 0.0), "75");
  EXPECT_EQ(value_with_error(2.7255, 0.0), "2.7255");
  EXPECT_EQ(value_with_error(0.0, 0.0), "0");
  EXPECT_EQ(value_with_error(1.25e14, 0.0), "1.25 × 10¹⁴");
  EXPECT_EQ(value_with_error(1e14, 1e-3), "1 × 10¹⁴");  // the error is below what a double resolves
}

TEST(Rounding, HoldsAtTheEndsOfTheRangeOfDoubles) {
  EXPECT_EQ(value_with_error(1.5e308, 1.2e307), "(1.50 ± 0.12) × 10³⁰⁸");
  EXPECT_EQ(value_with_error(2.5e-308, 1.2e-309), "(2.50 ± 0.12) × 10⁻³⁰⁸");
  EXPECT_EQ(significant(5e-324, 2), "4.9 × 10⁻³²⁴");  // the least double is 4.94e-324
}

TEST(Rounding, WritesTwoErrorsWithTheDecimalsOfTheSmaller) {
  EXPECT_EQ(value_with_errors(62.347, 2.94, 3.41), "62.3 (+3.4, −2.9)");
  EXPECT_EQ(value_with_errors(62.347, 2.94, 12.3), "62.3 (+12.3, −2.9)");
  EXPECT_EQ(value_with_errors(1.234e14, 4.3e12, 6.1e12), "(1.234 (+0.061, −0.043)) × 10¹⁴");
  EXPECT_EQ(value_with_errors(62.347, 3.09, 3.11), "62.3 ± 3.1");
}

TEST(Rounding, SaysWhichSideOfTheValueHasNoBound) {
  EXPECT_EQ(value_with_errors(62.347, 2.94, kNan), "62.3 (above: no bound, −2.9)");
  EXPECT_EQ(value_with_errors(62.347, kNan, 3.4), "62.3 (+3.4, below: no bound)");
  EXPECT_EQ(value_with_errors(62.347, kNan, kNan), "62.35 (error not known)");
}

TEST(Rounding, WritesIntervalsWithTheDecimalsOfTheError) {
  EXPECT_EQ(rounded_interval(59.31, 65.48, 3.09), "59.3 … 65.5");
  EXPECT_EQ(rounded_interval(1.192e14, 1.279e14, 4.3e12), "(1.192 … 1.279) × 10¹⁴");
  EXPECT_EQ(rounded_interval(59.31, 65.48, kNan, Glyphs::ascii), "59.3 .. 65.5");
}

TEST(Rounding, SaysWhenAnIntervalHasNoEnd) {
  EXPECT_EQ(rounded_interval(59.31, kNan, 3.09), "> 59.3");
  EXPECT_EQ(rounded_interval(kNan, 65.48, 3.09), "< 65.5");
  EXPECT_EQ(rounded_interval(-kInfinity, kInfinity, 3.09), "no bound");
}

TEST(Rounding, NeverHidesAnEndBehindAZero) {
  EXPECT_EQ(rounded_interval(1.2e10, 2.13e14, 5.0e13), "1.2 × 10¹⁰ … 2.1 × 10¹⁴");
  EXPECT_EQ(rounded_interval(0.0, 2.13, 0.5), "0.00 … 2.13");
  EXPECT_EQ(rounded_interval(1.2e10, kNan, 5.0e13), "> 1.2 × 10¹⁰");
}

/// Reads "(1.234 ± 0.043) × 10^14" in ASCII back to two numbers and the decimals of both.
struct ReadBack {
  double value = 0.0;
  double error = 0.0;
  std::size_t value_decimals = 0;
  std::size_t error_decimals = 0;
};

ReadBack read_back(const std::string& text) {
  static const std::regex kForm(R"(\(?(-?\d+)(?:\.(\d+))? \+/- (\d+)(?:\.(\d+))?\)?(?: x 10\^(-?\d+))?)");
  std::smatch match;
  if (!std::regex_match(text, match, kForm)) throw std::runtime_error("not a rounded pair: " + text);
  const std::string power = "e" + (match[5].matched ? match[5].str() : "0");
  return {std::stod(match[1].str() + "." + match[2].str() + power),
          std::stod(match[3].str() + "." + match[4].str() + power), match[2].str().size(),
          match[4].str().size()};
}

TEST(Rounding, MovesNoValueByMoreThanHalfOfItsLastDigit) {
  std::mt19937_64 random(20260112);
  std::uniform_real_distribution<double> power(-25.0, 25.0);
  std::uniform_real_distribution<double> ratio(-9.0, 1.0);
  for (int draw = 0; draw < 20000; ++draw) {
    const double value = std::pow(10.0, power(random)) * (draw % 2 == 0 ? 1.0 : -1.0);
    const double error = std::abs(value) * std::pow(10.0, ratio(random));
    const std::string text = value_with_error(value, error, Glyphs::ascii);
    const ReadBack back = read_back(text);
    EXPECT_EQ(back.value_decimals, back.error_decimals) << text;
    // Two significant digits: the last one is worth at most a tenth of the error, so half of it a twentieth.
    EXPECT_LE(std::abs(back.error - error), 0.0501 * error) << text;
    EXPECT_LE(std::abs(back.value - value), 0.0501 * error) << text << " from " << value;
  }
}

}  // namespace
}  // namespace trotline
