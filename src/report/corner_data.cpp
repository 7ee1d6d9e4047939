#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>

#include <trotline/report/corner_data.hpp>

namespace trotline {
namespace {

constexpr int kCells = 100;
constexpr int kTicks = 5;

/// Between the sorted values, linearly.
double quantile(const std::vector<double>& sorted, double share) {
  const double place = share * static_cast<double>(sorted.size() - 1);
  const auto below = static_cast<std::size_t>(place);
  const std::size_t above = std::min(below + 1, sorted.size() - 1);
  return std::lerp(sorted[below], sorted[above], place - static_cast<double>(below));
}

bool takes(std::string& rest, std::string_view start) {
  if (!rest.starts_with(start)) return false;
  rest.erase(0, start.size());
  return true;
}

/// "_ortho_2" as "₂, ortho".
std::string part_name(std::string rest) {
  if (rest.empty()) return rest;
  std::string number;
  if (rest.size() >= 2 && rest[rest.size() - 2] == '_' && (rest.back() == '1' || rest.back() == '2')) {
    number = rest.back() == '1' ? "₁" : "₂";
    rest.resize(rest.size() - 2);
  }
  return number + (rest.size() > 1 ? ", " + rest.substr(1) : "");
}

/// From the fitted number to the one that is shown.
double shown(const std::string& parameter, double value) {
  if (parameter.starts_with("ln_column_density")) return value / std::numbers::ln10;
  return parameter.starts_with("ln_") ? std::exp(value) : value;
}

double spread95(const std::vector<double>& sorted) {
  constexpr double kTail = 0.025;
  const double spread = quantile(sorted, 1.0 - kTail) - quantile(sorted, kTail);
  const double least = 1e-6 * std::max(1e-3, std::abs(quantile(sorted, 0.5)));  // draws that are all alike
  return std::max(spread, least);
}

void measure(CornerParameter& parameter) {
  constexpr double kOneSigma = 0.158655;  // of a Gaussian, below -1 sigma
  constexpr double kBeyond = 0.0015;
  constexpr double kMargin = 0.05;  // of the central 95 %
  std::vector<double> sorted = parameter.draws;
  std::sort(sorted.begin(), sorted.end());
  parameter.low68 = quantile(sorted, kOneSigma);
  parameter.median = quantile(sorted, 0.5);
  parameter.high68 = quantile(sorted, 1.0 - kOneSigma);
  const double margin = kMargin * spread95(sorted);
  parameter.axis =
      axis_over(quantile(sorted, kBeyond) - margin, quantile(sorted, 1.0 - kBeyond) + margin, kTicks);
}

// ---- density

using Grid = std::vector<double>;  // [row * kCells + column]

std::size_t at(int column, int row) { return static_cast<std::size_t>(row * kCells + column); }

/// Place of a value in cells: 0 at the axis's low end, kCells at its high end.
double in_cells(const Axis& axis, double value) {
  return (value - axis.low) / (axis.high - axis.low) * kCells;
}

struct Points {
  std::vector<double> x;
  std::vector<double> y;
};

/// Inside both axes.
Points points_of(const CornerParameter& x, const CornerParameter& y) {
  Points points;
  for (std::size_t i = 0; i < x.draws.size(); ++i) {
    const double px = in_cells(x.axis, x.draws[i]);
    const double py = in_cells(y.axis, y.draws[i]);
    if (px < 0.0 || px >= kCells || py < 0.0 || py >= kCells) continue;
    points.x.push_back(px);
    points.y.push_back(py);
  }
  return points;
}

struct Covariance {
  double xx = 0.0;
  double xy = 0.0;
  double yy = 0.0;
};

Covariance covariance_of(const Points& points) {
  const auto count = static_cast<double>(points.x.size());
  double mean_x = 0.0;
  double mean_y = 0.0;
  for (std::size_t i = 0; i < points.x.size(); ++i) {
    mean_x += points.x[i] / count;
    mean_y += points.y[i] / count;
  }
  Covariance covariance;
  for (std::size_t i = 0; i < points.x.size(); ++i) {
    const double dx = points.x[i] - mean_x;
    const double dy = points.y[i] - mean_y;
    covariance.xx += dx * dx / count;
    covariance.xy += dx * dy / count;
    covariance.yy += dy * dy / count;
  }
  return covariance;
}

/// Values of the kernel for offsets of -(kCells - 1) to kCells - 1 cells.
std::vector<double> kernel_of(const Points& points) {
  constexpr double kOfScott = 0.85;
  constexpr double kLeast = 0.5;  // cells squared: below it the cells themselves would show
  const double width = kOfScott * std::pow(static_cast<double>(points.x.size()), -1.0 / 6.0);
  Covariance c = covariance_of(points);
  c = {c.xx * width * width + kLeast, c.xy * width * width, c.yy * width * width + kLeast};
  const double determinant = c.xx * c.yy - c.xy * c.xy;
  std::vector<double> kernel;
  for (int dy = 1 - kCells; dy < kCells; ++dy) {
    for (int dx = 1 - kCells; dx < kCells; ++dx) {
      const double square = (c.yy * dx * dx - 2.0 * c.xy * dx * dy + c.xx * dy * dy) / determinant;
      kernel.push_back(std::exp(-0.5 * square));
    }
  }
  return kernel;
}

Grid density_of(const Points& points) {
  Grid counts(static_cast<std::size_t>(kCells * kCells), 0.0);
  for (std::size_t i = 0; i < points.x.size(); ++i)
    counts[at(static_cast<int>(points.x[i]), static_cast<int>(points.y[i]))] += 1.0;
  const std::vector<double> kernel = kernel_of(points);
  Grid density(counts.size(), 0.0);
  for (int row = 0; row < kCells; ++row) {
    for (int column = 0; column < kCells; ++column) {
      const double count = counts[at(column, row)];
      if (count == 0.0) continue;
      for (int to = 0; to < kCells; ++to) {
        const int line = (to - row + kCells - 1) * (2 * kCells - 1) + kCells - 1 - column;
        for (int j = 0; j < kCells; ++j)
          density[at(j, to)] += count * kernel[static_cast<std::size_t>(line + j)];
      }
    }
  }
  return density;
}

/// Between the centers of the cells, linearly; level beyond the outermost.
double density_at(const Grid& density, double x, double y) {
  const double px = std::clamp(x - 0.5, 0.0, kCells - 1.0);
  const double py = std::clamp(y - 0.5, 0.0, kCells - 1.0);
  const int column = std::min(static_cast<int>(px), kCells - 2);
  const int row = std::min(static_cast<int>(py), kCells - 2);
  const double low = std::lerp(density[at(column, row)], density[at(column + 1, row)], px - column);
  const double high = std::lerp(density[at(column, row + 1)], density[at(column + 1, row + 1)], px - column);
  return std::lerp(low, high, py - row);
}

/// Densities of the draws, rising; those outside of the axes count as nowhere dense.
std::vector<double> densities_at_draws(const Grid& density, const Points& points, std::size_t draws) {
  std::vector<double> values(draws - points.x.size(), 0.0);
  for (std::size_t i = 0; i < points.x.size(); ++i)
    values.push_back(density_at(density, points.x[i], points.y[i]));
  std::sort(values.begin(), values.end());
  return values;
}

/// From cells back to the quantities.
struct Scale {
  const Axis& x;
  const Axis& y;
  [[nodiscard]] double x_of(double cells) const { return x.low + cells / kCells * (x.high - x.low); }
  [[nodiscard]] double y_of(double cells) const { return y.low + cells / kCells * (y.high - y.low); }
};

void append_cells(std::vector<CornerCells>& cells, const Grid& density, double level, int step,
                  const Scale& scale) {
  for (int row = 0; row < kCells; ++row) {
    for (int column = 0; column < kCells; ++column) {
      const int first = column;
      while (column < kCells && density[at(column, row)] >= level) ++column;
      if (column == first) continue;
      cells.push_back({step, {scale.x_of(first), scale.y_of(row), scale.x_of(column), scale.y_of(row + 1)}});
    }
  }
}

struct Crossing {
  double x;
  double y;
};

/// Where the level crosses the sides of a square between four centers, around the square.
std::vector<Crossing> crossings(const Grid& density, int column, int row, double level) {
  constexpr std::array<std::pair<int, int>, 5> kRound = {{{0, 0}, {1, 0}, {1, 1}, {0, 1}, {0, 0}}};
  std::vector<Crossing> found;
  for (std::size_t side = 0; side + 1 < kRound.size(); ++side) {
    const auto [x0, y0] = kRound[side];
    const auto [x1, y1] = kRound[side + 1];
    const double from = density[at(column + x0, row + y0)];
    const double to = density[at(column + x1, row + y1)];
    if ((from >= level) == (to >= level)) continue;
    const double part = (level - from) / (to - from);
    found.push_back({column + 0.5 + std::lerp(x0, x1, part), row + 0.5 + std::lerp(y0, y1, part)});
  }
  return found;
}

/// Two crossings are joined. Four, at a saddle, are joined in pairs that part the two high corners.
std::vector<Segment> contour_of(const Grid& density, double level, const Scale& scale) {
  std::vector<Segment> contour;
  for (int row = 0; row + 1 < kCells; ++row) {
    for (int column = 0; column + 1 < kCells; ++column) {
      auto found = crossings(density, column, row, level);
      const bool first_is_high = density[at(column, row)] >= level;
      if (found.size() == 4 && first_is_high) std::rotate(found.begin(), found.end() - 1, found.end());
      for (std::size_t i = 0; i + 1 < found.size(); i += 2) {
        contour.push_back({scale.x_of(found[i].x), scale.y_of(found[i].y), scale.x_of(found[i + 1].x),
                           scale.y_of(found[i + 1].y)});
      }
    }
  }
  return contour;
}

}  // namespace

std::string corner_name(const std::string& parameter) {
  std::string rest = parameter;
  if (takes(rest, "ln_column_density_cm2")) return fmt::format("log₁₀ N{} (cm⁻²)", part_name(rest));
  if (takes(rest, "ln_temperature_k")) return fmt::format("T{} (K)", part_name(rest));
  if (takes(rest, "ln_source_size_arcsec")) return fmt::format("size{} (arcsec)", part_name(rest));
  if (takes(rest, "background_k")) return "background (K)";
  return parameter;
}

std::vector<CornerParameter> corner_parameters(const Result& result) {
  const auto& draws = result.posterior.draws;
  if (draws.empty() || draws.size() != result.parameters.size()) return {};
  std::vector<std::size_t> whole;
  for (std::size_t i = 0; i < draws.front().size(); ++i) {
    const bool finite =
        std::all_of(draws.begin(), draws.end(), [i](const auto& of) { return std::isfinite(of[i]); });
    if (finite) whole.push_back(i);
  }
  if (whole.empty()) return {};
  std::vector<CornerParameter> parameters;
  for (std::size_t k = 0; k < std::min(draws.size(), kMostCornerParameters); ++k) {
    const std::string& name = result.parameters[k].name;
    CornerParameter& parameter = parameters.emplace_back();
    parameter.name = corner_name(name);
    for (const std::size_t i : whole) parameter.draws.push_back(shown(name, draws[k][i]));
    measure(parameter);
  }
  return parameters;
}

std::vector<CornerBin> corner_histogram(const CornerParameter& parameter) {
  constexpr double kOfSpread = 20.0;
  constexpr double kFarthest = 40.0;  // bins beyond the axis
  std::vector<double> sorted = parameter.draws;
  std::sort(sorted.begin(), sorted.end());
  const double width = spread95(sorted) / kOfSpread;
  const Axis& axis = parameter.axis;
  const double start = std::max(sorted.front(), axis.low - kFarthest * width) - 0.5 * width;
  const double end = std::min(sorted.back(), axis.high + kFarthest * width);
  const auto count = static_cast<std::size_t>(std::floor((end - start) / width)) + 1;
  std::vector<CornerBin> bins(count);
  for (std::size_t i = 0; i < count; ++i)
    bins[i] = {start + static_cast<double>(i) * width, start + static_cast<double>(i + 1) * width, 0};
  for (const double draw : sorted) {
    const double place = std::clamp((draw - start) / width, 0.0, static_cast<double>(count) - 0.5);
    ++bins[static_cast<std::size_t>(place)].count;
  }
  return bins;
}

CornerPanel corner_panel(const CornerParameter& x, const CornerParameter& y) {
  const Points points = points_of(x, y);
  CornerPanel panel;
  if (points.x.empty()) return panel;
  const Grid density = density_of(points);
  const auto values = densities_at_draws(density, points, x.draws.size());
  const Scale scale{x.axis, y.axis};
  for (std::size_t i = 0; i < std::size(kCornerShares); ++i) {
    append_cells(panel.cells, density, quantile(values, 1.0 - kCornerShares[i]), static_cast<int>(i) + 1,
                 scale);
  }
  panel.contour95 = contour_of(density, quantile(values, 0.05), scale);
  panel.contour68 = contour_of(density, quantile(values, 0.32), scale);
  return panel;
}

}  // namespace trotline
