#include <algorithm>
#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/report/diagram_layout.hpp>
#include <trotline/report/diagram_text.hpp>
#include <trotline/report/display_text.hpp>
#include <trotline/report/text_measure.hpp>
#include <trotline/report/typeset.hpp>

namespace trotline {
namespace {

// The page [mm], from its edges.
constexpr double kRightMargin = 2.0;
constexpr double kTopMargin = 13.8;     // title, rule, name of the axis
constexpr double kBottomMargin = 10.5;  // ticks and name of the energy axis
constexpr double kResidualHeight = 14.0;
constexpr double kBetweenPanels = 6.8;  // name of the residual axis
constexpr double kTickLength = 1.2;
constexpr double kTitleFromTop = 3.6;
constexpr double kArrowMm = 4.2;
constexpr double kLineHeight = 1.28;  // of a block of text, over the size of its type
constexpr double kBlockInset = 0.6;
constexpr std::size_t kMostLabels = 48;
constexpr double kStandsOut = 2.0;  // sigma
constexpr int kSamples = 120;

double mm_of(double em, double points) { return em * points * kMmPerPoint; }

double position(double value, const Axis& axis, double start, double end) {
  return start + (value - axis.low) / (axis.high - axis.low) * (end - start);
}

double value_at(double mm, const Axis& axis, double start, double end) {
  return axis.low + (mm - start) / (end - start) * (axis.high - axis.low);
}

/// The points without what needs the axes.
std::vector<DiagramPoint> points_of(const Result& result) {
  std::vector<DiagramPoint> points;
  for (const LineResult& line : result.lines) {
    if (!std::isfinite(line.upper_energy_k) || !std::isfinite(line.ln_nu_gu)) continue;
    DiagramPoint point;
    point.energy_k = line.upper_energy_k;
    point.ln_nu_gu = point.arrow_end = line.ln_nu_gu;
    point.residual = line.residual_sigma;
    point.kind = line.limit ? PointKind::limit : line.used ? PointKind::fitted : PointKind::left_out;
    const bool has_bar = !line.limit && std::isfinite(line.ln_nu_gu_error) && line.ln_nu_gu_error > 0.0;
    const double error = has_bar ? line.ln_nu_gu_error : 0.0;
    point.bar_low = point.ln_nu_gu - error;
    point.bar_high = point.ln_nu_gu + error;
    points.push_back(point);
  }
  return points;
}

Axis energy_axis(const std::vector<DiagramPoint>& points) {
  double least = HUGE_VAL;
  double most = -HUGE_VAL;
  for (const DiagramPoint& point : points) {
    least = std::min(least, point.energy_k);
    most = std::max(most, point.energy_k);
  }
  if (points.empty()) return axis_over(0.0, 100.0, 8);
  // From zero, where the line gives ln(N/Q), unless the lines lie far from it and close together.
  const bool far = least > 0.6 * most && points.size() > 1;
  const double room = 0.07 * (far ? most - least : most);
  return axis_over(far ? least - room : 0.0, most + room, 8);
}

double fitted_value(const DiagramLine& line, double energy_k) {
  return line.intercept + line.slope_per_k * energy_k;
}

bool is_drawable(const DiagramLine& line) {
  return std::isfinite(line.intercept) && std::isfinite(line.slope_per_k);
}

/// Half width of the 68 % band: the standard error of the line at this energy.
double band_half_width(const DiagramLine& line, double energy_k) {
  const double variance =
      line.intercept_variance + 2.0 * energy_k * line.covariance + energy_k * energy_k * line.slope_variance;
  return variance > 0.0 ? std::sqrt(variance) : 0.0;  // NaN and rounding below zero: no band
}

struct Span {
  double low = HUGE_VAL;
  double high = -HUGE_VAL;
  void include(double value) {
    low = std::min(low, value);
    high = std::max(high, value);
  }
};

/// Holds all points; error bars too, unless one is so long that it would press the points together.
Span ordinate_span(const std::vector<DiagramPoint>& points) {
  Span values;
  for (const DiagramPoint& point : points) values.include(point.ln_nu_gu);
  const double longest = std::max(1.0, 1.2 * (values.high - values.low));
  Span span = values;
  for (const DiagramPoint& point : points) {
    span.include(std::max(point.bar_low, point.ln_nu_gu - longest));
    span.include(std::min(point.bar_high, point.ln_nu_gu + longest));
  }
  return span;
}

Axis ordinate_axis(const std::vector<DiagramPoint>& points, const Result& result, const Axis& energy,
                   double panel_mm) {
  if (points.empty()) return axis_over(20.0, 30.0, 6);
  Span span = ordinate_span(points);
  if (is_drawable(result.diagram_line)) {
    const double spread = std::max(span.high - span.low, 0.5);
    for (const double energy_k : {energy.low, energy.high}) {
      const double value = fitted_value(result.diagram_line, energy_k);
      if (value > span.low - spread && value < span.high + spread) span.include(value);
    }
  }
  const bool has_limit = std::any_of(
      points.begin(), points.end(), [](const DiagramPoint& point) { return point.kind == PointKind::limit; });
  const double extent = std::max(span.high - span.low, 1e-3);
  const double below = extent * (has_limit ? (kArrowMm + 1.0) / panel_mm : 0.0);
  return axis_over(span.low - below - 0.06 * extent, span.high + 0.06 * extent, 7);
}

Axis residual_axis(const std::vector<DiagramPoint>& points) {
  constexpr double kLeast = 2.8;
  constexpr double kMost = 11.0;
  double half = kLeast;
  for (const DiagramPoint& point : points) {
    if (point.kind == PointKind::fitted && std::isfinite(point.residual)) {
      half = std::max(half, 1.15 * std::abs(point.residual));
    }
  }
  Axis axis;
  axis.high = std::min(half, kMost);
  axis.low = -axis.high;
  axis.step = axis.high < 5.5 ? 2.0 : 5.0;
  axis.decimals = 0;
  axis.ticks.clear();
  for (double tick = -axis.step * std::floor(axis.high / axis.step); tick <= axis.high; tick += axis.step) {
    axis.ticks.push_back(tick);
  }
  return axis;
}

double widest_tick_mm(const Axis& axis) {
  double widest = 0.0;
  for (const double tick : axis.ticks) {
    widest = std::max(widest, mm_of(text_width_em(tick_text(axis, tick)), kSmallPoints));
  }
  return widest;
}

void place_panels(DiagramLayout& layout) {
  const double ticks = std::max(widest_tick_mm(layout.ln_nu_gu), widest_tick_mm(layout.residual));
  const double left = std::max(8.0, ticks + kTickLength + 3.0);
  const double right = layout.size.width_mm - kRightMargin;
  layout.residuals_mm = {left, kBottomMargin, right, kBottomMargin + kResidualHeight};
  layout.diagram_mm = {left, layout.residuals_mm.top + kBetweenPanels, right,
                       layout.size.height_mm - kTopMargin};
}

void sample_fit(DiagramLayout& layout, const DiagramLine& line) {
  if (!is_drawable(line)) return;
  const auto cut = [&](double value) { return std::clamp(value, layout.ln_nu_gu.low, layout.ln_nu_gu.high); };
  for (int i = 0; i <= kSamples; ++i) {
    const double energy_k = layout.energy.low + (layout.energy.high - layout.energy.low) * i / kSamples;
    const double center = fitted_value(line, energy_k);
    const double half = band_half_width(line, energy_k);
    if (center != cut(center)) continue;  // outside of the panel, along whose edge no line may run
    layout.fit.push_back({energy_k, cut(center), cut(center - half), cut(center + half)});
  }
}

/// Height and band of a curve between its points; the ends go on as they are.
DiagramSample on_curve(const DiagramCurve& curve, double energy_k) {
  const auto& points = curve.points;
  std::size_t i = 1;
  while (i + 1 < points.size() && points[i].energy_k < energy_k) ++i;
  const DiagramCurvePoint& a = points[i - 1];
  const DiagramCurvePoint& b = points[i];
  const double share = (energy_k - a.energy_k) / (b.energy_k - a.energy_k);
  const auto between = [&](double low, double high) { return low + share * (high - low); };
  return {energy_k, between(a.ln_nu_gu, b.ln_nu_gu), between(a.low68, b.low68), between(a.high68, b.high68)};
}

/// Curves one behind the other, each followed by a sample that is not a number.
void sample_curves(DiagramLayout& layout, const std::vector<DiagramCurve>& curves) {
  const Axis& y = layout.ln_nu_gu;
  for (const DiagramCurve& curve : curves) {
    if (curve.points.size() < 2) continue;
    for (int i = 0; i <= kSamples; ++i) {
      const double energy_k = layout.energy.low + (layout.energy.high - layout.energy.low) * i / kSamples;
      DiagramSample sample = on_curve(curve, energy_k);
      if (!std::isfinite(sample.center) || sample.center < y.low || sample.center > y.high) continue;
      sample.low = std::isfinite(sample.low) ? std::clamp(sample.low, y.low, y.high) : sample.center;
      sample.high = std::isfinite(sample.high) ? std::clamp(sample.high, y.low, y.high) : sample.center;
      layout.fit.push_back(sample);
    }
    layout.fit.push_back({kNotKnown, kNotKnown, kNotKnown, kNotKnown});
  }
}

void sample_model(DiagramLayout& layout, const Result& result) {
  layout.fit.clear();
  sample_fit(layout, result.diagram_line);
  sample_curves(layout, result.diagram_curves);
}

void finish_points(DiagramLayout& layout) {
  const double arrow = kArrowMm / (layout.diagram_mm.top - layout.diagram_mm.bottom) *
                       (layout.ln_nu_gu.high - layout.ln_nu_gu.low);
  for (DiagramPoint& point : layout.points) {
    point.bar_low = std::max(point.bar_low, layout.ln_nu_gu.low);
    point.bar_high = std::min(point.bar_high, layout.ln_nu_gu.high);
    if (point.kind == PointKind::limit) point.arrow_end = point.ln_nu_gu - arrow;
    if (!std::isfinite(point.residual)) continue;
    const double edge = 0.88 * layout.residual.high;
    point.residual_is_cut = std::abs(point.residual) > layout.residual.high;
    if (point.residual_is_cut) point.residual = std::copysign(edge, point.residual);
  }
}

/// Maps the diagram's coordinates to the page.
class Page {
 public:
  explicit Page(const DiagramLayout& layout) : layout_(layout) {}
  [[nodiscard]] double x(double energy_k) const {
    return position(energy_k, layout_.energy, layout_.diagram_mm.left, layout_.diagram_mm.right);
  }
  [[nodiscard]] double y(double ln_nu_gu) const {
    return position(ln_nu_gu, layout_.ln_nu_gu, layout_.diagram_mm.bottom, layout_.diagram_mm.top);
  }
  [[nodiscard]] double energy_k(double x_mm) const {
    return value_at(x_mm, layout_.energy, layout_.diagram_mm.left, layout_.diagram_mm.right);
  }
  [[nodiscard]] double ln_nu_gu(double y_mm) const {
    return value_at(y_mm, layout_.ln_nu_gu, layout_.diagram_mm.bottom, layout_.diagram_mm.top);
  }

