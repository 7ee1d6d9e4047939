#include <fmt/format.h>

#include <cmath>

#include <trotline/report/diagram_files.hpp>
#include <trotline/report/text_measure.hpp>

namespace trotline {
namespace {

std::string number(double value) { return fmt::format("{:.9g}", value); }

constexpr const char* kHead =
    "# Rotation diagram. To draw it again: gnuplot diagram.gp\n"
    "# Numbers and fixed words only; what is text stands in diagram-text.tsv and diagram-labels.tsv.\n";

/// Margins that put a panel on the page.
std::string panel(const Box& box, const FigureSize& size) {
  return fmt::format(
      "  set lmargin at screen {:.6f}\n  set rmargin at screen {:.6f}\n"
      "  set bmargin at screen {:.6f}\n  set tmargin at screen {:.6f}\n",
      box.left / size.width_mm, box.right / size.width_mm, box.bottom / size.height_mm,
      box.top / size.height_mm);
}

std::string range(const char* axis, const Axis& of) {
  return fmt::format("  set {}range [{}:{}]\n", axis, number(of.low), number(of.high));
}

std::string ticks(const char* axis, const Axis& of, bool named) {
  std::string list;
  for (const double tick : of.ticks) {
    list +=
        fmt::format("{}\"{}\" {}", list.empty() ? "" : ", ", named ? tick_text(of, tick) : "", number(tick));
  }
  const char* const closer = *axis == 'x' ? "offset 0,0.35 " : "";
  return fmt::format("  set {}tics nomirror out scale 0.55 {}({}) font face.\",{}\" textcolor rgb soft\n",
                     axis, closer, list, kSmallPoints);
}

/// A fixed name of an axis, in italics where the trade has them.
std::string axis_name(int id, const char* words, double x_mm, double y_mm, const char* side,
                      const FigureSize& size) {
  return fmt::format(
      "  set label {} \"{}\" at screen {:.6f},{:.6f} {} font face.\",{}\" textcolor rgb ink enhanced\n", id,
      words, x_mm / size.width_mm, y_mm / size.height_mm, side, kAxisPoints);
}

// across() is the marker size that measures so many millimetres, found by measuring drawn markers.
const char* const kOpening = R"(set encoding utf8
set datafile separator "\t"
do for [format in formats] {
  reset
  unset key
  set style fill solid noborder
  pagetext = (format eq "svg") ? 4 : 5
  labeltext = (format eq "svg") ? 8 : 9
  across(mm) = (format eq "svg") ? mm/1.85 : (mm-0.33)/2.13
)";

const char* const kOpenPage = R"(  set output "diagram.".format
  set multiplot
  set border 2 linewidth 0.6 linecolor rgb soft back
  set grid xtics linetype 1 linewidth 0.4 linecolor rgb hair back
)";

constexpr double kRingMm = 0.55;      // white around markers, both sides together
constexpr double kCrossShare = 0.62;  // size of the cross in a marker of a line left out

/// From back to front: band, line, leaders, bars, a white ring about every marker, markers, labels.
std::string diagram_plot() {
  return fmt::format(R"(  plot "diagram-line.tsv" using 1:3:4 with filledcurves fillcolor rgb band notitle, \
    "" using 1:2 with lines linewidth 1.3 linecolor rgb line notitle, \
    "diagram-labels.tsv" using ($1==1?$4:NaN):5:($6-$4):($7-$5) with vectors nohead linewidth 0.4 linecolor rgb grey notitle, \
    "diagram-points.tsv" using 2:3 with points pointtype 7 pointsize across({1:.2f}) linecolor rgb 0xFFFFFF notitle, \
    "" using ($1==0?$2:NaN):4:(0):($5-$4) with vectors nohead linewidth 0.8 linecolor rgb ink notitle, \
    "" using ($1==2?$2:NaN):4:(0):($5-$4) with vectors nohead linewidth 0.6 linecolor rgb grey notitle, \
    "" using ($1==1?$2:NaN):3:(0):($6-$3) with vectors head filled size screen 0.012,25 linewidth 0.9 linecolor rgb ink notitle, \
    "" using ($1==0?$2:NaN):3:9 with points pointtype variable pointsize across({0:.2f}) linecolor rgb ink notitle, \
    "" using ($1==1?$2:NaN):3:9 with points pointtype variable pointsize across({0:.2f}) linewidth 0.9 linecolor rgb ink notitle, \
    "" using ($1==2?$2:NaN):3:9 with points pointtype variable pointsize across({0:.2f}) linewidth 0.8 linecolor rgb grey notitle, \
    "" using ($1==2?$2:NaN):3 with points pointtype 2 pointsize across({2:.2f}) linewidth 0.8 linecolor rgb grey notitle, \
    "diagram-labels.tsv" using 2:3:labeltext with labels center noenhanced font face.",{3}" textcolor rgb soft notitle
)",
                     kMarkerMm, kMarkerMm + kRingMm, kCrossShare * kMarkerMm, kSmallPoints);
}

