#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include <trotline/base/files.hpp>
#include <trotline/report/font_coverage.hpp>
#include <trotline/report/line_panels.hpp>
#include <trotline/report/text_measure.hpp>

#include "panel_layout.hpp"

namespace trotline {
namespace {

std::string number(double value) { return std::isfinite(value) ? fmt::format("{:.9g}", value) : "NaN"; }

double value_at(const Eigen::ArrayXd& values, Eigen::Index i) {
  return values.size() > i ? values(i) : std::numeric_limits<double>::quiet_NaN();
}

/// One block a panel, by rising velocity, two empty lines between them.
std::string data_file(const PanelPage& page) {
  std::string bytes = "# V_LSR [km/s]\tobserved\tbaseline\tfit\tprediction\n";
  for (const PlacedPanel& placed : page.panels) {
    const LinePanel& panel = *placed.of.line->panel;
    const Eigen::Index n = panel.velocity_km_s.size();
    const bool rises = n < 2 || panel.velocity_km_s(1) > panel.velocity_km_s(0);
    for (Eigen::Index k = 0; k < n; ++k) {
      const Eigen::Index i = rises ? k : n - 1 - k;
      const double velocity = panel.velocity_km_s(i);
      if (velocity < placed.velocity.low || velocity > placed.velocity.high) continue;
      bytes += number(velocity);
      for (const auto* values : {&panel.intensity, &panel.baseline, &panel.model, &panel.prediction})
        bytes += "\t" + number(value_at(*values, i));
      bytes += "\n";
    }
    bytes += "\n\n";
  }
  return bytes;
}

std::string text_file(const PanelPage& page) {
  std::string bytes =
      "# role (0 label, 1 value, 2 remark, 3 other line, 4 title, 5 note)\tx [mm]\ty [mm]\ttext\ttext for "
      "which there are fonts\n";
  for (const PlacedText& text : page.texts) {
    bytes += fmt::format("{}\t{}\t{}\t{}\t{}\n", static_cast<int>(text.role), number(text.x_mm),
                         number(text.y_mm), figure_text(text.text), figure_text(drawable_text(text.text)));
  }
  return bytes;
}

std::string margins(const Box& box, const FigureSize& size) {
  return fmt::format(
      "  set lmargin at screen {:.6f}\n  set rmargin at screen {:.6f}\n"
      "  set bmargin at screen {:.6f}\n  set tmargin at screen {:.6f}\n",
      box.left / size.width_mm, box.right / size.width_mm, box.bottom / size.height_mm,
      box.top / size.height_mm);
}

std::string axis_settings(const char* axis, const Axis& of, const char* offset) {
  std::string list;
  for (const double tick : of.ticks)
    list += fmt::format("{}\"{}\" {}", list.empty() ? "" : ", ", tick_text(of, tick), number(tick));
  return fmt::format(
      "  set {0}range [{1}:{2}]\n"
      "  set {0}tics nomirror in scale 0.5 {3}({4}) font face.\",6.5\" textcolor rgb soft\n",
      axis, number(of.low), number(of.high), offset, list);
}

/// Window, noise and other lines, as objects and arrows.
std::string furniture(const PlacedPanel& panel) {
  const LineMeasurement& line = *panel.of.line;
  std::string text = fmt::format(
      "  set object 1 rectangle from first {},graph 0 to first {},graph 1 fillcolor rgb sand fillstyle solid "
      "noborder behind\n",
      number(std::max(line.window.low_km_s, panel.velocity.low)),
      number(std::min(line.window.high_km_s, panel.velocity.high)));
  text += fmt::format(
      "  set arrow 1 from first {0},first {1} to first {0},first {2} heads size screen 0.003,90 linewidth 1.0 "
      "linecolor rgb ink front\n",
      number(panel.noise_x), number(panel.noise_y - line.rms), number(panel.noise_y + line.rms));
  int id = 2;
  for (const PanelMark& mark : line.panel->marks) {
    if (mark.velocity_km_s < panel.velocity.low || mark.velocity_km_s > panel.velocity.high) continue;
    text += fmt::format(
        "  set arrow {0} from first {1},graph 0.82 to first {1},graph 0.99 nohead linewidth 0.8 linecolor rgb "
        "soft front\n",
        id++, number(mark.velocity_km_s));
  }
  return text;
}

std::string panel_script(const PlacedPanel& panel, std::size_t index, const std::string& stem,
                         const FigureSize& size) {
  std::string script = margins(panel.box, size) + axis_settings("x", panel.velocity, "offset 0,0.55 ") +
                       axis_settings("y", panel.intensity, "offset 0.6,0 ") + furniture(panel);
  script += fmt::format(
      R"(  plot "{0}-data.tsv" index {1} using 1:5 with lines linewidth 2.4 linecolor rgb guide notitle, \
    "" index {1} using 1:4 with lines linewidth 1.4 linecolor rgb line notitle, \
    "" index {1} using 1:3 with lines dashtype 2 linewidth 0.8 linecolor rgb soft notitle, \
    "" index {1} using 1:2 with histeps linewidth 0.5 linecolor rgb ink notitle
  unset object
  unset arrow
)",
      stem, index);
  return script;
}

std::string page_texts(const std::string& stem, const FigureSize& size) {
  return fmt::format(R"(  set lmargin at screen 0
  set rmargin at screen 1
  set bmargin at screen 0
  set tmargin at screen 1
  unset border
  unset xtics
  unset ytics
  set xrange [0:{1}]
  set yrange [0:{2}]
  plot "{0}-text.tsv" using ($1==0?$2:NaN):3:pagetext with labels left noenhanced font face." Bold,7.5" textcolor rgb ink notitle, \
    "" using ($1==1?$2:NaN):3:pagetext with labels right noenhanced font face.",7.5" textcolor rgb ink notitle, \
    "" using ($1==2?$2:NaN):3:pagetext with labels left noenhanced font face.",6.5" textcolor rgb soft notitle, \
    "" using ($1==3?$2:NaN):3:pagetext with labels left noenhanced font face.",6" textcolor rgb soft notitle, \
    "" using ($1==4?$2:NaN):3:pagetext with labels left noenhanced font face." Bold,9" textcolor rgb ink notitle, \
    "" using ($1==5?$2:NaN):3:pagetext with labels left noenhanced font face.",7" textcolor rgb soft notitle
  unset multiplot
  unset output
}}
)",
                     stem, number(size.width_mm), number(size.height_mm));
}

