// Q(T) from a table. Symbols: x = ln T, y = ln Q, s slope between two points.

#include <boost/math/interpolators/cubic_hermite.hpp>
#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/species/partition_function.hpp>

namespace trotline {
namespace {

struct Curve {
  std::vector<double> x;
  std::vector<double> y;
};

using Cubic = boost::math::interpolators::cubic_hermite<std::vector<double>>;

/// Steffen's eq. 11 for y that never falls: no slope beyond twice the flatter neighbouring secant.
double inner_slope(double h_left, double s_left, double h_right, double s_right) {
  const double parabola = (s_left * h_right + s_right * h_left) / (h_left + h_right);
  return std::min(parabola, 2.0 * std::min(s_left, s_right));
}

/// His section 4: the slope of the parabola at the outer point, between 0 and twice the secant.
double outer_slope(double h, double s, double h_next, double s_next) {
  const double parabola = s + (s - s_next) * h / (h + h_next);
  return std::clamp(parabola, 0.0, 2.0 * s);
}

Cubic monotone_cubic(Curve curve) {
  const std::size_t n = curve.x.size();
  std::vector<double> h(n - 1);
  std::vector<double> s(n - 1);
  for (std::size_t i = 0; i + 1 < n; ++i) {
    h[i] = curve.x[i + 1] - curve.x[i];
    s[i] = (curve.y[i + 1] - curve.y[i]) / h[i];
  }
  std::vector<double> slopes(n);
  for (std::size_t i = 1; i + 1 < n; ++i) slopes[i] = inner_slope(h[i - 1], s[i - 1], h[i], s[i]);
  slopes.front() = outer_slope(h[0], s[0], h[1], s[1]);
  slopes.back() = outer_slope(h[n - 2], s[n - 2], h[n - 3], s[n - 3]);
  return {std::move(curve.x), std::move(curve.y), std::move(slopes)};
}

/// What interpolation misses inner point i by when that point is left out, as a relative error of Q. The
/// cubic is local: two points on either side are all that it looks at.
double error_without(const Curve& curve, std::size_t i) {
  Curve rest;
  const std::size_t last = std::min(i + 2, curve.x.size() - 1);
  for (std::size_t k = i < 2 ? 0 : i - 2; k <= last; ++k) {
    if (k == i) continue;
    rest.x.push_back(curve.x[k]);
    rest.y.push_back(curve.y[k]);
  }
  const double missed_by = monotone_cubic(std::move(rest))(curve.x[i]) - curve.y[i];
  return std::abs(std::expm1(missed_by));
}

class Table final : public PartitionFunction {
 public:
  explicit Table(const std::vector<std::pair<double, double>>& points)
      : lowest_k_(points.front().first),
        highest_k_(points.back().first),
        curve_(logarithms(points)),
        cubic_(monotone_cubic(curve_)) {
    errors_.resize(points.size());
    for (std::size_t i = 1; i + 1 < points.size(); ++i) errors_[i] = error_without(curve_, i);
    // At either end the neighbour's neighbour stands in, so that an end is never judged by one point alone.
    errors_.front() = errors_[2];
    errors_.back() = errors_[points.size() - 3];
  }

  [[nodiscard]] PartitionValue at(double temperature_k) const override {
    if (!(temperature_k >= lowest_k_ && temperature_k <= highest_k_)) {
      throw DomainError("temperature_k", temperature_k,
                        fmt::format("{:g} to {:g} K ({})", lowest_k_, highest_k_, description()));
    }
    const double x = std::clamp(std::log(temperature_k), curve_.x.front(), curve_.x.back());
    PartitionValue value;
    value.ln_q = cubic_(x);
    value.q = std::exp(value.ln_q);
    value.dlnq_dt = cubic_.prime(x) / temperature_k;
    value.relative_error = error_at(x);
    return value;
  }

  [[nodiscard]] double lowest_k() const override { return lowest_k_; }
  [[nodiscard]] double highest_k() const override { return highest_k_; }
  [[nodiscard]] std::string description() const override {
    return fmt::format("table of {} temperatures", curve_.x.size());
  }

 private:
  static Curve logarithms(const std::vector<std::pair<double, double>>& points) {
    Curve curve;
    for (const auto& [temperature_k, q] : points) {
      curve.x.push_back(std::log(temperature_k));
      curve.y.push_back(std::log(q));
    }
    return curve;
  }

  [[nodiscard]] double error_at(double x) const {
    const auto above = std::upper_bound(curve_.x.begin(), curve_.x.end(), x);
    const auto right = std::clamp<std::ptrdiff_t>(above - curve_.x.begin(), 1, std::ssize(curve_.x) - 1);
    const auto i = static_cast<std::size_t>(right);
    return std::max(errors_[i - 1], errors_[i]);
  }

  double lowest_k_;
  double highest_k_;
  Curve curve_;
  Cubic cubic_;
  std::vector<double> errors_;
};

void check_points(const std::vector<std::pair<double, double>>& points) {
  constexpr std::size_t kFewest = 5;   // so that three remain around an inner point that is left out
  constexpr double kLeastStep = 1e-9;  // relative; closer points have no slope worth the name
  if (points.size() < kFewest) {
    throw DomainError("number of points of a table of Q", static_cast<double>(points.size()), "at least 5");
  }
  for (std::size_t i = 0; i < points.size(); ++i) {
    const auto [temperature_k, q] = points[i];
    if (!(std::isfinite(temperature_k) &&
          temperature_k > (i == 0 ? 0.0 : points[i - 1].first * (1.0 + kLeastStep)))) {
      throw DomainError(fmt::format("T of point {} [K]", i + 1), temperature_k, "above 0 and rising");
    }
    if (!(std::isfinite(q) && q > 0.0 && (i == 0 || q >= points[i - 1].second))) {
      throw DomainError(fmt::format("Q at {:g} K", temperature_k), q, "above 0 and not falling");
    }
  }
}

}  // namespace

std::shared_ptr<const PartitionFunction> partition_function_from_table(
    const std::vector<std::pair<double, double>>& points) {
  check_points(points);
  return std::make_shared<Table>(points);
}

}  // namespace trotline
