#pragma once

#include <cstddef>
#include <string>
#include <vector>

#include <trotline/analysis/result.hpp>
#include <trotline/report/figure.hpp>
#include <trotline/report/axis.hpp>
#include <trotline/report/label_placement.hpp>

namespace trotline {

enum class PointKind {
  fitted,   ///< filled
  limit,    ///< hollow, with an arrow downwards
  left_out  ///< hollow and grey, crossed
};

/// One line of the result in the diagram.
struct DiagramPoint {
  double energy_k = 0.0;
  double ln_nu_gu = 0.0;
  double bar_low = 0.0;  ///< ends of the error bar, cut to the panel; both ln_nu_gu where there is none
  double bar_high = 0.0;
  double arrow_end = 0.0;        ///< tip of a limit's arrow; ln_nu_gu for the others
  double residual = kNotKnown;   ///< in units of its error, cut to the panel
  bool residual_is_cut = false;  ///< it lies beyond the panel
  PointKind kind = PointKind::fitted;
  int shape = 0;  ///< markers of different shape for sets of lines, such as spin isomers: 0 to 3
};

/// The fitted line and its 68 % band at one energy, cut to the panel.
struct DiagramSample {
  double energy_k = 0.0;
  double center = 0.0;
  double low = 0.0;
  double high = 0.0;
};

/// A transition's label, in the coordinates of the diagram.
struct DiagramLabel {
  std::string text;
  double energy_k = 0.0;  ///< center of the text
  double ln_nu_gu = 0.0;
  bool has_leader = false;
  Segment leader;
};

/// What a text on the page is: each role has its own type.
enum class TextRole { source, species, answer, detail };

/// A text on the page [mm from the lower left]; species, answer and detail end at x, source begins there.
struct PageText {
  TextRole role = TextRole::source;
  double x_mm = 0.0;
  double y_mm = 0.0;
  std::string text;
};

/// Everything in the figure, placed. Nothing here depends on the program that draws it.
struct DiagramLayout {
  FigureSize size;
  Box diagram_mm;    ///< panel of ln(N_u/g_u)
  Box residuals_mm;  ///< panel of the residuals, on the same energies
  Axis energy;
  Axis ln_nu_gu;
  Axis residual;
  std::vector<DiagramPoint> points;
  std::vector<DiagramSample> fit;  ///< empty where there is no line to draw; a NaN energy ends a curve
  std::vector<DiagramLabel> labels;
  std::size_t labels_left_out = 0;  ///< for want of room
  std::vector<PageText> texts;
};

/// Lays out the rotation diagram of a result: axes, points, line and band, labels, texts. Lines without a
/// finite energy and ordinate are not drawn. Above 48 lines only those that stand out are labelled: limits,
/// lines left out and residuals beyond 2 sigma.
/// @throws DomainError when the figure is smaller than 60 mm on a side, or not finite
[[nodiscard]] DiagramLayout lay_out_diagram(const Result& result, const FigureSize& size = {});

/// Sizes of type [pt] that layout and drawing share.
inline constexpr double kTitlePoints = 9.0;
inline constexpr double kAnswerPoints = 8.5;
inline constexpr double kAxisPoints = 8.0;
inline constexpr double kSmallPoints = 7.5;

/// Diameter of a marker [mm].
inline constexpr double kMarkerMm = 1.7;

}  // namespace trotline
