#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include <trotline/base/files.hpp>
#include <trotline/report/corner_data.hpp>
#include <trotline/report/corner_figure.hpp>
#include <trotline/report/display_text.hpp>
#include <trotline/report/font_coverage.hpp>
#include <trotline/report/text_measure.hpp>
#include <trotline/report/typeset.hpp>

namespace trotline {
namespace {

namespace fs = std::filesystem;
using Parameters = std::vector<CornerParameter>;

constexpr double kTextPoints = 7.0;
constexpr double kLeftMm = 16.0;
constexpr double kBottomMm = 12.0;
constexpr double kRightMm = 4.0;
constexpr double kTopMm = 10.0;
constexpr double kGapMm = 2.0;
constexpr double kRowMm = 3.3;  // of the list of ranges

/// Where the panels stand on the page.
struct Layout {
  std::size_t count = 1;
  double panel_mm = 60.0;
  double top_mm = kTopMm;
  [[nodiscard]] double span() const {
    return static_cast<double>(count) * panel_mm + static_cast<double>(count - 1) * kGapMm;
  }
  [[nodiscard]] FigureSize page() const { return {kLeftMm + span() + kRightMm, kBottomMm + span() + top_mm}; }
  [[nodiscard]] Box box(std::size_t column, std::size_t row) const {
    const double left = kLeftMm + static_cast<double>(column) * (panel_mm + kGapMm);
    const double bottom = kBottomMm + static_cast<double>(count - 1 - row) * (panel_mm + kGapMm);
    return {left, bottom, left + panel_mm, bottom + panel_mm};
  }
};

/// One column of a journal up to two parameters, two columns for more. A single panel leaves no corner free
/// for the list of ranges: it goes above.
Layout layout_of(std::size_t count) {
  constexpr double kPanels[kMostCornerParameters] = {60.0, 33.0, 33.0, 32.0, 28.5};
  return {count, kPanels[count - 1], count == 1 ? kTopMm + 4.0 * kRowMm : kTopMm};
}

std::string number(double value) { return fmt::format("{:.9g}", value); }

/// Two digits of the range's half width.
int decimals_of(const CornerParameter& parameter) {
  const double half = 0.5 * (parameter.high68 - parameter.low68);
  if (!(half > 0.0)) return 3;
  return std::clamp(1 - static_cast<int>(std::floor(std::log10(half))), 0, 9);
}

// ---- data

std::string histograms_data(const Parameters& parameters) {
  std::string bytes =
      "# one block a parameter: low edge\thigh edge\tdraws\tpart in the 68 % interval from\tto\n";
  for (const CornerParameter& parameter : parameters) {
    const auto bins = corner_histogram(parameter);
    bytes += fmt::format("{}\t{}\t0\tNaN\tNaN\n", number(bins.front().low), number(bins.front().low));
    for (const CornerBin& bin : bins) {
      const double from = std::max(bin.low, parameter.low68);
      const double to = std::min(bin.high, parameter.high68);
      bytes += fmt::format("{}\t{}\t{}\t{}\t{}\n", number(bin.low), number(bin.high), bin.count,
                           from < to ? number(from) : "NaN", from < to ? number(to) : "NaN");
    }
    bytes += fmt::format("{}\t{}\t0\tNaN\tNaN\n\n\n", number(bins.back().high), number(bins.back().high));
  }
  return bytes;
}

void append_contour(std::string& bytes, int percent, const std::vector<Segment>& contour) {
  for (const Segment& s : contour) {
    bytes += fmt::format("{}\t{}\t{}\t{}\t{}\n", percent, number(s.x0), number(s.y0), number(s.x1 - s.x0),
                         number(s.y1 - s.y0));
  }
}

/// Panels row by row: (0,1), (0,2), (1,2) ... as column and row.
std::vector<std::pair<std::size_t, std::size_t>> pairs_of(std::size_t count) {
  std::vector<std::pair<std::size_t, std::size_t>> pairs;
  for (std::size_t row = 1; row < count; ++row) {
    for (std::size_t column = 0; column < row; ++column) pairs.emplace_back(column, row);
  }
  return pairs;
}

std::vector<NamedBytes> density_data(const Parameters& parameters) {
  std::string cells = "# one block a panel: step of lightness\tx low\tx high\ty low\ty high\n";
  std::string contours = "# one block a panel: percent of the draws inside\tx\ty\tto x + \tto y +\n";
  for (const auto& [column, row] : pairs_of(parameters.size())) {
    const CornerPanel panel = corner_panel(parameters[column], parameters[row]);
    cells += "0\tNaN\tNaN\tNaN\tNaN\n";  // a block without rows would not count as one
    contours += "0\tNaN\tNaN\tNaN\tNaN\n";
    for (const CornerCells& of : panel.cells) {
      cells += fmt::format("{}\t{}\t{}\t{}\t{}\n", of.step, number(of.box.left), number(of.box.right),
                           number(of.box.bottom), number(of.box.top));
    }
    append_contour(contours, 95, panel.contour95);
    append_contour(contours, 68, panel.contour68);
    cells += "\n\n";
    contours += "\n\n";
  }
  return {{"corner-cells.tsv", cells}, {"corner-contours.tsv", contours}};
}

enum class TextKind { title = 0, note = 1, range = 2, below = 3, beside = 4 };

std::string text_row(TextKind kind, double x_mm, double y_mm, const std::string& text) {
  return fmt::format("{}\t{:.4f}\t{:.4f}\t{}\n", static_cast<int>(kind), x_mm, y_mm,
                     figure_text(drawable_text(text)));
}

/// A name that is at most `room_mm` wide.
std::string fitting(std::string name, double room_mm) {
  const double em_mm = kTextPoints * kMmPerPoint;
  name = display_text(name);
  bool cut = false;
  while (!name.empty() && text_width_em(name + (cut ? "…" : "")) * em_mm > room_mm) {
    do {
      const bool inside_character = (static_cast<unsigned char>(name.back()) & 0xC0) == 0x80;
      name.pop_back();
      if (!inside_character) break;
    } while (!name.empty());
    cut = true;
  }
  return cut ? name + "…" : name;
}

std::string title_of(const Result& result) {
  const std::string formula = typeset_formula(result.formula.empty() ? result.species : result.formula);
  return result.source.empty() ? formula : formula + ", " + result.source;
}

std::string draws_text(const Result& result, const Parameters& parameters) {
  const std::string draws = fmt::format("{} draws", parameters.front().draws.size());
  if (result.parameters.size() <= parameters.size()) return draws;
  return fmt::format("{}, first {} of {} parameters", draws, parameters.size(), result.parameters.size());
}

/// Each parameter's median and 68 % interval, in the free corner.
std::string ranges_text(const Layout& layout, const Parameters& parameters) {
  const double right = kLeftMm + layout.span();
  const double room = std::max(layout.panel_mm, layout.span() / 2.0 - kGapMm);
  double y = layout.page().height_mm - kTopMm - 1.0;
  std::string bytes;
  for (const CornerParameter& parameter : parameters) {
    const int decimals = decimals_of(parameter);
    bytes += text_row(TextKind::note, right, y, fitting(parameter.name, room));
    bytes += text_row(TextKind::range, right, y - kRowMm,
                      fmt::format("{:.{}f}   ({:.{}f} to {:.{}f})", parameter.median, decimals,
                                  parameter.low68, decimals, parameter.high68, decimals));
    y -= 2.2 * kRowMm;
  }
  bytes += text_row(TextKind::note, right, y, "median and 68 % interval");
  if (layout.count > 1) bytes += text_row(TextKind::note, right, y - kRowMm, "lines hold 68 % and 95 %");
  return bytes;
}

std::string texts_data(const Result& result, const Layout& layout, const Parameters& parameters) {
  const FigureSize page = layout.page();
  const double right = kLeftMm + layout.span();
  const std::string draws = draws_text(result, parameters);
  const double room = page.width_mm - 9.0 - text_width_em(draws) * kTextPoints * kMmPerPoint;
  constexpr double kTitleToText = 9.0 / kTextPoints * 1.1;  // bold and larger
  std::string bytes =
      "# kind (0 title, 1 note, 2 range, 3 name below, 4 name beside)\tx [mm]\ty [mm]\ttext\n";
  bytes +=
      text_row(TextKind::title, 3.0, page.height_mm - 4.5, fitting(title_of(result), room / kTitleToText));
  bytes += text_row(TextKind::note, right, page.height_mm - 4.5, draws);
  for (std::size_t i = 0; i < parameters.size(); ++i) {
    const std::string name = fitting(parameters[i].name, layout.panel_mm);
    const Box below = layout.box(i, parameters.size() - 1);
    bytes += text_row(TextKind::below, 0.5 * (below.left + below.right), 3.5, name);
    const Box beside = layout.box(0, i);
    if (i > 0) bytes += text_row(TextKind::beside, 3.5, 0.5 * (beside.bottom + beside.top), name);
  }
  return bytes + ranges_text(layout, parameters);
}

// ---- script

/// Every tick is drawn. A row of names leaves out each second where they would touch, and those that would
/// reach into the next panel.
std::string ticks(char axis_name, const Axis& axis, bool named, double panel_mm) {
  constexpr double kOverhangMm = 0.8;  // less than half the gap between panels
  constexpr double kBlankEm = 0.7;
  const double em_mm = kTextPoints * kMmPerPoint;
  const double mm_per_unit = panel_mm / (axis.high - axis.low);
  double widest = 0.0;
  for (const double tick : axis.ticks) widest = std::max(widest, text_width_em(tick_text(axis, tick)));
  const bool in_row = axis_name == 'x';
  const bool each_second = in_row && (widest + kBlankEm) * em_mm > axis.step * mm_per_unit;
  std::string list;
  for (std::size_t i = 0; i < axis.ticks.size(); ++i) {
    const double tick = axis.ticks[i];
    const double to_edge_mm = std::min(tick - axis.low, axis.high - tick) * mm_per_unit;
    const bool overhangs = in_row && 0.5 * widest * em_mm > to_edge_mm + kOverhangMm;
    const bool shown = named && !overhangs && (!each_second || i % 2 == 1);
    list += fmt::format("{}\"{}\" {:.12g}", i > 0 ? ", " : "", shown ? tick_text(axis, tick) : "", tick);
  }
  return fmt::format(
      "  set {0}range [{1:.12g}:{2:.12g}]\n  set {0}tics nomirror out scale 0.4 ({3}) font face.\",{4}\" "
      "textcolor rgb soft\n",
      axis_name, axis.low, axis.high, list, kTextPoints);
}

std::string margins(const Layout& layout, const Box& box) {
  const FigureSize page = layout.page();
  return fmt::format(
      "  set lmargin at screen {:.6f}\n  set rmargin at screen {:.6f}\n  set bmargin at screen {:.6f}\n"
      "  set tmargin at screen {:.6f}\n",
      box.left / page.width_mm, box.right / page.width_mm, box.bottom / page.height_mm,
      box.top / page.height_mm);
}

std::string histogram_script(const Layout& layout, const CornerParameter& parameter, std::size_t i) {
  constexpr double kHeadroom = 1.12;
  std::size_t highest = 1;
  for (const CornerBin& bin : corner_histogram(parameter)) {
    const bool inside = bin.high > parameter.axis.low && bin.low < parameter.axis.high;
    if (inside) highest = std::max(highest, bin.count);
  }
  return margins(layout, layout.box(i, i)) +
         ticks('x', parameter.axis, i + 1 == layout.count, layout.panel_mm) +
         fmt::format(
             "  unset ytics\n  set border 1 linewidth 0.6 linecolor rgb soft\n  set yrange [0:{0:.9g}]\n"
             "  plot \"corner-histograms.tsv\" index {1} using (0.5*($4+$5)):(0.5*$3):4:5:(0):3 with "
             "boxxyerror "
             "fillstyle solid 1 border rgb band linewidth 0.2 linecolor rgb band notitle, \\\n"
             "    \"\" index {1} using 1:3 with steps linewidth 0.9 linecolor rgb ink notitle, \\\n"
             "    \"+\" using ({2:.12g}):(0):(0):({0:.9g}/{3}) every ::0::0 with vectors nohead linewidth "
             "1.2 "
             "linecolor rgb line notitle\n",
             kHeadroom * static_cast<double>(highest), i, parameter.median, kHeadroom);
}

std::string panel_script(const Layout& layout, const Parameters& parameters, std::size_t column,
                         std::size_t row, std::size_t index) {
  std::string script = margins(layout, layout.box(column, row)) +
                       ticks('x', parameters[column].axis, row + 1 == layout.count, layout.panel_mm) +
                       ticks('y', parameters[row].axis, column == 0, layout.panel_mm) +
                       "  set border 3 linewidth 0.6 linecolor rgb soft\n  plot ";
  for (std::size_t step = 1; step <= std::size(kCornerShares); ++step) {
    script += fmt::format(
        "{0} index {1} using ($1=={2}?0.5*($2+$3):NaN):(0.5*($4+$5)):2:3:4:5 with boxxyerror fillstyle solid "
        "1 "
        "border rgb shade[{2}] linewidth 0.25 linecolor rgb shade[{2}] notitle, \\\n    ",
        step == 1 ? "\"corner-cells.tsv\"" : "\"\"", index, step);
  }
  return script +
         fmt::format(
             "\"corner-contours.tsv\" index {0} using ($1==95?$2:NaN):3:4:5 with vectors nohead linewidth "
             "0.6 linecolor rgb soft notitle, \\\n"
             "    \"\" index {0} using ($1==68?$2:NaN):3:4:5 with vectors nohead linewidth 1.0 linecolor "
             "rgb ink notitle\n",
             index);
}

/// All texts, in millimetres from the page's lower left corner.
std::string texts_script(const FigureSize& page) {
  std::string script = fmt::format(
      "  unset border\n  unset tics\n  set lmargin at screen 0\n  set rmargin at screen 1\n"
      "  set bmargin at screen 0\n  set tmargin at screen 1\n  set xrange [0:{:.9g}]\n  set yrange "
      "[0:{:.9g}]\n"
      "  plot \"corner-text.tsv\" using ($1==0?$2:NaN):3:4 with labels left noenhanced font face.\" Bold,9\" "
      "textcolor rgb ink notitle",
      page.width_mm, page.height_mm);
  const auto add = [&](TextKind kind, const char* how, double points, const char* colour) {
    script += fmt::format(
        ", \\\n    \"\" using ($1=={}?$2:NaN):3:4 with labels {} noenhanced font face.\",{}\" textcolor rgb "
        "{} "
        "notitle",
        static_cast<int>(kind), how, points, colour);
  };
  add(TextKind::note, "right", kTextPoints, "soft");
  add(TextKind::range, "right", kTextPoints, "ink");
  add(TextKind::below, "center", 8.0, "ink");
  add(TextKind::beside, "center rotate by 90", 8.0, "ink");
  return script + "\n  unset multiplot\n  unset output\n}\n";
}

std::string script_of(const Layout& layout, const Parameters& parameters,
                      const std::vector<FigureFormat>& formats) {
  std::string script = "# To draw it again: gnuplot corner.gp\n" + figure_palette(formats) +
                       "array shade[5] = [0xEDF3F3, 0xCDE5E7, 0x94C3CA, 0x559FAC, 0x1B7F8F]\n"
                       "set encoding utf8\nset datafile separator \"\\t\"\ndo for [format in formats] {\n  "
                       "reset\n  unset key\n" +
                       figure_terminals(layout.page()) + "  set output \"corner.\".format\n  set multiplot\n";
  for (std::size_t i = 0; i < parameters.size(); ++i) script += histogram_script(layout, parameters[i], i);
  std::size_t index = 0;
  for (const auto& [column, row] : pairs_of(parameters.size()))
    script += panel_script(layout, parameters, column, row, index++);
  return script + texts_script(layout.page());
}

}  // namespace

std::vector<std::string> write_corner(const Result& result, const fs::path& folder,
                                      const std::vector<FigureFormat>& formats) {
  const Parameters parameters = corner_parameters(result);
  if (parameters.empty() || parameters.front().draws.size() < kFewestCornerDraws) return {};
  const Layout layout = layout_of(parameters.size());
  std::vector<NamedBytes> files = density_data(parameters);
  files.push_back({"corner-histograms.tsv", histograms_data(parameters)});
  files.push_back({"corner-text.tsv", texts_data(result, layout, parameters)});
  files.push_back({"corner.gp", script_of(layout, parameters, formats)});
  std::vector<std::string> names;
  for (const NamedBytes& file : files) {
    write_file(folder / file.name, file.bytes);
    names.push_back(file.name);
  }
  const auto figures = draw_figure(
      {.script = "corner.gp", .stem = "corner", .title = "Draws of the posterior", .formats = formats},
      folder);
  names.insert(names.end(), figures.begin(), figures.end());
  return names;
}

}  // namespace trotline
