#include "panel_layout.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include <trotline/report/display_text.hpp>
#include <trotline/report/rounding.hpp>
#include <trotline/report/text_measure.hpp>
#include <trotline/report/typeset.hpp>

namespace trotline {
namespace {

// The page [mm].
constexpr double kPageWidth = 180.0;
constexpr double kLeft = 2.0;
constexpr double kTop = 11.0;     // title and name of the axis
constexpr double kBottom = 11.5;  // name of the axis, explanation
constexpr int kColumns = 3;
constexpr double kCellWidth = (kPageWidth - 2.0 * kLeft) / kColumns;
constexpr double kCellHeight = 37.0;
constexpr double kTickRoom = 9.5;    // left of a panel
constexpr double kBelowPanel = 5.0;  // ticks of the velocity
constexpr double kAbovePanel = 8.4;  // two lines of text
constexpr double kRightRoom = 2.5;
constexpr double kTextPoints = 7.5;
constexpr double kWindowsInView = 2.5;
constexpr double kHeadroom = 0.16;  // above the data, for marks

double mm_of(const std::string& text, bool bold = false) {
  return text_width_em(text, bold) * kTextPoints * kMmPerPoint;
}

/// `text` cut to a width on the page.
std::string cut_to(const std::string& text, double most_mm, bool bold = false) {
  if (mm_of(text, bold) <= most_mm) return text;
  std::size_t columns = display_width(text);
  std::string cut = text;
  while (columns > 1 && mm_of(cut, bold) > most_mm) cut = shortened(text, --columns);
  return cut;
}

bool is_shown(double velocity, const VelocityRange& view) {
  return velocity >= view.low_km_s && velocity <= view.high_km_s;
}

/// The window with room on both sides, as far as there are data.
VelocityRange view_of(const LineMeasurement& line) {
  const double middle = 0.5 * (line.window.low_km_s + line.window.high_km_s);
  const double half = 0.5 * kWindowsInView * (line.window.high_km_s - line.window.low_km_s);
  const Eigen::ArrayXd& velocity = line.panel->velocity_km_s;
  const double step = std::abs(line.channel_km_s);
  return {std::max(middle - half, velocity.minCoeff() - step), std::min(middle + half, velocity.maxCoeff() + step)};
}

Axis intensity_axis(const LineMeasurement& line, const VelocityRange& view) {
  const LinePanel& panel = *line.panel;
  double low = HUGE_VAL;
  double high = -HUGE_VAL;
  const auto take = [&](const Eigen::ArrayXd& values, Eigen::Index i) {
    if (values.size() == 0 || !std::isfinite(values(i))) return;
    low = std::min(low, values(i));
    high = std::max(high, values(i));
  };
  for (Eigen::Index i = 0; i < panel.velocity_km_s.size(); ++i) {
    if (!is_shown(panel.velocity_km_s(i), view)) continue;
    for (const auto* values : {&panel.intensity, &panel.baseline, &panel.model, &panel.prediction})
      take(*values, i);
  }
  const double range = high - low;
  constexpr int kMostTicks = 5;
  return axis_over(low - 0.06 * range, high + kHeadroom * range, kMostTicks);
}

std::string unit_of(const SpectrumMeasurement& spectrum) {
  return spectrum.scale == IntensityScale::flux_per_beam ? "Jy/beam" : "K";
}

std::string remarks_of(const PanelLine& of) {
  std::vector<std::string> remarks;
  if (!of.line->detected) remarks.push_back("not detected, < " + significant(of.line->limit, 2));
  if (!of.line->blend.empty()) remarks.emplace_back("blend");
  for (const LineFlag flag : of.line->flags) remarks.emplace_back(name_of(flag));
  remarks.push_back(of.spectrum->spectrum);
  return display_text(fmt::format("{}", fmt::join(remarks, ", ")));
}

class PageLayout {
 public:
  explicit PageLayout(std::size_t lines) {
    const auto rows = static_cast<double>((lines + kColumns - 1) / kColumns);
    page_.size = {kPageWidth, kTop + kBottom + rows * kCellHeight};
  }