/// The band of 1 sigma, lines at 2 sigma, a stem from zero to every residual.
std::string residual_plot() {
  constexpr double kSmaller = 0.9;
  return fmt::format(
      R"(  set object 1 rectangle from graph 0, first -1 to graph 1, first 1 fillcolor rgb sand fillstyle solid noborder behind
  plot 2 with lines dashtype 2 linewidth 0.5 linecolor rgb guide notitle, \
    -2 with lines dashtype 2 linewidth 0.5 linecolor rgb guide notitle, \
    0 with lines linewidth 1.0 linecolor rgb line notitle, \
    "diagram-points.tsv" using ($1==0?$2:NaN):(0):(0):7 with vectors nohead linewidth 0.8 linecolor rgb ink notitle, \
    "" using ($8==0?$2:NaN):7 with points pointtype 7 pointsize across({1:.2f}) linecolor rgb 0xFFFFFF notitle, \
    "" using ($1==0&&$8==0?$2:NaN):7:9 with points pointtype variable pointsize across({0:.2f}) linecolor rgb ink notitle, \
    "" using ($1==1&&$8==0?$2:NaN):7:9 with points pointtype variable pointsize across({0:.2f}) linewidth 0.8 linecolor rgb ink notitle, \
    "" using ($1==2&&$8==0?$2:NaN):7:9 with points pointtype variable pointsize across({0:.2f}) linewidth 0.7 linecolor rgb grey notitle, \
    "" using ($1==2&&$8==0?$2:NaN):7 with points pointtype 2 pointsize across({2:.2f}) linewidth 0.7 linecolor rgb grey notitle, \
    "" using ($1==0&&$8==1?$2:NaN):7:($7>0?9:11) with points pointtype variable pointsize across({0:.2f}) linecolor rgb ink notitle, \
    "" using ($1==1&&$8==1?$2:NaN):7:($7>0?8:10) with points pointtype variable pointsize across({0:.2f}) linewidth 0.8 linecolor rgb ink notitle, \
    "" using ($1==2&&$8==1?$2:NaN):7:($7>0?8:10) with points pointtype variable pointsize across({0:.2f}) linewidth 0.7 linecolor rgb grey notitle
)",
      kSmaller * kMarkerMm, kSmaller * kMarkerMm + kRingMm, kSmaller * kCrossShare * kMarkerMm);
}

/// Texts of the page, over everything, in millimetres.
std::string page_plot(const FigureSize& size) {
  return fmt::format(R"(  set lmargin at screen 0
  set rmargin at screen 1
  set bmargin at screen 0
  set tmargin at screen 1
  unset border
  unset grid
  unset xtics
  unset ytics
  set xrange [0:{0}]
  set yrange [0:{1}]
  plot "diagram-text.tsv" using ($1==0?$2:NaN):3:pagetext with labels left noenhanced font face." Bold,{2}" textcolor rgb ink notitle, \
    "" using ($1==1?$2:NaN):3:pagetext with labels right noenhanced font face.",{2}" textcolor rgb ink notitle, \
    "" using ($1==2?$2:NaN):3:pagetext with labels right enhanced font face.",{3}" textcolor rgb ink notitle, \
    "" using ($1==3?$2:NaN):3:pagetext with labels right enhanced font face.",{4}" textcolor rgb soft notitle
  unset multiplot
  unset output
}}
)",
                     number(size.width_mm), number(size.height_mm), kTitlePoints, kAnswerPoints,
                     kSmallPoints);
}

/// The line under the title.
std::string rule(const FigureSize& size) {
  constexpr double kBelowTop = 6.3;
  constexpr double kMargin = 2.0;
  const double y = (size.height_mm - kBelowTop) / size.height_mm;
  return fmt::format(
      "  set arrow 1 from screen {:.6f},{:.6f} to screen {:.6f},{:.6f} nohead linewidth 0.8 linecolor rgb "
      "ink\n",
      kMargin / size.width_mm, y, 1.0 - kMargin / size.width_mm, y);
}

}  // namespace

std::string diagram_script(const DiagramLayout& layout, const std::vector<FigureFormat>& formats) {
  const FigureSize& size = layout.size;
  constexpr double kNameAbove = 3.1;
  std::string script =
      std::string(kHead) + figure_palette(formats) + kOpening + figure_terminals(size) + kOpenPage;
  script += panel(layout.diagram_mm, size) + range("x", layout.energy) + range("y", layout.ln_nu_gu);
  script += "  unset xtics\n" + ticks("x", layout.energy, false) + "  set xtics scale 0\n";
  script += ticks("y", layout.ln_nu_gu, true);
  script += axis_name(1, "ln({/:Italic N}_u/{/:Italic g}_u),  {/:Italic N}_u in cm⁻²", 2.0,
                      layout.diagram_mm.top + kNameAbove, "left", size);
  script += rule(size) + diagram_plot() + "  unset label\n  unset arrow\n";
  script += "  set border 3\n" + panel(layout.residuals_mm, size) + range("y", layout.residual);
  script += ticks("x", layout.energy, true) + ticks("y", layout.residual, true);
  script += axis_name(1, "residual (σ)", 2.0, layout.residuals_mm.top + kNameAbove, "left", size);
  script += axis_name(2, "{/:Italic E}_u/{/:Italic k} (K)", layout.residuals_mm.right, 2.6, "right", size);
  script += residual_plot() + "  unset label\n  unset object\n" + page_plot(size);
  return script;
}

}  // namespace trotline