 private:
  const DiagramLayout& layout_;
};

/// A block of lines of text: its size and what stands in it.
struct Block {
  double width_mm = 0.0;
  double height_mm = 0.0;
  DiagramAnswer said;
};

Block block_of(const Result& result) {
  Block block{0.0, 0.0, diagram_answer(result)};
  const auto add = [&](const std::vector<std::string>& lines, double points) {
    for (const std::string& line : lines) {
      block.width_mm = std::max(block.width_mm, mm_of(text_width_em(line), points));
      block.height_mm += kLineHeight * points * kMmPerPoint;
    }
  };
  add(block.said.answer, kAnswerPoints);
  add(block.said.detail, kSmallPoints);
  return block;
}

/// How much of the diagram a box would cover: points count most.
double cover_of(const Box& box, const DiagramLayout& layout) {
  const Page page(layout);
  double cover = 0.0;
  for (const DiagramPoint& point : layout.points) {
    const Segment bar{page.x(point.energy_k), page.y(std::min(point.bar_low, point.arrow_end)),
                      page.x(point.energy_k), page.y(point.bar_high)};
    const Box marker = {bar.x0 - kMarkerMm, page.y(point.ln_nu_gu) - kMarkerMm, bar.x0 + kMarkerMm,
                        page.y(point.ln_nu_gu) + kMarkerMm};
    cover += overlap(marker, box) ? 20.0 : crosses(bar, box) ? 5.0 : 0.0;
  }
  for (const DiagramSample& sample : layout.fit) {
    if (std::isnan(sample.energy_k)) continue;
    const double x = page.x(sample.energy_k);
    cover += crosses(Segment{x, page.y(sample.low), x, page.y(sample.high)}, box) ? 1.0 : 0.0;
  }
  return cover;
}

/// The corner of the diagram in which the block covers least; upper right first.
Box corner_for(const Block& block, const DiagramLayout& layout) {
  const Box& panel = layout.diagram_mm;
  const double width = block.width_mm + kBlockInset;
  const double height = block.height_mm + kBlockInset;
  const Box corners[] = {
      {panel.right - width, panel.top - height, panel.right, panel.top},
      {panel.left + 1.5, panel.bottom + 0.5, panel.left + 1.5 + width, panel.bottom + 0.5 + height},
      {panel.right - width, panel.bottom + 0.5, panel.right, panel.bottom + 0.5 + height},
      {panel.left + 1.5, panel.top - height, panel.left + 1.5 + width, panel.top}};
  return *std::min_element(std::begin(corners), std::end(corners), [&](const Box& a, const Box& b) {
    return cover_of(a, layout) < cover_of(b, layout);
  });
}

/// Makes room above the points for a block that covers something in every corner.
void make_headroom(DiagramLayout& layout, const Block& block) {
  const double panel = layout.diagram_mm.top - layout.diagram_mm.bottom;
  const double share = std::min(0.5, (block.height_mm + 2.0) / panel);
  const double extent = (layout.ln_nu_gu.high - layout.ln_nu_gu.low) / (1.0 - share);
  layout.ln_nu_gu = axis_over(layout.ln_nu_gu.low, layout.ln_nu_gu.low + extent, 7);
}

void add_block(DiagramLayout& layout, const Block& block, const Box& corner) {
  double y = corner.top;
  const auto add = [&](const std::vector<std::string>& lines, TextRole role, double points) {
    const double pitch = kLineHeight * points * kMmPerPoint;
    for (const std::string& line : lines) {
      layout.texts.push_back({role, corner.right - 0.5 * kBlockInset, y - pitch / 2, line});
      y -= pitch;
    }
  };
  add(block.said.answer, TextRole::answer, kAnswerPoints);
  add(block.said.detail, TextRole::detail, kSmallPoints);
}

/// `text` cut to a width, with an ellipsis.
std::string cut_to(const std::string& text, double width_mm, double points, bool bold) {
  if (mm_of(text_width_em(text, bold), points) <= width_mm) return text;
  std::string cut;
  for (const std::string_view character : characters_of(text)) {
    const std::string longer = cut + std::string(character);
    if (mm_of(text_width_em(longer + "…", bold), points) > width_mm) break;
    cut = longer;
  }
  return cut + "…";
}

void add_title(DiagramLayout& layout, const Result& result) {
  const double y = layout.size.height_mm - kTitleFromTop;
  const double room = layout.size.width_mm - 2.0 * kRightMargin;
  const std::string formula = result.formula.empty() ? result.species : result.formula;
  const std::string species =
      cut_to(typeset_formula(display_text(formula)), 0.45 * room, kTitlePoints, false);
  const double left = room - mm_of(text_width_em(species), kTitlePoints) - 3.0;
  layout.texts.push_back({TextRole::species, layout.size.width_mm - kRightMargin, y, species});
  layout.texts.push_back(
      {TextRole::source, kRightMargin, y, cut_to(display_text(result.source), left, kTitlePoints, true)});
}

bool is_labelled(const LineResult& line, std::size_t lines) {
  if (!std::isfinite(line.upper_energy_k) || !std::isfinite(line.ln_nu_gu)) return false;
  if (lines <= kMostLabels) return true;
  return line.limit || !line.used || std::abs(line.residual_sigma) > kStandsOut;
}

struct WantedLabel {
  std::string text;
  LabelRequest request;
};

std::vector<WantedLabel> wanted_labels(const Result& result, const DiagramLayout& layout) {
  const Page page(layout);
  constexpr double kLongest = 30.0;  // [mm]
  std::vector<WantedLabel> wanted;
  for (const LineResult& line : result.lines) {
    if (!is_labelled(line, layout.points.size()) || wanted.size() == kMostLabels) continue;
    const std::string text =
        cut_to(typeset_transition(display_text(line.transition)), kLongest, kSmallPoints, false);
    wanted.push_back({text,
                      {page.x(line.upper_energy_k), page.y(line.ln_nu_gu),
                       mm_of(text_width_em(text), kSmallPoints), 0.85 * kSmallPoints * kMmPerPoint}});
  }
  return wanted;
}

LabelScene scene_of(const DiagramLayout& layout, const std::vector<WantedLabel>& wanted, const Box& block) {
  const Page page(layout);
  const Box& panel = layout.diagram_mm;
  LabelScene scene;
  scene.frame = {panel.left + 0.6, panel.bottom + 0.6, layout.size.width_mm - 0.8, panel.top + 0.5};
  scene.forbidden = {block};
  scene.marker_radius = kMarkerMm / 2 + 0.1;
  scene.gap = 0.5;
  for (const WantedLabel& label : wanted) scene.labels.push_back(label.request);
  for (const DiagramPoint& point : layout.points) {
    const double x = page.x(point.energy_k);
    const double y = page.y(point.ln_nu_gu);
    const double r = 0.8 * scene.marker_radius;
    if (wanted.size() < layout.points.size()) scene.forbidden.push_back({x - r, y - r, x + r, y + r});
    scene.lines.push_back({x, page.y(point.bar_low), x, page.y(point.bar_high)});
    if (point.kind != PointKind::limit) continue;
    const double tip = page.y(point.arrow_end);
    scene.forbidden.push_back({x - 0.7, tip, x + 0.7, page.y(point.ln_nu_gu) - scene.marker_radius});
  }
  const DiagramSample* start = nullptr;  // of a stretch inside of the panel; a straight line is one stretch
  const DiagramSample* last = nullptr;
  const auto add_stretch = [&] {
    if (start != nullptr && last != start) {
      scene.lines.push_back({page.x(start->energy_k), page.y(start->center), page.x(last->energy_k),
                             page.y(last->center)});
    }
  };
  constexpr int kChord = 12;  // samples of a curve that count as straight
  int in_chord = 0;
  const bool curved = std::any_of(layout.fit.begin(), layout.fit.end(),
                                  [](const DiagramSample& sample) { return std::isnan(sample.energy_k); });
  for (const DiagramSample& sample : layout.fit) {
    const bool inside = sample.center > layout.ln_nu_gu.low && sample.center < layout.ln_nu_gu.high;
    if (!inside) {
      if (std::isnan(sample.energy_k)) {
        add_stretch();
        start = last = nullptr;
      }
      continue;
    }
    if (start == nullptr) start = &sample;
    last = &sample;
    if (curved && ++in_chord % kChord == 0) {
      add_stretch();
      start = last;
    }
  }
  add_stretch();
  return scene;
}

void add_labels(DiagramLayout& layout, const Result& result, const Box& block) {
  const Page page(layout);
  const std::vector<WantedLabel> wanted = wanted_labels(result, layout);
  const std::vector<PlacedLabel> placed = place_labels(scene_of(layout, wanted, block));
  for (std::size_t i = 0; i < placed.size(); ++i) {
    if (!placed[i].placed) {
      ++layout.labels_left_out;
      continue;
    }
    const Segment& leader = placed[i].leader;
    layout.labels.push_back({wanted[i].text,
                             page.energy_k(placed[i].x),
                             page.ln_nu_gu(placed[i].y),
                             placed[i].has_leader,
                             {page.energy_k(leader.x0), page.ln_nu_gu(leader.y0), page.energy_k(leader.x1),
                              page.ln_nu_gu(leader.y1)}});
  }
}

void check_size(const FigureSize& size) {
  constexpr double kLeastMm = 60.0;
  for (const double side : {size.width_mm, size.height_mm}) {
    if (!(side >= kLeastMm) || !std::isfinite(side))
      throw DomainError("size of the figure [mm]", side, ">= 60");
  }
}

}  // namespace

DiagramLayout lay_out_diagram(const Result& result, const FigureSize& size) {
  check_size(size);
  DiagramLayout layout;
  layout.size = size;
  layout.points = points_of(result);
  layout.energy = energy_axis(layout.points);
  layout.residual = residual_axis(layout.points);
  const double panel = size.height_mm - kTopMargin - kBottomMargin - kResidualHeight - kBetweenPanels;
  layout.ln_nu_gu = ordinate_axis(layout.points, result, layout.energy, panel);
  place_panels(layout);
  sample_model(layout, result);
  const Block block = block_of(result);
  if (cover_of(corner_for(block, layout), layout) > 0.0) {
    make_headroom(layout, block);
    place_panels(layout);
    sample_model(layout, result);
  }
  finish_points(layout);
  const Box corner = corner_for(block, layout);
  add_title(layout, result);
  add_block(layout, block, corner);
  add_labels(layout, result, corner);
  return layout;
}

}  // namespace trotline