std::string page_script(const PanelPage& page, const std::string& stem,
                        const std::vector<FigureFormat>& formats) {
  std::string script = fmt::format(
      "# Measured lines. To draw them again: gnuplot {0}.gp\n"
      "# Numbers and fixed words only; what is text stands in {0}-text.tsv.\n",
      stem);
  script += figure_palette(formats);
  script += R"(set encoding utf8
set datafile separator "\t"
do for [format in formats] {
  reset
  unset key
  pagetext = (format eq "svg") ? 4 : 5
)" + figure_terminals(page.size);
  script += fmt::format(
      "  set output \"{}.\".format\n  set multiplot\n  set border 15 linewidth 0.5 linecolor rgb grey\n", stem);
  for (std::size_t i = 0; i < page.panels.size(); ++i)
    script += panel_script(page.panels[i], i, stem, page.size);
  return script + page_texts(stem, page.size);
}

std::vector<PanelLine> lines_with_panels(const SpeciesMeasurement& measurement) {
  std::vector<PanelLine> lines;
  for (const SpectrumMeasurement& spectrum : measurement.spectra) {
    for (const LineMeasurement& line : spectrum.lines) {
      if (line.panel && line.status == LineStatus::measured) lines.push_back({&line, &spectrum});
    }
  }
  return lines;
}

std::vector<std::string> write_page(const PanelPage& page, const std::string& stem,
                                    const std::filesystem::path& folder, const LinePanelOptions& options) {
  std::vector<std::string> names = {stem + "-data.tsv", stem + "-text.tsv", stem + ".gp"};
  write_file(folder / names[0], data_file(page));
  write_file(folder / names[1], text_file(page));
  write_file(folder / names[2], page_script(page, stem, options.formats));
  const auto figures = draw_figure(
      {names[2], stem, "Measured lines", options.formats, options.timeout_s, options.program}, folder);
  names.insert(names.end(), figures.begin(), figures.end());
  return names;
}

}  // namespace

std::size_t count_line_panels(const SpeciesMeasurement& measurement) {
  return lines_with_panels(measurement).size();
}

std::vector<std::string> write_line_panels(const SpeciesMeasurement& measurement,
                                           const std::filesystem::path& folder,
                                           const LinePanelOptions& options) {
  const std::vector<PanelLine> lines = lines_with_panels(measurement);
  const std::size_t pages =
      std::min(kMostPanelPages, (lines.size() + kPanelsOnAPage - 1) / kPanelsOnAPage);
  std::vector<std::string> names;
  for (std::size_t page = 0; page < pages; ++page) {
    const auto begin = lines.begin() + static_cast<std::ptrdiff_t>(page * kPanelsOnAPage);
    const auto count = std::min(kPanelsOnAPage, lines.size() - page * kPanelsOnAPage);
    const std::vector<PanelLine> part(begin, begin + static_cast<std::ptrdiff_t>(count));
    const std::string stem = page == 0 ? "panels" : fmt::format("panels-{}", page + 1);
    const auto written = write_page(lay_out_panels(part, page, pages), stem, folder, options);
    names.insert(names.end(), written.begin(), written.end());
  }
  return names;
}

}  // namespace trotline
