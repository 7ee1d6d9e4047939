#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <utility>

#include <trotline/report/axis.hpp>

namespace trotline {
namespace {

/// Slack for ticks on the very end of the range, in steps.
constexpr double kSlack = 1e-9;

void make_drawable(double& low, double& high) {
  if (!std::isfinite(low) || !std::isfinite(high)) low = 0.0, high = 1.0;
  if (low > high) std::swap(low, high);
  const double least = std::max(1e-9 * std::max(std::abs(low), std::abs(high)), 1e-300);
  if (high - low >= least) return;
  const double half = low == 0.0 ? 1.0 : 0.5 * std::abs(low);
  low -= half;
  high += half;
}

int count_of_ticks(double low, double high, double step) {
  return static_cast<int>(std::floor(high / step + kSlack) - std::ceil(low / step - kSlack)) + 1;
}

/// Any range holds between 2 and 5 multiples of some 1, 2 or 5 times a power of ten: 5 where a step of 2 is
/// just too fine and one of 5 too coarse.
constexpr int kFewestTicks = 5;

/// The finest of 1, 2, 5 times a power of ten that gives at most `most` ticks.
double step_for(double low, double high, int most) {
  constexpr double kNice[] = {1.0, 2.0, 5.0};
  const int power = static_cast<int>(std::floor(std::log10((high - low) / most)));
  for (int p = power - 1; p <= power + 2; ++p) {
    for (const double nice : kNice) {
      const double step = nice * std::pow(10.0, p);
      if (count_of_ticks(low, high, step) <= most) return step;
    }
  }
  return high - low;  // not reached
}

}  // namespace

Axis axis_over(double low, double high, int most_ticks) {
  make_drawable(low, high);
  Axis axis{low, high, step_for(low, high, std::max(most_ticks, kFewestTicks)), 0, {}};
  axis.decimals = std::max(0, -static_cast<int>(std::floor(std::log10(axis.step) + kSlack)));
  const double first = std::ceil(low / axis.step - kSlack);
  const int count = count_of_ticks(low, high, axis.step);
  for (int i = 0; i < count; ++i) axis.ticks.push_back((first + i) * axis.step);
  return axis;
}

std::string tick_text(const Axis& axis, double tick) {
  const double largest = std::max(std::abs(axis.low), std::abs(axis.high));
  const bool plain = largest < 1e5 && axis.decimals <= 5;
  std::string text = plain ? fmt::format("{:.{}f}", tick, axis.decimals) : fmt::format("{:.3g}", tick);
  if (std::abs(tick) < 0.5 * axis.step) text = plain ? fmt::format("{:.{}f}", 0.0, axis.decimals) : "0";
  return text.front() == '-' ? "−" + text.substr(1) : text;
}

}  // namespace trotline
