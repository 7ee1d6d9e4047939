#include "blend_integral.hpp"

#include <algorithm>
#include <cmath>
#include <utility>

#include "vector_math.hpp"

namespace trotline::internal {
namespace {

constexpr int kMostHalvings = 12;

/// From where on a member adds less than 1e-14 of its peak, or of 1 where it is opaque, to 1 - exp(-tau).
double reach_km_s(const BlendMember& member) {
  return member.half_width_km_s * std::sqrt(std::log(1e14 * std::max(1.0, member.tau0)));
}

/// phi = (1 - exp(-tau))/tau and its derivative.
std::pair<double, double> escape(double tau) {
  if (tau < 1e-2) {
    // the next terms, tau^5/720 and tau^4/144, are below 1e-10 of phi' and far below that in the sum
    return {1.0 - tau * (0.5 - tau * (1.0 / 6.0 - tau * (1.0 / 24.0 - tau / 120.0))),
            -0.5 + tau * (1.0 / 3.0 - tau * (0.125 - tau / 30.0))};
  }
  const double left = vector_exp(-tau);
  const double phi = (1.0 - left) / tau;
  return {phi, (left - phi) / tau};
}

/// Adds the integrand at v, times `weight`, to the members' derivatives. @return the integrand
double add_point(BlendMember* first, const BlendMember* last, double v, double weight) {
  double tau = 0.0;
  double source = 0.0;
  for (const BlendMember* m = first; m != last; ++m) {
    const double x = (v - m->offset_km_s) / m->half_width_km_s;
    const double depth = m->tau0 * vector_exp(-x * x);
    tau += depth;
    source += depth * m->source_k;
  }
  const auto [phi, slope] = escape(tau);
  for (BlendMember* m = first; m != last; ++m) {
    const double x = (v - m->offset_km_s) / m->half_width_km_s;
    const double depth = weight * m->tau0 * vector_exp(-x * x);
    m->by_source += phi * depth;
    m->by_ln_tau += depth * (phi * m->source_k + slope * source);
  }
  return phi * source;
}

/// Members first..last overlap from `low` to `high`.
double integrate_cluster(BlendMember* first, BlendMember* last, double low, double high) {
  double narrowest = first->half_width_km_s;
  for (const BlendMember* m = first; m != last; ++m) narrowest = std::min(narrowest, m->half_width_km_s);
  int points = static_cast<int>(std::ceil((high - low) / (0.5 * narrowest)));
  double step = (high - low) / points;
  const auto sum = [&](double start) {
    double total = 0.0;
    for (int i = 0; i < points; ++i) total += add_point(first, last, low + (i + start) * step, 1.0);
    return total;
  };
  double total = sum(0.0);
  for (int halvings = 0; halvings < kMostHalvings; ++halvings) {
    const double between = sum(0.5);
    const double difference = std::abs(between - total);
    total += between;
    points *= 2;
    step *= 0.5;
    if (difference <= std::sqrt(kBlendError) * 0.5 * std::abs(total)) break;
  }
  for (BlendMember* m = first; m != last; ++m) {
    m->by_source *= step;
    m->by_ln_tau *= step;
  }
  return total * step;
}

}  // namespace

double integrate_blend(BlendMember* members, Eigen::Index count) {
  double intensity = 0.0;
  BlendMember* const end = members + count;
  for (BlendMember* m = members; m != end; ++m) m->by_ln_tau = m->by_source = 0.0;
  for (BlendMember* first = members; first != end;) {
    double low = first->offset_km_s - reach_km_s(*first);
    double high = first->offset_km_s + reach_km_s(*first);
    BlendMember* last = first + 1;
    // A wide member may reach back over narrow ones before it: all of them are looked at, not the next alone.
    for (BlendMember* m = last; m != end; ++m) {
      if (m->offset_km_s - reach_km_s(*m) >= high) continue;
      for (; last <= m; ++last) {
        low = std::min(low, last->offset_km_s - reach_km_s(*last));
        high = std::max(high, last->offset_km_s + reach_km_s(*last));
      }
    }
    intensity += integrate_cluster(first, last, low, high);
    first = last;
  }
  return intensity;
}

}  // namespace trotline::internal
