#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>
#include <limits>
#include <random>

#include <trotline/report/axis.hpp>

namespace trotline {
namespace {

using testing::DoubleEq;
using testing::ElementsAre;

TEST(Axis, PutsTicksOnRoundNumbers) {
  EXPECT_THAT(axis_over(0.0, 210.0, 6).ticks, ElementsAre(0.0, 50.0, 100.0, 150.0, 200.0));
  EXPECT_THAT(axis_over(21.7, 26.3, 6).ticks, ElementsAre(22.0, 23.0, 24.0, 25.0, 26.0));
  EXPECT_THAT(axis_over(-2.6, 2.6, 5).ticks, ElementsAre(-2.0, -1.0, 0.0, 1.0, 2.0));
}

TEST(Axis, NamesTicksWithTheDecimalsTheyNeed) {
  const Axis fine = axis_over(22.10, 22.35, 6);
  EXPECT_EQ(tick_text(fine, fine.ticks[0]), "22.10");
  EXPECT_EQ(tick_text(axis_over(-3.0, 3.0, 7), -2.0), "−2");
  EXPECT_EQ(tick_text(axis_over(-3.0, 3.0, 7), -1e-17), "0");
  EXPECT_EQ(tick_text(axis_over(0.0, 3e6, 5), 2e6), "2e+06");
}

TEST(Axis, WidensWhatCannotBeDrawn) {
  constexpr double kNan = std::numeric_limits<double>::quiet_NaN();
  for (const auto& [low, high] :
       {std::pair{5.0, 5.0}, {0.0, 0.0}, {kNan, 1.0}, {0.0, HUGE_VAL}, {3.0, 1.0}}) {
    const Axis axis = axis_over(low, high, 5);
    EXPECT_LT(axis.low, axis.high);
    EXPECT_GE(axis.ticks.size(), 2U);
  }
}

TEST(Axis, HasTwoTicksAtLeastAndNoneOutside) {
  std::mt19937_64 random(3);
  std::uniform_real_distribution<double> power(-6.0, 8.0);
  std::uniform_real_distribution<double> unit(-1.0, 1.0);
  for (int draw = 0; draw < 20000; ++draw) {
    const double low = unit(random) * std::pow(10.0, power(random));
    const double high = low + (std::abs(unit(random)) + 0.01) * (std::abs(low) + 1e-3);
    const int most = 5 + draw % 5;
    const Axis axis = axis_over(low, high, most);
    EXPECT_GE(axis.ticks.size(), 2U) << low << " " << high;
    EXPECT_LE(axis.ticks.size(), static_cast<std::size_t>(most)) << low << " " << high;
    for (const double tick : axis.ticks) {
      EXPECT_GE(tick, low - 1e-6 * axis.step);
      EXPECT_LE(tick, high + 1e-6 * axis.step);
    }
  }
}

}  // namespace
}  // namespace trotline