  void add(const PanelLine& of, std::size_t index) {
    const double left = kLeft + static_cast<double>(index % kColumns) * kCellWidth;
    const double top = page_.size.height_mm - kTop - static_cast<double>(index / kColumns) * kCellHeight;
    PlacedPanel panel{of, {}, {}, {}};
    panel.box.left = left + kTickRoom;
    panel.box.right = left + kCellWidth - kRightRoom;
    panel.box.bottom = top - kCellHeight + kBelowPanel;
    panel.box.top = top - kAbovePanel;
    const VelocityRange view = view_of(*of.line);
    constexpr int kMostTicks = 6;
    panel.velocity = axis_over(view.low_km_s, view.high_km_s, kMostTicks);
    panel.intensity = intensity_axis(*of.line, view);
    place_noise(panel);
    add_texts(panel, top);
    page_.panels.push_back(std::move(panel));
  }

  PanelPage finished(std::size_t page, std::size_t of_pages) {
    const PanelLine& first = page_.panels.front().of;
    const std::string object = first.spectrum->object.value_or("");
    std::string title = typeset_formula(display_text(first.line->tag));
    if (!object.empty()) title += " toward " + display_text(object);
    if (of_pages > 1) title += fmt::format(", page {} of {}", page + 1, of_pages);
    const double top = page_.size.height_mm - 4.0;
    page_.texts.push_back({PanelText::title, kLeft, top, cut_to(title, kPageWidth / 2, true)});
    page_.texts.push_back({PanelText::note, kLeft, top - 4.2,
                           unit_of(*first.spectrum) + " against V_LSR (km/s)"});
    page_.texts.push_back({PanelText::note, kLeft, 5.6,
                           "steps: data; dashes: baseline; shaded: window; bar at the left: noise of one "
                           "channel, ± rms; small ticks: other lines"});
    page_.texts.push_back({PanelText::note, kLeft, 2.2, what_is_drawn()});
    return std::move(page_);
  }

 private:
  [[nodiscard]] std::string what_is_drawn() const {
    const bool predicted = std::any_of(page_.panels.begin(), page_.panels.end(), [](const PlacedPanel& panel) {
      return panel.of.line->panel->prediction.size() > 0;
    });
    return predicted ? "thick line: LTE model of all species given; thin line: Gaussian fit"
                     : "line: Gaussian fit, where one was made";
  }

  /// Beside the data at the left edge, on the baseline.
  static void place_noise(PlacedPanel& panel) {
    const LinePanel& data = *panel.of.line->panel;
    panel.noise_x = panel.velocity.low + 0.035 * (panel.velocity.high - panel.velocity.low);
    Eigen::Index nearest = 0;
    (data.velocity_km_s - panel.noise_x).abs().minCoeff(&nearest);
    panel.noise_y = data.baseline(nearest);
  }

  void add_texts(const PlacedPanel& panel, double top) {
    const LineMeasurement& line = *panel.of.line;
    const std::string value = fmt::format("{} {} km/s", value_with_error(line.intensity, line.sigma()),
                                          unit_of(*panel.of.spectrum));
    const double width = panel.box.right - panel.box.left;
    const std::string label =
        cut_to(typeset_transition(display_text(line.label)), width - mm_of(value) - 2.0, true);
    page_.texts.push_back({PanelText::label, panel.box.left, top - 2.4, label});
    page_.texts.push_back({PanelText::value, panel.box.right, top - 2.4, value});
    page_.texts.push_back({PanelText::remark, panel.box.left, top - 5.9, cut_to(remarks_of(panel.of), width)});
    for (const PanelMark& mark : line.panel->marks) add_mark(panel, mark);
  }

  void add_mark(const PlacedPanel& panel, const PanelMark& mark) {
    const Axis& axis = panel.velocity;
    if (mark.velocity_km_s < axis.low || mark.velocity_km_s > axis.high) return;
    const double share = (mark.velocity_km_s - axis.low) / (axis.high - axis.low);
    const std::string text = cut_to(typeset_transition(display_text(mark.text)), 18.0);
    const double x = panel.box.left + share * (panel.box.right - panel.box.left) + 0.6;
    const double room = panel.box.right - mm_of(text);
    page_.texts.push_back({PanelText::mark, std::min(x, room), panel.box.top - 1.4, text});
  }

  PanelPage page_;
};

}  // namespace

PanelPage lay_out_panels(const std::vector<PanelLine>& lines, std::size_t page, std::size_t of_pages) {
  PageLayout layout(lines.size());
  for (std::size_t i = 0; i < lines.size(); ++i) layout.add(lines[i], i);
  return layout.finished(page, of_pages);
}

}  // namespace trotline
