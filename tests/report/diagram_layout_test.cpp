#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/report/diagram_layout.hpp>
#include <trotline/report/diagram_text.hpp>
#include <trotline/report/text_measure.hpp>

#include "report/invented_results.hpp"

namespace trotline {
namespace {

using namespace testing_room;
using testing::AllOf;
using testing::Contains;
using testing::ElementsAre;
using testing::HasSubstr;

std::vector<Result> results_of_every_kind() {
  return {invented_result({.lines = 10, .limits = 3, .unused = 1}),
          one_line_result(),
          not_thermal_result(),
          only_limits_result(),
          Result{},
          invented_result({.lines = 30}),
          invented_result({.lines = 8, .relative_error = 0.8, .ladders = false}),
          invented_result({.lines = 12, .temperature_k = 25, .relative_error = 0.005, .ladders = false})};
}

double page_x(const DiagramLayout& layout, double energy_k) {
  const double share = (energy_k - layout.energy.low) / (layout.energy.high - layout.energy.low);
  return layout.diagram_mm.left + share * (layout.diagram_mm.right - layout.diagram_mm.left);
}

double page_y(const DiagramLayout& layout, double ln_nu_gu) {
  const double share = (ln_nu_gu - layout.ln_nu_gu.low) / (layout.ln_nu_gu.high - layout.ln_nu_gu.low);
  return layout.diagram_mm.bottom + share * (layout.diagram_mm.top - layout.diagram_mm.bottom);
}

TEST(DiagramLayout, HoldsEveryPointBarAndArrowInsideItsPanels) {
  for (const Result& result : results_of_every_kind()) {
    const DiagramLayout layout = lay_out_diagram(result);
    for (const DiagramPoint& point : layout.points) {
      EXPECT_GT(point.energy_k, layout.energy.low);
      EXPECT_LT(point.energy_k, layout.energy.high);
      for (const double value : {point.ln_nu_gu, point.bar_low, point.bar_high, point.arrow_end}) {
        EXPECT_GE(value, layout.ln_nu_gu.low);
        EXPECT_LE(value, layout.ln_nu_gu.high);
      }
      EXPECT_TRUE(std::isnan(point.residual) || std::abs(point.residual) <= layout.residual.high);
    }
  }
}

TEST(DiagramLayout, KeepsThePanelsApartAndOnThePage) {
  for (const Result& result : results_of_every_kind()) {
    const DiagramLayout layout = lay_out_diagram(result);
    EXPECT_GT(layout.residuals_mm.bottom, 0.0);
    EXPECT_GT(layout.diagram_mm.bottom, layout.residuals_mm.top);
    EXPECT_LT(layout.diagram_mm.top, layout.size.height_mm);
    EXPECT_EQ(layout.diagram_mm.left, layout.residuals_mm.left) << "they share the axis of energy";
    EXPECT_EQ(layout.diagram_mm.right, layout.residuals_mm.right);
    EXPECT_LT(layout.diagram_mm.right, layout.size.width_mm);
  }
}

TEST(DiagramLayout, TellsFittedLimitAndLeftOutApart) {
  const DiagramLayout layout = lay_out_diagram(invented_result({.lines = 10, .limits = 3, .unused = 2}));
  const auto count = [&](PointKind kind) {
    return std::count_if(layout.points.begin(), layout.points.end(),
                         [&](const DiagramPoint& point) { return point.kind == kind; });
  };
  EXPECT_EQ(count(PointKind::fitted), 5);
  EXPECT_EQ(count(PointKind::limit), 3);
  EXPECT_EQ(count(PointKind::left_out), 2);
  for (const DiagramPoint& point : layout.points) {
    EXPECT_EQ(point.arrow_end < point.ln_nu_gu, point.kind == PointKind::limit)
        << "arrows belong to limits, downwards";
  }
}

// Variance of a straight line a + b x: var(a) + 2 x cov(a,b) + x^2 var(b). At x = 0 that is var(a); at its
// minimum, x = -cov/var(b), it is var(a) - cov^2/var(b).
TEST(DiagramLayout, DrawsTheBandFromTheCovarianceOfTheLine) {
  const Result result = invented_result({.lines = 9, .relative_error = 0.3});
  const DiagramLine& line = result.diagram_line;
  const DiagramLayout layout = lay_out_diagram(result);
  ASSERT_FALSE(layout.fit.empty());
  const DiagramSample& first = layout.fit.front();
  ASSERT_EQ(first.energy_k, 0.0);
  EXPECT_NEAR(first.center, line.intercept, 1e-12);
  EXPECT_NEAR((first.high - first.low) / 2, std::sqrt(line.intercept_variance), 1e-12);
  double narrowest = HUGE_VAL;
  for (const DiagramSample& sample : layout.fit)
    narrowest = std::min(narrowest, (sample.high - sample.low) / 2);
  const double least =
      std::sqrt(line.intercept_variance - line.covariance * line.covariance / line.slope_variance);
  // The samples miss the minimum by at most half a step: (step/2)^2 var(b) in variance.
  const double step = (layout.energy.high - layout.energy.low) / 120;
  EXPECT_GE(narrowest, least * (1 - 1e-12));
  EXPECT_LE(narrowest, std::sqrt(least * least + step * step / 4 * line.slope_variance));
}

TEST(DiagramLayout, DrawsNoLineWhereThereIsNone) {
  EXPECT_TRUE(lay_out_diagram(one_line_result()).fit.empty());
  EXPECT_FALSE(lay_out_diagram(not_thermal_result()).fit.empty()) << "the slope is there to see";
}

TEST(DiagramLayout, CutsResidualsBeyondThePanelAndSaysSo) {
  Result result = invented_result();
  result.lines[2].residual_sigma = -40.0;
  const DiagramLayout layout = lay_out_diagram(result);
  EXPECT_TRUE(layout.points[2].residual_is_cut);
  EXPECT_LT(layout.points[2].residual, 0.0);
  EXPECT_FALSE(layout.points[1].residual_is_cut);
}

TEST(DiagramLayout, DoesNotLetOneHugeErrorPressThePointsTogether) {
  Result result = invented_result();
  result.lines[4].ln_nu_gu_error = 50.0;
  const DiagramLayout layout = lay_out_diagram(result);
  EXPECT_LT(layout.ln_nu_gu.high - layout.ln_nu_gu.low, 10.0);  // the points span about 2
}

Box box_of(const DiagramLabel& label, const DiagramLayout& layout) {
  const double half = text_width_em(label.text) * kSmallPoints * kMmPerPoint / 2;
  const double x = page_x(layout, label.energy_k);
  const double y = page_y(layout, label.ln_nu_gu);
  return {x - half, y - 1.0, x + half, y + 1.0};
}

TEST(DiagramLayout, LabelsEveryLineWithoutCollisions) {
  for (const std::size_t lines : {3U, 10U, 20U, 30U}) {
    const DiagramLayout layout = lay_out_diagram(invented_result({.lines = lines, .relative_error = 0.1}));
    EXPECT_EQ(layout.labels.size(), lines);
    EXPECT_EQ(layout.labels_left_out, 0U);
    for (std::size_t i = 0; i < layout.labels.size(); ++i) {
      const Box box = box_of(layout.labels[i], layout);
      EXPECT_GT(box.left, layout.diagram_mm.left);
      EXPECT_LT(box.right, layout.size.width_mm);
      EXPECT_GT(box.bottom, layout.diagram_mm.bottom);
      for (std::size_t k = 0; k < i; ++k) EXPECT_FALSE(overlap(box, box_of(layout.labels[k], layout)));
      for (const DiagramPoint& point : layout.points) {
        const double x = page_x(layout, point.energy_k);
        const double y = page_y(layout, point.ln_nu_gu);
        EXPECT_GE(std::hypot(x - std::clamp(x, box.left, box.right), y - std::clamp(y, box.bottom, box.top)),
                  kMarkerMm / 2);
      }
    }
  }
}

TEST(DiagramLayout, LabelsOfManyLinesOnlyThoseThatStandOut) {
  Result result = invented_result({.lines = 100, .relative_error = 0.1, .limits = 2});
  for (LineResult& line : result.lines) line.residual_sigma = 0.5;
  result.lines[50].residual_sigma = 4.0;
  const DiagramLayout layout = lay_out_diagram(result);
  EXPECT_EQ(layout.points.size(), 100U);
  EXPECT_EQ(layout.labels.size() + layout.labels_left_out, 3U) << "two limits and one outlier";
}

TEST(DiagramLayout, KeepsItsTextsOffThePoints) {
  for (const Result& result : results_of_every_kind()) {
    const DiagramLayout layout = lay_out_diagram(result);
    for (const PageText& text : layout.texts) {
      if (text.role != TextRole::answer && text.role != TextRole::detail) continue;
      const double width = text_width_em(text.text) * kAnswerPoints * kMmPerPoint;
      const Box box = {text.x_mm - width, text.y_mm - 1.2, text.x_mm, text.y_mm + 1.2};
      for (const DiagramPoint& point : layout.points) {
        const double x = page_x(layout, point.energy_k);
        EXPECT_FALSE(overlap(
            box, {x - 0.4, page_y(layout, point.bar_low), x + 0.4, page_y(layout, point.bar_high) + 0.1}))
            << text.text;
      }
    }
  }
}

std::vector<std::string> texts_of(const DiagramLayout& layout, TextRole role) {
  std::vector<std::string> texts;
  for (const PageText& text : layout.texts) {
    if (text.role == role) texts.push_back(text.text);
  }
  return texts;
}

TEST(DiagramLayout, NamesSourceAndSpeciesAndCutsThemToTheWidth) {
  const DiagramLayout layout = lay_out_diagram(invented_result());
  EXPECT_THAT(texts_of(layout, TextRole::source), ElementsAre("Lantern Cloud 4"));
  EXPECT_THAT(texts_of(layout, TextRole::species), ElementsAre("CH₃CN"));
  Result result = invented_result();
  result.source = std::string(200, 'W');
  const std::string cut = texts_of(lay_out_diagram(result), TextRole::source).front();
  EXPECT_THAT(cut, HasSubstr("…"));
  EXPECT_LT(text_width_em(cut, true) * kTitlePoints * kMmPerPoint, 84.0);
}

TEST(DiagramText, GivesTemperatureAndColumnWithErrors) {
  Result result = invented_result();
  result.temperature_k = {62.347, 3.09};
  result.column_density_cm2 = {1.2341e14, 4.3e12};
  result.chi2 = 8.13;
  result.dof = 6;
  result.p_value = 0.2287;
  const DiagramAnswer said = diagram_answer(result);
  EXPECT_THAT(said.answer, ElementsAre("T = 62.3 ± 3.1 K", "N = (1.234 ± 0.043) × 10¹⁴ cm⁻²"));
  EXPECT_THAT(said.detail, ElementsAre("χ²/dof = 8.1/6, p = 0.23"));
  result.temperature_fixed = true;
  EXPECT_EQ(diagram_answer(result).answer[0], "T = 62.347 K (stated)");
}

TEST(DiagramText, SaysForEveryStatusWhyThereIsNoTemperature) {
  EXPECT_THAT(diagram_answer(one_line_result()).answer, ElementsAre("no temperature"));
  EXPECT_THAT(
      diagram_answer(one_line_result()).detail,
      ElementsAre("one upper energy only", "N(10 K) = 3.5 × 10¹³ cm⁻²", "N(300 K) = 5.7 × 10¹⁵ cm⁻²"));
  EXPECT_THAT(diagram_answer(not_thermal_result()).answer, ElementsAre("no temperature"));
  EXPECT_THAT(diagram_answer(only_limits_result()).answer, ElementsAre("upper limits only"));
  EXPECT_THAT(diagram_answer(Result{}).answer, ElementsAre("fit not converged"));
}

TEST(DiagramLayout, StandsValuesThatCannotBeDrawn) {
  Result result = invented_result({.lines = 6});
  result.lines[0].ln_nu_gu = kNotKnown;
  result.lines[1].upper_energy_k = HUGE_VAL;
  result.lines[2].ln_nu_gu_error = kNotKnown;
  result.lines[3].residual_sigma = HUGE_VAL;
  result.diagram_line.covariance = kNotKnown;
  const DiagramLayout layout = lay_out_diagram(result);
  EXPECT_EQ(layout.points.size(), 4U);
  for (const DiagramSample& sample : layout.fit)
    EXPECT_TRUE(std::isfinite(sample.low) && std::isfinite(sample.high));
}

TEST(DiagramLayout, RefusesAFigureTooSmallToRead) {
  EXPECT_THROW((void)lay_out_diagram(invented_result(), {30.0, 90.0}), DomainError);
  EXPECT_THROW((void)lay_out_diagram(invented_result(), {88.0, HUGE_VAL}), DomainError);
  EXPECT_NO_THROW((void)lay_out_diagram(invented_result(), {180.0, 120.0}));
}

TEST(DiagramLayout, UsesNoTypeBelowSevenPoints) {
  EXPECT_GE(std::min({kTitlePoints, kAnswerPoints, kAxisPoints, kSmallPoints}), 7.0);
}

}  // namespace
}  // namespace trotline
