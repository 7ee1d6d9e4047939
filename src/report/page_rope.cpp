#include "page_rope.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

namespace trotline {
namespace {

constexpr double kWidth = 1200.0, kHeight = 150.0;
constexpr double kLeft = 16.0, kRight = 1184.0, kRope = 26.0, kLongest = 108.0, kShortest = 14.0;
constexpr std::size_t kMostHooks = 4000;

struct Range {
  double low = HUGE_VAL;
  double high = -HUGE_VAL;
  void include(double value) {
    if (!std::isfinite(value)) return;
    low = std::min(low, value);
    high = std::max(high, value);
  }
};

/// 1, 2, 5, 10, ... inside the range.
std::vector<double> decades(double low, double high) {
  std::vector<double> ticks;
  for (int power = -3; power <= 6; ++power) {
    for (const double digit : {1.0, 2.0, 5.0}) {
      const double tick = digit * std::pow(10.0, power);
      if (tick >= low && tick <= high) ticks.push_back(tick);
    }
  }
  return ticks;
}

}  // namespace

std::string rope_svg(const std::vector<RopeHook>& hooks) {
  Range t, n;
  for (const RopeHook& hook : hooks) {
    if (hook.temperature_k > 0.0) t.include(hook.temperature_k);
    n.include(hook.log10_column);
  }
  if (!(t.low <= t.high)) return {};
  const double low = std::log(t.low / 1.15), high = std::log(t.high * 1.15);
  const auto x_of = [&](double kelvin) {
    return kLeft + (std::log(kelvin) - low) / (high - low) * (kRight - kLeft);
  };
  const auto length_of = [&](double column) {
    if (!std::isfinite(column) || !(n.high > n.low)) return 0.5 * (kShortest + kLongest);
    return kShortest + (column - n.low) / (n.high - n.low) * (kLongest - kShortest);
  };
  std::string plain, doubtful;
  const std::size_t step = 1 + hooks.size() / kMostHooks;
  for (std::size_t i = 0; i < hooks.size(); i += step) {
    if (!(hooks[i].temperature_k > 0.0)) continue;
    (hooks[i].is_in_doubt ? doubtful : plain) += fmt::format(
        "M{:.1f} {}v{:.0f}h2", x_of(hooks[i].temperature_k), kRope, length_of(hooks[i].log10_column));
  }
  std::string ticks, texts;
  for (const double tick : decades(t.low / 1.15, t.high * 1.15)) {
    ticks += fmt::format("M{:.1f} {}v-6", x_of(tick), kRope);
    texts +=
        fmt::format("<text x=\"{:.1f}\" y=\"14\" text-anchor=\"middle\">{:g} K</text>", x_of(tick), tick);
  }
  return fmt::format(
      "<svg viewBox=\"0 0 {} {}\" role=\"img\" aria-label=\"Temperatures of {} jobs, from {:.3g} K to {:.3g} "
      "K\">"
      "<path class=\"hk\" d=\"{}\"/><path class=\"hw\" d=\"{}\"/><path class=\"rp\" d=\"M{} "
      "{}H{}{}\"/>{}</svg>",
      kWidth, kHeight, hooks.size(), t.low, t.high, plain, doubtful, kLeft, kRope, kRight, ticks, texts);
}

}  // namespace trotline
