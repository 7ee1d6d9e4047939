#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <regex>
#include <sstream>

#include <trotline/base/text.hpp>
#include <trotline/report/display_text.hpp>
#include <trotline/report/terminal.hpp>

#include "report/invented_results.hpp"

namespace trotline {
namespace {

using testing::AllOf;
using testing::HasSubstr;
using testing::Not;
using namespace testing_room;

std::vector<std::string> lines_of(const std::string& text) {
  std::istringstream stream(text);
  std::vector<std::string> lines;
  for (std::string line; std::getline(stream, line);) lines.push_back(line);
  return lines;
}

/// The line that holds `word`, or an empty text.
std::string line_with(const std::string& text, const std::string& word) {
  for (const std::string& line : lines_of(text)) {
    if (line.find(word) != std::string::npos) return line;
  }
  return {};
}

std::vector<Result> results_of_every_kind() {
  Result unbounded = invented_result();
  unbounded.status = Status::unbounded;
  Result not_converged = invented_result();
  not_converged.status = Status::not_converged;
  not_converged.temperature_k = not_converged.column_density_cm2 = Estimate{};
  return {invented_result({.limits = 2, .unused = 1}),
          one_line_result(),
          not_thermal_result(),
          only_limits_result(),
          unbounded,
          not_converged};
}

TEST(TerminalReport, BeginsWithSourceTemperatureAndColumn) {
  Result result = invented_result();
  result.temperature_k = {62.347, 3.09, 59.31, 65.48, 56.4, 69.1};
  result.column_density_cm2 = {1.2341e14, 4.3e12, 1.192e14, 1.279e14, 1.15e14, 1.32e14};
  const std::string text = terminal_report(result);
  EXPECT_EQ(lines_of(text).front(), "CH₃CN toward Lantern Cloud 4");
  // Rounded by hand to two digits of the error.
  EXPECT_THAT(text,
              AllOf(HasSubstr("62.3 ± 3.1 K"), HasSubstr("68 %  59.3 … 65.5 K    95 %  56.4 … 69.1 K"),
                    HasSubstr("(1.234 ± 0.043) × 10¹⁴ cm⁻²"), HasSubstr("(1.192 … 1.279) × 10¹⁴ cm⁻²")));
  EXPECT_LT(text.find("N_tot"), text.find("\n\n", text.find("\n\n") + 1))
      << "T and N stand in the first block";
}

TEST(TerminalReport, SaysWhatTheNumbersRestOn) {
  const std::string text = terminal_report(invented_result());
  EXPECT_THAT(text, AllOf(HasSubstr("LTE: one temperature"), HasSubstr("optically thin"),
                          HasSubstr("2.7255 K"), HasSubstr("the source fills every beam"), HasSubstr("Q(")));
  Result sized = invented_result();
  sized.source_size_arcsec = 12.0;
  sized.lines[0].filling = 0.21;
  EXPECT_THAT(terminal_report(sized), HasSubstr("source size 12 arcsec (beam filling 0.21 to 1.0)"));
}

TEST(TerminalReport, WordsEveryStatusApart) {
  const auto results = results_of_every_kind();
  EXPECT_THAT(terminal_report(results[1]),
              AllOf(HasSubstr("the lines have one upper energy"), HasSubstr("T [K]"),
                    HasSubstr("(1.81 ± 0.15) × 10¹⁴"), Not(HasSubstr("T_rot"))));
  EXPECT_THAT(terminal_report(results[2]),
              AllOf(HasSubstr("does not fall with E_u"),
                    HasSubstr("0.00120 ± 0.00080 per K, 1.5 errors above zero"), Not(HasSubstr("T_rot"))));
  EXPECT_THAT(terminal_report(results[3]), AllOf(HasSubstr("No line is detected"), Not(HasSubstr("T_rot"))));
  EXPECT_THAT(terminal_report(results[4]), AllOf(HasSubstr("outside the range"), HasSubstr("T_rot")));
  EXPECT_THAT(terminal_report(results[5]), AllOf(HasSubstr("did not converge"), Not(HasSubstr("T_rot"))));
}

TEST(TerminalReport, GivesLimitsOnTheColumnWhereNothingIsDetected) {
  Result result = only_limits_result();
  result.columns_at_temperatures = {{20.0, 3.46e13, kNotKnown, true}};
  EXPECT_THAT(terminal_report(result), HasSubstr("< 3.5 × 10¹³"));
}

TEST(TerminalReport, GivesATemperatureOutsideTheRangeOfQWithoutInventingAColumn) {
  Result result = invented_result();
  result.status = Status::unbounded;
  result.temperature_k = {480.2, 31.4};
  result.column_density_cm2 = result.log10_column_density_cm2 = Estimate{};
  EXPECT_THAT(terminal_report(result),
              AllOf(HasSubstr("T_rot   480 ± 31 K"), Not(HasSubstr("N_tot")), Not(HasSubstr("no bound"))));
}

TEST(TerminalReport, SaysThatAStatedTemperatureWasNotFitted) {
  Result result = invented_result();
  result.temperature_fixed = true;
  result.temperature_k = {75.0, 0.0};
  EXPECT_THAT(terminal_report(result),
              AllOf(HasSubstr("75 K, stated and not fitted"), Not(HasSubstr("T_rot"))));
}

TEST(TerminalReport, JudgesTheScatterByP) {
  Result result = invented_result();
  result.p_value = 0.5;
  EXPECT_THAT(terminal_report(result), HasSubstr("p = 0.50: the scatter is what"));
  result.p_value = 3.2e-5;
  EXPECT_THAT(terminal_report(result), HasSubstr("p = 3 × 10⁻⁵: the lines scatter\n          more than"));
  result.p_value = 0.0;
  EXPECT_THAT(terminal_report(result), HasSubstr("p < 10⁻³⁰⁰"));
  result.dof = 0;
  result.p_value = kNotKnown;
  EXPECT_THAT(terminal_report(result), HasSubstr("nothing can be said of the goodness of fit"));
}

TEST(TerminalReport, ShowsEachLineWithObservedModelAndResidual) {
  Result result = invented_result({.lines = 3});
  LineResult& line = result.lines[1];
  line.intensity_k_km_s = 4.213;
  line.intensity_error_k_km_s = 0.084;
  line.model_intensity_k_km_s = 4.3391;
  line.residual_sigma = -1.5;
  const std::string row = line_with(terminal_report(result), "5(1)–4(1)");
  EXPECT_THAT(row,
              AllOf(HasSubstr("4.213 ± 0.084"), HasSubstr("4.339"), HasSubstr("−1.5"), HasSubstr("▐█│")));
}

TEST(TerminalReport, MarksLimitsAndThoseBelowTheModel) {
  Result result = invented_result({.limits = 2});
  result.lines[7].intensity_k_km_s = 0.0421;
  result.lines[8].intensity_k_km_s = 0.9 * result.lines[8].model_intensity_k_km_s;
  const std::string text = terminal_report(result);
  EXPECT_THAT(line_with(text, "8(2)–7(2)"), AllOf(HasSubstr("< 0.0421"), HasSubstr("limit")));
  EXPECT_THAT(line_with(text, "8(3)–7(3)"), HasSubstr("limit !"));
  EXPECT_THAT(text, HasSubstr("limit !: the model lies above the limit"));
}

TEST(TerminalReport, ListsWhatWasNotUsedWithItsReasonAndPlace) {
  const std::string text = terminal_report(invented_result({.unused = 2}));
  EXPECT_THAT(text, HasSubstr("5(0)–4(0) (table line 2), 5(1)–4(1) (table line 3) – left out by request"));
  EXPECT_THAT(terminal_report(invented_result()), Not(HasSubstr("Not used")));
}

TEST(TerminalReport, GivesTheRatioOfSpinIsomersWithTheirCovariance) {
  Result result = invented_result();
  const double t = 40.0;
  result.components = {{"ortho", {t, 1.0}, {3e12, 3e11}, {}}, {"para", {t, 1.0}, {1e12, 1e11}, {}}};
  result.parameters = {{"ln_column_density_cm2_ortho", std::log(3e12), 0.10},
                       {"ln_column_density_cm2_para", std::log(1e12), 0.10},
                       {"ln_temperature_k", std::log(t), 0.025}};
  result.parameter_covariance = {{0.0100, 0.0082, 0.0}, {0.0082, 0.0100, 0.0}, {0.0, 0.0, 0.000625}};
  // 3 sqrt(0.01 + 0.01 - 2 0.0082) = 0.18 by hand; without the covariance it were 0.42.
  EXPECT_THAT(terminal_report(result), HasSubstr("N(ortho)/N(para) = 3.00 ± 0.18"));
  result.parameter_covariance[0][1] = result.parameter_covariance[1][0] = kNotKnown;
  EXPECT_THAT(terminal_report(result), Not(HasSubstr("N(ortho)/N(para)")));
  result.components.clear();
  EXPECT_THAT(terminal_report(result), Not(HasSubstr("N(ortho)/N(para)")));
}

TEST(TerminalReport, ListsChecksAndWarnings) {
  Result result = invented_result();
  result.warnings = {"the lines at 92 GHz have no beam"};
  result.checks[1].outcome = Outcome::fail;
  EXPECT_THAT(terminal_report(result),
              AllOf(HasSubstr("! the lines at 92 GHz have no beam"), HasSubstr("! fail: curvature"),
                    HasSubstr("? not testable: limits")));
}

TEST(TerminalReport, FitsEveryWidthWithEveryText) {
  std::vector<Result> results = results_of_every_kind();
  for (const std::string& text : hostile_texts()) results.push_back(with_hostile_text(results[0], text));
  for (const Result& result : results) {
    for (const std::size_t width : {40U, 55U, 66U, 72U, 80U, 132U}) {
      for (const std::string& line : lines_of(terminal_report(result, {.width = width}))) {
        EXPECT_LE(display_width(line), width) << line;
      }
    }
  }
}

TEST(TerminalReport, LetsNoControlCharacterThrough) {
  for (const std::string& text : hostile_texts()) {
    const std::string shown =
        terminal_report(with_hostile_text(invented_result({.limits = 1, .unused = 1}), text));
    EXPECT_TRUE(is_utf8(shown));
    const auto is_control = [](char c) { return (c >= 0 && c < 0x20 && c != '\n') || c == 0x7F; };
    EXPECT_EQ(std::count_if(shown.begin(), shown.end(), is_control), 0) << text;
    EXPECT_EQ(shown.find("\u202E"), std::string::npos);
  }
}

TEST(TerminalReport, UsesOnlyItsOwnColourCodes) {
  Result result = with_hostile_text(invented_result({.unused = 1}), "\x1b[31mred");
  result.checks[0].outcome = Outcome::fail;
  const std::string coloured = terminal_report(result, {.colour = true});
  EXPECT_THAT(coloured, HasSubstr("\x1b[1m"));
  const std::string stripped = std::regex_replace(coloured, std::regex("\x1b\\[(0|1|2|31|33)m"), "");
  EXPECT_EQ(stripped, terminal_report(result)) << "colour adds nothing but colour";
}

TEST(TerminalReport, IsAsciiWhereAsked) {
  for (const Result& result : results_of_every_kind()) {
    const std::string text = terminal_report(result, {.unicode = false});
    EXPECT_TRUE(std::all_of(text.begin(), text.end(), [](char c) { return c > 0; })) << text;
  }
}

TEST(TerminalReport, StandsAResultOfWhichNothingIsKnown) {
  EXPECT_THAT(terminal_report(Result{}), HasSubstr("did not converge"));
  Result empty;
  empty.status = Status::done;
  EXPECT_THAT(terminal_report(empty), HasSubstr("not known"));
}

}  // namespace
}  // namespace trotline
