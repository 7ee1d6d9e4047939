#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <utility>
#include <vector>

#include <trotline/report/text_table.hpp>
#include <trotline/report/typeset.hpp>

#include "terminal_parts.hpp"

namespace trotline {
namespace {

using namespace terminal;

/// What leaving each line out does to T: the lines that move it most.
void add_leave_one_out(Page& page, const Result& result) {
  if (result.leave_one_out.empty() || !(result.temperature_k.error > 0.0)) return;
  constexpr std::size_t kMost = 3;
  std::vector<const LeftOut*> rows;
  for (const LeftOut& row : result.leave_one_out) rows.push_back(&row);
  const auto shift = [&](const LeftOut* row) {
    return std::abs(row->temperature_k - result.temperature_k.value);
  };
  std::stable_sort(rows.begin(), rows.end(),
                   [&](const auto* a, const auto* b) { return shift(a) > shift(b); });
  rows.resize(std::min(rows.size(), kMost));
  std::string text;
  for (const LeftOut* row : rows) {
    text += fmt::format("{}{}: {} K", text.empty() ? "" : ";  ", transition_of(row->transition, page),
                        value_with_error(row->temperature_k, row->temperature_error_k, page.glyphs()));
  }
  page.entry("without", text);
}

void add_checks(Page& page, const Result& result) {
  if (result.checks.empty()) return;
  page.heading("Checks");
  for (const Check& check : result.checks) {
    const bool failed = check.outcome == Outcome::fail;
    std::string text = std::string(name_of(check.outcome)) + ": " + display_text(check.name);
    if (std::isfinite(check.figure)) text += " " + significant(check.figure, 2, page.glyphs());
    const std::string meaning = display_text(check.meaning);
    if (!meaning.empty()) text += page.pick(" – ", " - ") + meaning;
    page.item(failed ? "!" : check.outcome == Outcome::pass ? "+" : "?", text, failed ? kRed : "");
  }
  add_leave_one_out(page, result);
}

void add_models(Page& page, const Result& result) {
  if (result.models.empty()) return;
  page.heading("Models compared");
  TextColumn name{"model", {}, false};
  TextColumn count{"k", {}};
  TextColumn likelihood{"-2 ln L", {}};
  TextColumn aicc{page.pick("ΔAICc", "dAICc"), {}};
  TextColumn bic{page.pick("ΔBIC", "dBIC"), {}};
  TextColumn ratio{"ratio", {}};
  TextColumn p{"p", {}};
  bool boundary = false;
  for (const ModelEntry& model : result.models) {
    name.cells.push_back(display_text(model.name));
    count.cells.push_back(std::to_string(model.free_count));
    likelihood.cells.push_back(fixed_decimals(model.minus_2_ln_likelihood, 1, page.glyphs()));
    aicc.cells.push_back(fixed_decimals(model.delta_aicc, 1, page.glyphs()));
    bic.cells.push_back(fixed_decimals(model.delta_bic, 1, page.glyphs()));
    const bool compared = std::isfinite(model.likelihood_ratio);
    ratio.cells.push_back(compared ? fixed_decimals(model.likelihood_ratio, 1, page.glyphs()) : "");
    const std::string chance = model.p_value > 0.0 ? significant(model.p_value, 2, page.glyphs()) : "<1e-300";
    p.cells.push_back(!compared ? "" : model.on_boundary ? "(" + chance + ")" : chance);
    boundary = boundary || (compared && model.on_boundary);
  }
  for (const std::string& line :
       text_table({name, count, likelihood, aicc, bic, ratio, p}, page.width() - 2, page.glyphs())) {
    page.line("  " + line);
  }
  if (boundary)
    page.line("  (p): the smaller model lies at the edge of the larger; p is a guide, no exact chance", kDim);
  for (const ModelEntry& model : result.models) {
    if (!model.note.empty()) page.item("-", display_text(model.name) + ": " + display_text(model.note));
  }
  if (!result.model_choice.empty()) page.item("+", display_text(result.model_choice));
}

void add_warnings(Page& page, const Result& result) {
  if (result.warnings.empty()) return;
  page.heading("Warnings");
  for (const std::string& warning : result.warnings) page.item("!", display_text(warning), kYellow);
}

void add_provenance(Page& page, const Result& result) {
  const Provenance& from = result.provenance;
  std::string text;
  const auto add = [&](const std::string& piece) {
    if (!piece.empty()) text += (text.empty() ? "" : "; ") + display_text(piece);
  };
  add(from.table_file);
  add(from.species_file);
  add(from.constants.empty() ? "" : "constants " + from.constants);
  add(from.version.empty() ? "" : "trotline " + from.version);
  page.blank();
  if (!text.empty()) page.entry("from", text, kDim);
}

}  // namespace

std::string terminal_report(const Result& result, const TerminalOptions& options) {
  Page page(options);
  add_title(page, result);
  add_answer(page, result);
  add_assumptions(page, result);
  add_lines(page, result);
  add_unused(page, result);
  add_checks(page, result);
  add_models(page, result);
  add_warnings(page, result);
  add_provenance(page, result);
  return page.text();
}

}  // namespace trotline
