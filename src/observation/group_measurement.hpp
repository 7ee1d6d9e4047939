// One group of lines in one spectrum: baseline, sum, fit, flags.
#pragma once

#include <trotline/observation/line_measurement.hpp>

#include "line_windows.hpp"

namespace trotline {

/// What all groups of one spectrum share.
struct MeasurementContext {
  const Spectrum& spectrum;
  const MeasurementOptions& options;
  const NoiseCorrelation& correlation;
  const std::vector<bool>& excluded;          ///< channels in or beside any line's window
  const std::vector<PlacedLine>& neighbours;  ///< lines that are marked, not measured
};

/// Measures the lines of a group; one result for each, in the order of the group.
[[nodiscard]] std::vector<LineMeasurement> measure_group(const MeasurementContext& context,
                                                         const LineGroup& group);

/// A Gaussian fit to the line that stands out most in its window, to find a common window.
struct BestLine {
  double signal_to_noise = 0.0;
  double velocity_km_s = 0.0;
  double fwhm_km_s = 0.0;
  double channel_km_s = 0.0;
};
[[nodiscard]] std::optional<BestLine> fit_best_line(const MeasurementContext& context,
                                                    const std::vector<LineGroup>& groups);

}  // namespace trotline
