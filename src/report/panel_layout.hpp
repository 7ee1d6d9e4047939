// Where everything stands on a page of line panels [mm from its lower left].
#pragma once

#include <string>
#include <vector>

#include <trotline/analysis/measurement.hpp>
#include <trotline/report/axis.hpp>
#include <trotline/report/figure.hpp>
#include <trotline/report/label_placement.hpp>

namespace trotline {

/// One line with the spectrum that it was measured in.
struct PanelLine {
  const LineMeasurement* line;
  const SpectrumMeasurement* spectrum;
};

/// What a text is: each role has its own type.
enum class PanelText { label, value, remark, mark, title, note };

struct PlacedText {
  PanelText role;
  double x_mm;
  double y_mm;
  std::string text;
};

struct PlacedPanel {
  PanelLine of;
  Box box;
  Axis velocity;
  Axis intensity;
  double noise_x = 0.0;  ///< where the bar of the noise stands
  double noise_y = 0.0;  ///< its middle
};

struct PanelPage {
  FigureSize size;
  std::vector<PlacedPanel> panels;
  std::vector<PlacedText> texts;
};

/// @param lines  with panels, kPanelsOnAPage at most  @param of_pages  1: the page is not numbered
[[nodiscard]] PanelPage lay_out_panels(const std::vector<PanelLine>& lines, std::size_t page,
                                       std::size_t of_pages);

}  // namespace trotline
