// Where lines lie among the channels of a spectrum.
#pragma once

#include <trotline/observation/line_measurement.hpp>

namespace trotline {

/// Channels from begin to before end.
struct ChannelSpan {
  Eigen::Index begin = 0;
  Eigen::Index end = 0;
  [[nodiscard]] Eigen::Index size() const { return end > begin ? end - begin : 0; }
};

/// V_LSR [km/s] of a frequency for a line, radio convention.
[[nodiscard]] double velocity_km_s(double frequency_hz, double rest_frequency_hz);
[[nodiscard]] double frequency_at_hz(double velocity, double rest_frequency_hz);

/// One request with its window among the channels; `wanted` may reach beyond the band, `inside` is what lies
/// in it.
struct PlacedLine {
  const LineRequest* request = nullptr;
  std::size_t index = 0;  ///< among the requests
  VelocityRange window;
  ChannelSpan wanted;
  ChannelSpan inside;
};

/// Lines that are measured together.
using LineGroup = std::vector<PlacedLine>;

/// @param common  the window of requests that bring none
[[nodiscard]] PlacedLine place(const LineRequest& request, std::size_t index, const VelocityRange& common,
                               const SpectralAxis& axis);

/// Channels beside a window that belong to neither line nor baseline: a quarter of the window on each side.
[[nodiscard]] Eigen::Index guard_of(const PlacedLine& line);

/// True for every channel in or beside a window.
[[nodiscard]] std::vector<bool> excluded_channels(const std::vector<PlacedLine>& lines, std::size_t channels);

/// Lines whose windows overlap, in chains; each group by rising channel.
[[nodiscard]] std::vector<LineGroup> grouped(std::vector<PlacedLine> lines);

}  // namespace trotline
