#include "line_windows.hpp"

#include <trotline/physics/constants.hpp>

namespace trotline {
namespace {

constexpr double kKmPerM = 1e-3;

/// A fraction of a channel, kept inside of what an index holds.
Eigen::Index clamped(double channel) {
  constexpr double kFar = 1e15;
  return static_cast<Eigen::Index>(std::clamp(channel, -kFar, kFar));
}

}  // namespace

double velocity_km_s(double frequency_hz, double rest_frequency_hz) {
  return constants::kLightMPerS * kKmPerM * (1.0 - frequency_hz / rest_frequency_hz);
}

double frequency_at_hz(double velocity, double rest_frequency_hz) {
  return rest_frequency_hz * (1.0 - velocity / (constants::kLightMPerS * kKmPerM));
}

PlacedLine place(const LineRequest& request, std::size_t index, const VelocityRange& common,
                 const SpectralAxis& axis) {
  PlacedLine line{.request = &request,
                  .index = index,
                  .window = request.window.value_or(common),
                  .wanted = {},
                  .inside = {}};
  const double one = axis.channel_of(frequency_at_hz(line.window.low_km_s, request.rest_frequency_hz));
  const double other = axis.channel_of(frequency_at_hz(line.window.high_km_s, request.rest_frequency_hz));
  // The channels whose centres lie in the window; the margin keeps rounding from moving a centre on its edge.
  constexpr double kMargin = 1e-6;
  line.wanted = {clamped(std::ceil(std::min(one, other) - kMargin)),
                 clamped(std::floor(std::max(one, other) + kMargin)) + 1};
  const auto channels = static_cast<Eigen::Index>(axis.size());
  line.inside = {std::clamp<Eigen::Index>(line.wanted.begin, 0, channels),
                 std::clamp<Eigen::Index>(line.wanted.end, 0, channels)};
  return line;
}

Eigen::Index guard_of(const PlacedLine& line) {
  constexpr Eigen::Index kFewest = 2;
  return std::max(kFewest, line.wanted.size() / 4);
}

std::vector<bool> excluded_channels(const std::vector<PlacedLine>& lines, std::size_t channels) {
  std::vector<bool> excluded(channels, false);
  for (const PlacedLine& line : lines) {
    if (line.inside.size() == 0) continue;
    const Eigen::Index guard = guard_of(line);
    const Eigen::Index end = std::min(line.inside.end + guard, static_cast<Eigen::Index>(channels));
    for (Eigen::Index i = std::max<Eigen::Index>(0, line.inside.begin - guard); i < end; ++i) {
      excluded[static_cast<std::size_t>(i)] = true;
    }
  }
  return excluded;
}

std::vector<LineGroup> grouped(std::vector<PlacedLine> lines) {
  std::sort(lines.begin(), lines.end(), [](const PlacedLine& a, const PlacedLine& b) {
    return std::pair(a.wanted.begin, a.index) < std::pair(b.wanted.begin, b.index);
  });
  std::vector<LineGroup> groups;
  Eigen::Index reached = 0;
  for (const PlacedLine& line : lines) {
    if (groups.empty() || line.wanted.begin >= reached) groups.emplace_back();
    reached = groups.back().empty() ? line.wanted.end : std::max(reached, line.wanted.end);
    groups.back().push_back(line);
  }
  return groups;
}

}  // namespace trotline
