// What the checks say beside pass and fail: the cause of a failure that a reader can act on.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>

#include "analysis/simulated_table.hpp"

namespace trotline {
namespace {

using namespace simulated_table;
using ::testing::AllOf;
using ::testing::HasSubstr;
using ::testing::Not;

const Check& check_named(const Result& result, const std::string& name) {
  for (const Check& check : result.checks) {
    if (check.name == name) return check;
  }
  ADD_FAILURE() << "no check '" << name << "'";
  static const Check none;
  return none;
}

IntensityTable without_widths(IntensityTable table) {
  for (IntensityRow& row : table.rows) row.fwhm_km_s.reset();
  return table;
}

IntensityTable with_errors(IntensityTable table, double relative) {
  for (IntensityRow& row : table.rows) row.intensity_sigma = relative * row.intensity;
  return table;
}

/// Beams 12 to 30 arcsec that do not follow the energy.
IntensityTable diluted(const Species& species, double source_arcsec) {
  constexpr double kBeams[] = {12.0, 30.0, 17.0, 25.0, 12.0, 30.0, 17.0, 25.0};
  IntensityTable table = table_of(species, {{40.0, 1e12}}, 8);
  for (std::size_t i = 0; i < 8; ++i) {
    table.rows[i].beam_fwhm_rad = kBeams[i] * kRadPerArcsec;
    table.rows[i].intensity = intensity(species, {i}, {40.0, 1e12, source_arcsec}, kBeams[i]);
    table.rows[i].intensity_sigma = 0.05 * table.rows[i].intensity;
  }
  return table;
}

TEST(LeaveOneOutList, SkipsLinesWhoseAbsenceLeavesNoTemperature) {
  const Species species = rotor();
  const IntensityTable two = table_of(species, {{40.0, 1e12}}, 2);
  const Result pair = analyse(species, two, by("line"));
  ASSERT_EQ(pair.status, Status::done);
  EXPECT_TRUE(pair.leave_one_out.empty());

  // Two measurements of one line and one of another: without the other, one energy is left.
  IntensityTable three = two;
  three.rows.push_back(three.rows[1]);
  three.rows[2].line_number = 4;
  for (const char* method : {"line", "likelihood"}) {
    const Result result = analyse(species, three, by(method));
    ASSERT_EQ(result.status, Status::done);
    ASSERT_EQ(result.leave_one_out.size(), 2U) << method;
    for (const LeftOut& row : result.leave_one_out) {
      EXPECT_EQ(row.transition, "2-1");
      EXPECT_NEAR(row.temperature_k, 40.0, 1.0);
      EXPECT_LT(row.temperature_error_k, 40.0);
    }
  }
  EXPECT_EQ(analyse(species, table_of(species, {{40.0, 1e12}}, 6), by("line")).leave_one_out.size(), 6U);
}

TEST(BeamCheck, RunsWithoutASourceSizeAndNamesDilution) {
  const Species species = rotor();
  const Result compact = analyse(species, diluted(species, 10.0), by("line"));
  ASSERT_EQ(compact.status, Status::done);
  const Check& fails = check_named(compact, "residuals against beam");
  EXPECT_EQ(fails.outcome, Outcome::fail);
  EXPECT_LT(fails.figure, 0.0);
  EXPECT_THAT(fails.meaning, AllOf(HasSubstr("beam dilution"), HasSubstr("--method likelihood --source-size free")));

  const Result wide = analyse(species, diluted(species, 0.0), by("line"));
  EXPECT_EQ(check_named(wide, "residuals against beam").outcome, Outcome::pass);

  EXPECT_THAT(fails.meaning, Not(HasSubstr("opaque")));  // widths are known
  const Result blind = analyse(species, without_widths(diluted(species, 10.0)), by("line"));
  EXPECT_THAT(check_named(blind, "residuals against beam").meaning,
              AllOf(HasSubstr("beam dilution"), HasSubstr("low lines are opaque")));

  // The cure cures.
  RunOptions free = by("likelihood");
  free.source_size_free = true;
  const Result cured = analyse(species, diluted(species, 10.0), free);
  EXPECT_NE(check_named(cured, "residuals against beam").outcome, Outcome::fail);
}

TEST(BeamCheck, IsNotTestableWithBeamsOfOneSize) {
  const Species species = rotor();
  IntensityTable table = diluted(species, 0.0);
  for (IntensityRow& row : table.rows) row.beam_fwhm_rad = 20.0 * kRadPerArcsec;
  const Result result = analyse(species, table, by("line"));
  const Check& check = check_named(result, "residuals against beam");
  EXPECT_EQ(check.outcome, Outcome::not_testable);
  EXPECT_THAT(check.meaning, HasSubstr("of different size"));
}

TEST(Verdict, OfOpaqueLinesThatOneTemperatureDescribesBlamesN) {
  const Species species = rotor();
  const double n = column_for(species, 0.5, 40.0, 8);
  const IntensityTable table = with_errors(table_of(species, {{40.0, n}}, 8), 0.2);
  const Result result = analyse(species, table, by("line"));
  EXPECT_EQ(check_named(result, "opacity").outcome, Outcome::fail);
  EXPECT_EQ(result.verdict,
            "one temperature describes the lines, but they are opaque: N is too low and T may be off (use "
            "--method likelihood)");
  EXPECT_LT(result.column_density_cm2.value, n);
  EXPECT_EQ(analyse(species, table, by("likelihood")).verdict, "one temperature describes the lines");
  RunOptions thin = by("likelihood");
  thin.opacity = "thin";
  EXPECT_THAT(analyse(species, table, thin).verdict, HasSubstr("(use --opacity automatic)"));
  // Good lines show the curve, too: then the line itself does not describe them.
  const IntensityTable bright = table_of(species, {{40.0, column_for(species, 3.0, 40.0, 8)}}, 8);
  EXPECT_THAT(analyse(species, bright, by("line")).verdict, HasSubstr("does not describe"));
}

TEST(CurvatureAndGoodnessOfFit, NameUnseenOpacityWhereWidthsAreMissing) {
  const Species species = rotor();
  const IntensityTable table = table_of(species, {{40.0, column_for(species, 3.0, 40.0, 8)}}, 8);
  const Result blind = analyse(species, without_widths(table), by("line"));
  const Result seen = analyse(species, table, by("line"));
  for (const char* name : {"curvature", "goodness of fit"}) {
    EXPECT_EQ(check_named(blind, name).outcome, Outcome::fail);
    EXPECT_THAT(check_named(blind, name).meaning,
                HasSubstr("low lines are opaque, which cannot be seen without widths: try --method likelihood "
                          "--line-width"));
    EXPECT_THAT(check_named(seen, name).meaning, Not(HasSubstr("without widths")));
  }
}

TEST(GroupCheck, TellsADifferenceInTFromOneInN) {
  const Species species = rotor(true);
  IntensityTable offset = table_of(species, {{40.0, 1e12}}, 8);
  IntensityTable slope = offset;
  for (std::size_t i = 0; i < 8; ++i) {
    if (species.levels[species.transitions[i].upper].spin != "ortho") continue;
    offset.rows[i].intensity *= 3.0;
    offset.rows[i].intensity_sigma *= 3.0;
    slope.rows[i].intensity = intensity(species, {i}, {60.0, 1e12}, 20.0);
    slope.rows[i].intensity_sigma = 0.02 * slope.rows[i].intensity;
  }
  const Result in_n = analyse(species, offset, by("line"));
  EXPECT_EQ(check_named(in_n, "temperature by spin isomer").outcome, Outcome::fail);
  EXPECT_THAT(check_named(in_n, "temperature by spin isomer").meaning,
              HasSubstr("ortho and para differ in N, not in T: try --method likelihood --isomers apart"));
  const Result in_t = analyse(species, slope, by("line"));
  EXPECT_EQ(check_named(in_t, "temperature by spin isomer").outcome, Outcome::fail);
  EXPECT_THAT(check_named(in_t, "temperature by spin isomer").meaning, Not(HasSubstr("not in T")));
}

TEST(OpacityCheck, WarnsOfTheAssumedProfileWhereLinesAreVeryOpaque) {
  const Species species = rotor();
  const auto checked = [&](double tau0) {
    const IntensityTable table = table_of(species, {{40.0, column_for(species, tau0, 40.0, 12)}}, 12);
    const Result result = analyse(species, table, by("likelihood"));
    return check_named(result, "opacity");
  };
  const Check deep = checked(30.0);
  EXPECT_EQ(deep.outcome, Outcome::pass);
  EXPECT_THAT(deep.meaning, AllOf(HasSubstr("wings of the profile"), HasSubstr("thinner isotopologue")));
  EXPECT_THAT(checked(3.0).meaning, Not(HasSubstr("wings")));
}

}  // namespace
}  // namespace trotline
