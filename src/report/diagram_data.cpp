#include <fmt/format.h>

#include <cmath>

#include <trotline/report/diagram_files.hpp>
#include <trotline/report/figure.hpp>
#include <trotline/report/font_coverage.hpp>

namespace trotline {
namespace {

std::string number(double value) { return std::isfinite(value) ? fmt::format("{:.9g}", value) : "NaN"; }

std::string row(const std::vector<std::string>& cells) { return fmt::format("{}\n", fmt::join(cells, "\t")); }

/// Markers by shape: filled and hollow, in the numbering of the plotting program.
struct MarkerPair {
  int filled;
  int hollow;
};
constexpr MarkerPair kShapes[] = {{7, 6}, {5, 4}, {13, 12}, {9, 8}};  // circle, square, diamond, triangle

int marker_of(const DiagramPoint& point) {
  const MarkerPair& pair = kShapes[static_cast<std::size_t>(point.shape) % std::size(kShapes)];
  return point.kind == PointKind::fitted ? pair.filled : pair.hollow;
}

NamedBytes points_file(const DiagramLayout& layout) {
  std::string bytes =
      "# kind (0 fitted, 1 limit, 2 left out)\tE_u/k [K]\tln(N_u/g_u)\tbar low\tbar high\tarrow "
      "tip\tresidual "
      "[sigma]\tresidual cut to the panel (1)\tmarker\n";
  for (const DiagramPoint& point : layout.points) {
    bytes += row({number(static_cast<int>(point.kind)), number(point.energy_k), number(point.ln_nu_gu),
                  number(point.bar_low), number(point.bar_high), number(point.arrow_end),
                  number(point.residual), point.residual_is_cut ? "1" : "0", number(marker_of(point))});
  }
  return {"diagram-points.tsv", bytes};
}

NamedBytes line_file(const DiagramLayout& layout) {
  std::string bytes = "# E_u/k [K]\tfitted ln(N_u/g_u)\t68 % low\t68 % high\n";
  for (const DiagramSample& sample : layout.fit) {
    if (std::isnan(sample.energy_k)) {  // between two curves
      bytes += "\n";
      continue;
    }
    bytes += row({number(sample.energy_k), number(sample.center), number(sample.low), number(sample.high)});
  }
  return {"diagram-line.tsv", bytes};
}

NamedBytes labels_file(const DiagramLayout& layout) {
  std::string bytes =
      "# leader (1) or none (0)\tE_u/k [K]\tln(N_u/g_u)\tleader from\t\tto\t\ttext\ttext for which there are "
      "fonts\n";
  for (const DiagramLabel& label : layout.labels) {
    bytes += row({label.has_leader ? "1" : "0", number(label.energy_k), number(label.ln_nu_gu),
                  number(label.leader.x0), number(label.leader.y0), number(label.leader.x1),
                  number(label.leader.y1), figure_text(label.text), figure_text(drawable_text(label.text))});
  }
  return {"diagram-labels.tsv", bytes};
}

/// The symbols T, N and p of our own texts in italics, as the plotting program marks them.
std::string with_italics(const std::string& text) {
  std::string marked;
  for (std::size_t i = 0; i < text.size(); ++i) {
    const char before = i > 0 ? text[i - 1] : ' ';
    const char after = i + 1 < text.size() ? text[i + 1] : ' ';
    const bool symbol = (text[i] == 'T' || text[i] == 'N' || text[i] == 'p') && before == ' ';
    const bool alone = after == ' ' || after == '(';
    marked += symbol && alone ? fmt::format("{{/:Italic {}}}", text[i]) : std::string(1, text[i]);
  }
  return marked;
}

/// Answer and detail hold no text from outside, and only they may be marked up.
std::string page_text(const PageText& text) {
  const bool ours = text.role == TextRole::answer || text.role == TextRole::detail;
  return ours ? with_italics(text.text) : text.text;
}

NamedBytes text_file(const DiagramLayout& layout) {
  std::string bytes =
      "# role (0 source, 1 species, 2 answer, 3 detail)\tx [mm]\ty [mm]\ttext\ttext for which there are "
      "fonts\n";
  for (const PageText& text : layout.texts) {
    const std::string shown = page_text(text);
    bytes += row({number(static_cast<int>(text.role)), number(text.x_mm), number(text.y_mm), figure_text(shown),
                  figure_text(drawable_text(shown))});
  }
  return {"diagram-text.tsv", bytes};
}

}  // namespace

std::vector<NamedBytes> diagram_data(const DiagramLayout& layout) {
  return {points_file(layout), line_file(layout), labels_file(layout), text_file(layout)};
}

}  // namespace trotline
