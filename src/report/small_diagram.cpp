#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <vector>

#include <trotline/report/axis.hpp>
#include <trotline/report/small_diagram.hpp>

namespace trotline {
namespace {

constexpr double kWidth = 352.0;
constexpr double kHeight = 228.0;
constexpr double kLeft = 44.0, kRight = 346.0, kTop = 18.0, kBottom = 190.0;
constexpr int kBandSamples = 12;

struct Point {
  const LineResult* line;
  double error;  ///< 0: no bar
};

std::vector<Point> points_of(const Result& result) {
  std::vector<Point> points;
  for (const LineResult& line : result.lines) {
    if (!std::isfinite(line.upper_energy_k) || !std::isfinite(line.ln_nu_gu)) continue;
    const bool has_bar = !line.limit && line.ln_nu_gu_error > 0.0 && std::isfinite(line.ln_nu_gu_error);
    points.push_back({&line, has_bar ? line.ln_nu_gu_error : 0.0});
  }
  return points;
}

/// The panel: energies and ordinates to pixels.
class Panel {
 public:
  explicit Panel(const std::vector<Point>& points) {
    double low = HUGE_VAL, high = -HUGE_VAL, most_energy = 0.0;
    for (const Point& point : points) {
      const double error = std::min(point.error, 3.0);
      low = std::min(low, point.line->ln_nu_gu - error);
      high = std::max(high, point.line->ln_nu_gu + error);
      most_energy = std::max(most_energy, point.line->upper_energy_k);
    }
    const double room = 0.08 * std::max(high - low, 0.5);
    energy = axis_over(0.0, most_energy > 0.0 ? 1.06 * most_energy : 100.0, 6);
    ordinate = axis_over(low - room, high + room, 6);
  }

  [[nodiscard]] double x(double energy_k) const {
    return kLeft + (energy_k - energy.low) / (energy.high - energy.low) * (kRight - kLeft);
  }
  [[nodiscard]] double y(double value) const {
    const double clipped = std::clamp(value, ordinate.low, ordinate.high);
    return kBottom - (clipped - ordinate.low) / (ordinate.high - ordinate.low) * (kBottom - kTop);
  }

  Axis energy;
  Axis ordinate;
};

std::string axes(const Panel& panel) {
  std::string path = fmt::format("M{} {}V{}H{}", kLeft, kTop, kBottom, kRight);
  std::string texts;
  for (const double tick : panel.energy.ticks) {
    path += fmt::format("M{:.1f} {}v4", panel.x(tick), kBottom);
    texts += fmt::format("<text x=\"{:.1f}\" y=\"{}\" text-anchor=\"middle\">{}</text>", panel.x(tick),
                         kBottom + 16, tick_text(panel.energy, tick));
  }
  for (const double tick : panel.ordinate.ticks) {
    path += fmt::format("M{} {:.1f}h-4", kLeft, panel.y(tick));
    texts += fmt::format("<text x=\"{}\" y=\"{:.1f}\" text-anchor=\"end\">{}</text>", kLeft - 7,
                         panel.y(tick) + 4, tick_text(panel.ordinate, tick));
  }
  texts += fmt::format("<text x=\"{}\" y=\"{}\" text-anchor=\"end\">E/k (K)</text>", kRight, kHeight - 5);
  texts += "<text x=\"2\" y=\"10\">ln N/g</text>";
  return fmt::format("<path class=\"ax\" d=\"{}\"/>{}", path, texts);
}

/// Standard error of the fitted line at an energy.
double band(const DiagramLine& line, double e) {
  const double variance = line.intercept_variance + 2.0 * e * line.covariance + e * e * line.slope_variance;
  return variance > 0.0 ? std::sqrt(variance) : 0.0;
}

std::string fit(const DiagramLine& line, const Panel& panel) {
  if (!std::isfinite(line.intercept) || !std::isfinite(line.slope_per_k)) return {};
  const auto value = [&](double e) { return line.intercept + line.slope_per_k * e; };
  std::string upper, lower;
  for (int i = 0; i <= kBandSamples; ++i) {
    const double e = panel.energy.low + (panel.energy.high - panel.energy.low) * i / kBandSamples;
    upper +=
        fmt::format("{}{:.1f} {:.1f}", i == 0 ? "M" : "L", panel.x(e), panel.y(value(e) + band(line, e)));
    lower = fmt::format("L{:.1f} {:.1f}", panel.x(e), panel.y(value(e) - band(line, e))) + lower;
  }
  // The line leaves the panel where it crosses its edge, not along it.
  const auto inside = [&](double e) {
    if (line.slope_per_k == 0.0) return e;
    const double clipped = std::clamp(value(e), panel.ordinate.low, panel.ordinate.high);
    return clipped == value(e) ? e : (clipped - line.intercept) / line.slope_per_k;
  };
  const double from = inside(panel.energy.low), to = inside(panel.energy.high);
  return fmt::format(
      "<path class=\"bd\" d=\"{}{}Z\"/><path class=\"ln\" d=\"M{:.1f} {:.1f}L{:.1f} {:.1f}\"/>", upper, lower,
      panel.x(from), panel.y(value(from)), panel.x(to), panel.y(value(to)));
}

std::string marks(const std::vector<Point>& points, const Panel& panel) {
  std::string bars, dots, limits, crosses;
  for (const Point& point : points) {
    const double x = panel.x(point.line->upper_energy_k);
    const double y = panel.y(point.line->ln_nu_gu);
    if (point.error > 0.0) {
      bars += fmt::format("M{:.1f} {:.1f}V{:.1f}", x, panel.y(point.line->ln_nu_gu - point.error),
                          panel.y(point.line->ln_nu_gu + point.error));
    }
    if (point.line->limit) {
      limits += fmt::format("M{:.1f} {:.1f}a3 3 0 1 0 6 0a3 3 0 1 0-6 0M{:.1f} {:.1f}v9m-2.5-3l2.5 3l2.5-3",
                            x - 3, y, x, y + 3);
    } else if (point.line->used) {
      dots += fmt::format("M{:.1f} {:.1f}h0", x, y);
    } else {
      crosses += fmt::format("M{:.1f} {:.1f}l6 6m0-6l-6 6", x - 3, y - 3);
    }
  }
  std::string text;
  const auto add = [&](const char* kind, const std::string& path) {
    if (!path.empty()) text += fmt::format("<path class=\"{}\" d=\"{}\"/>", kind, path);
  };
  add("br", bars);
  add("pt", dots);
  add("lm", limits);
  add("xx", crosses);
  return text;
}

}  // namespace

std::string small_diagram(const Result& result) {
  const std::vector<Point> points = points_of(result);
  if (points.empty()) return {};
  const Panel panel(points);
  const bool has_fit = std::isfinite(result.diagram_line.slope_per_k);
  return fmt::format(
      "<svg viewBox=\"0 0 {} {}\" role=\"img\" aria-label=\"Rotation diagram: {} lines{}\">{}{}{}</svg>",
      kWidth, kHeight, points.size(), has_fit ? ", fitted line with its 68 % band" : "",
      fit(result.diagram_line, panel), axes(panel), marks(points, panel));
}

}  // namespace trotline
