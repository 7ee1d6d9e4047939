#include <boost/math/tools/minima.hpp>
#include <boost/math/tools/roots.hpp>
#include <cmath>
#include <cstdint>
#include <limits>

#include <trotline/inference/thermal_line.hpp>

#include "diagram_profile.hpp"

namespace trotline {
namespace {

constexpr double kNone = std::numeric_limits<double>::quiet_NaN();
constexpr int kSamples = 64;

/// The span of beta = 1/T inside which chi2 stays within z^2 of its minimum.
struct BetaSpan {
  double low;
  double high;
  bool open_towards_zero;
};

double root_between(const std::function<double(double)>& function, double inside, double outside) {
  std::uintmax_t steps = 200;
  const auto [a, b] = boost::math::tools::toms748_solve(function, std::min(inside, outside),
                                                        std::max(inside, outside),
                                                        boost::math::tools::eps_tolerance<double>(48), steps);
  return 0.5 * (a + b);
}

BetaSpan beta_span(const DiagramData& data, const DiagramProfile& profile, double best, double chi2, double z) {
  const auto excess = [&](double beta) {
    return std::min(profile.at(beta).chi2 - chi2 - z * z, std::numeric_limits<double>::max());
  };
  const double hottest = 1.0 / kHottestDiagramK;
  BetaSpan span{hottest, 0.0, excess(hottest) <= 0.0};
  if (!span.open_towards_zero) span.low = root_between(excess, best, hottest);
  double outside = 0.0;
  if (data.background_k > 0.0) {
    // chi2 diverges at T_bg: halve the distance until it is far enough up.
    const double coldest = 1.0 / data.background_k;
    double gap = 0.5 * (coldest - best);
    while (excess(coldest - gap) <= 0.0 && gap > 1e-14 * coldest) gap *= 0.5;
    outside = coldest - gap;
    if (excess(outside) <= 0.0) return {span.low, outside, span.open_towards_zero};
  } else {
    outside = 2.0 * best;
    while (excess(outside) <= 0.0) outside *= 2.0;
  }
  span.high = root_between(excess, best, outside);
  return span;
}

/// Largest value of `function` on [low, high], with the place where it stands.
std::pair<double, double> largest(const std::function<double(double)>& function, double low, double high) {
  const double step = (high - low) / kSamples;
  int best = 0;
  double value = -std::numeric_limits<double>::infinity();
  for (int i = 0; i <= kSamples; ++i) {
    const double here = function(low + i * step);
    if (here > value) {
      value = here;
      best = i;
    }
  }
  const double left = low + std::max(0, best - 1) * step;
  const double right = low + std::min(kSamples, best + 1) * step;
  const auto minimum = boost::math::tools::brent_find_minima([&](double beta) { return -function(beta); }, left,
                                                             right, std::numeric_limits<double>::digits / 2);
  if (-minimum.second > value) return {minimum.first, -minimum.second};
  return {low + best * step, value};
}

}  // namespace

ThermalIntervals thermal_intervals(const DiagramData& data, const ThermalLineFit& fit,
                                   const PartitionFunction& partition, double z) {
  ThermalIntervals intervals{{kNone, kNone}, {kNone, kNone}};
  if (fit.status != ThermalStatus::done) return intervals;
  const DiagramProfile profile(data);
  const BetaSpan span = beta_span(data, profile, fit.inverse_temperature_per_k, fit.chi2, z);
  intervals.temperature_k.low = 1.0 / span.high;
  if (!span.open_towards_zero) intervals.temperature_k.high = 1.0 / span.low;

  const double low = std::max(span.low, 1.0 / partition.highest_k());
  const double high = std::min(span.high, 1.0 / std::max(partition.lowest_k(), 1e-300));
  if (!(low < high)) return intervals;
  const double weight = profile.intercept_weight();
  const auto extreme = [&](double beta, double side) {
    const auto point = profile.at(beta);
    const double room = std::max(0.0, z * z - (point.chi2 - fit.chi2));
    return side * (point.intercept + partition.at(1.0 / beta).ln_q) + std::sqrt(room / weight);
  };
  // An extreme that stands where Q's range cuts the span is no bound of the data's.
  const auto bound = [&](double side) {
    const auto [beta, value] = largest([&](double b) { return extreme(b, side); }, low, high);
    const bool cut_hot = low > span.low || span.open_towards_zero;
    const bool cut_cold = high < span.high;
    const double near = 1e-6 * (high - low);
    if ((cut_hot && beta - low <= near) || (cut_cold && high - beta <= near)) return kNone;
    return side * value;
  };
  intervals.ln_column_per_cm2 = {bound(-1.0), bound(+1.0)};
  return intervals;
}

}  // namespace trotline
