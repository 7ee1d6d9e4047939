#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <utility>
#include <vector>

#include <trotline/report/text_table.hpp>
#include <trotline/report/typeset.hpp>

#include "terminal_parts.hpp"

namespace trotline::terminal {
namespace {

constexpr std::size_t kWidthForBars = 72;
constexpr std::size_t kWidthForModel = 60;
constexpr std::size_t kWidthForEnergy = 50;
constexpr double kStriking = 3.0;  // residuals beyond it are coloured

std::string observed_text(const LineResult& line, const Page& page) {
  if (line.limit) return "< " + significant(line.intensity_k_km_s, 3, page.glyphs());
  return value_with_error(line.intensity_k_km_s, line.intensity_error_k_km_s, page.glyphs());
}

/// The model to the decimals of the error beside which it stands.
std::string model_text(const LineResult& line, const Page& page) {
  const double model = line.model_intensity_k_km_s;
  if (!std::isfinite(model)) return page.pick("–", "-");
  const std::string pair = value_with_error(model, line.intensity_error_k_km_s, page.glyphs());
  const bool plain = pair.front() != '(' && line.intensity_error_k_km_s > 0.0;
  return plain ? pair.substr(0, pair.find(' ')) : significant(model, 3, page.glyphs());
}

bool is_broken(const LineResult& line) {
  return line.limit && line.model_intensity_k_km_s > line.intensity_k_km_s;
}

std::string mark_of(const LineResult& line) {
  if (line.limit) return is_broken(line) ? "limit !" : "limit";
  return line.blend.empty() ? "" : "blend " + shortened(display_text(line.blend), 8, true);
}

std::string signed_residual(double residual, const Page& page) {
  const std::string text = fixed_decimals(residual, 1, page.glyphs());
  return residual > 0.0 && text != "0.0" ? "+" + text : text;
}

std::vector<TextColumn> columns_of(const std::vector<const LineResult*>& lines, const Page& page) {
  TextColumn transition{"line", {}, false};
  TextColumn energy{"E_u [K]", {}};
  TextColumn observed{"W [K km/s]", {}};
  TextColumn model{"model", {}};
  TextColumn residual{page.pick("(o−m)/σ", "(o-m)/s"), {}};
  TextColumn bar{page.pick("−5   0   +5", "-5   0   +5"), {}, false};
  TextColumn mark{"", {}, false};
  for (const LineResult* line : lines) {
    transition.cells.push_back(transition_of(line->transition, page));
    energy.cells.push_back(fixed_decimals(line->upper_energy_k, 1, page.glyphs()));
    observed.cells.push_back(observed_text(*line, page));
    model.cells.push_back(model_text(*line, page));
    residual.cells.push_back(signed_residual(line->residual_sigma, page));
    bar.cells.push_back(residual_bar(line->residual_sigma, page.glyphs()));
    mark.cells.push_back(mark_of(*line));
  }
  std::vector<TextColumn> columns = {transition};
  if (page.width() >= kWidthForEnergy) columns.push_back(energy);
  columns.push_back(observed);
  if (page.width() >= kWidthForModel) columns.push_back(model);
  columns.push_back(residual);
  if (page.width() >= kWidthForBars) columns.push_back(bar);
  columns.push_back(mark);
  return columns;
}

/// Lines by the reason for which they were left out, in the order in which the reasons come up.
std::vector<std::pair<std::string, std::string>> unused_by_reason(const Result& result, const Page& page) {
  std::vector<std::pair<std::string, std::string>> reasons;
  for (const LineResult& line : result.lines) {
    if (line.used || (line.limit && line.why_unused.empty())) continue;
    const std::string why = line.why_unused.empty() ? "no reason given" : display_text(line.why_unused);
    const std::string where = line.table_line > 0 ? fmt::format(" (table line {})", line.table_line) : "";
    const std::string name = transition_of(line.transition, page) + where;
    const auto known =
        std::find_if(reasons.begin(), reasons.end(), [&](const auto& r) { return r.first == why; });
    if (known == reasons.end()) {
      reasons.emplace_back(why, name);
    } else {
      known->second += ", " + name;
    }
  }
  return reasons;
}

}  // namespace

void add_lines(Page& page, const Result& result) {
  std::vector<const LineResult*> shown;
  for (const LineResult& line : result.lines) {
    if (line.used || line.limit) shown.push_back(&line);
  }
  if (shown.empty()) return;
  page.blank();
  const auto rows = text_table(columns_of(shown, page), page.width() - 2, page.glyphs());
  page.line("  " + rows.front(), kDim);
  for (std::size_t i = 1; i < rows.size(); ++i) {
    const double residual = shown[i - 1]->residual_sigma;
    const bool striking = shown[i - 1]->limit ? is_broken(*shown[i - 1]) : std::abs(residual) > kStriking;
    page.line("  " + rows[i], striking ? kRed : "");
  }
  if (std::any_of(shown.begin(), shown.end(), [](const LineResult* line) { return is_broken(*line); })) {
    page.line("  limit !: the model lies above the limit", kDim);
  }
}

void add_unused(Page& page, const Result& result) {
  const auto reasons = unused_by_reason(result, page);
  if (reasons.empty()) return;
  page.heading("Not used");
  for (const auto& [why, lines] : reasons) page.item("-", lines + page.pick(" – ", " - ") + why, kDim);
}

}  // namespace trotline::terminal
