#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <utility>
#include <vector>

#include <trotline/report/display_text.hpp>
#include <trotline/report/rounding.hpp>
#include <trotline/report/terminal.hpp>
#include <trotline/report/text_table.hpp>
#include <trotline/report/typeset.hpp>

namespace trotline {
namespace {

constexpr std::size_t kLabelWidth = 10;  // "  assumes " and its like
constexpr std::size_t kLeastWidth = 40;
constexpr std::size_t kWidthForBars = 72;
constexpr std::size_t kWidthForModel = 60;
constexpr std::size_t kWidthForEnergy = 50;
constexpr double kStriking = 3.0;  // residuals beyond it are coloured

const char* const kBold = "\x1b[1m";
const char* const kDim = "\x1b[2m";
const char* const kRed = "\x1b[31m";
const char* const kYellow = "\x1b[33m";

/// Collects the lines of the report; the only place that knows width and colour.
class Page {
 public:
  explicit Page(const TerminalOptions& options)
      : options_(options), width_(std::max(options.width, kLeastWidth)) {}

  [[nodiscard]] std::size_t width() const { return width_; }
  [[nodiscard]] Glyphs glyphs() const { return options_.unicode ? Glyphs::unicode : Glyphs::ascii; }
  [[nodiscard]] const char* pick(const char* unicode, const char* ascii) const {
    return options_.unicode ? unicode : ascii;
  }

  void line(const std::string& text, const char* style = "") {
    text_ += styled(shortened(text, width_, !options_.unicode), style) + "\n";
  }
  void blank() { text_ += "\n"; }

  void heading(const std::string& text) {
    blank();
    line(text, kBold);
  }

  /// "  label   text", the text wrapped with a hanging indent.
  void entry(const std::string& label, const std::string& text, const char* style = "") {
    std::string start = padded_right("  " + label, kLabelWidth);
    for (const std::string& piece : wrapped(text, width_ - kLabelWidth)) {
      text_ += styled(start, kDim) + styled(piece, style) + "\n";
      start.assign(kLabelWidth, ' ');
    }
  }

  /// "  - text" with a mark in front.
  void item(const std::string& mark, const std::string& text, const char* style = "") {
    const std::size_t indent = 3 + display_width(mark);
    std::string start = "  " + mark + " ";
    for (const std::string& piece : wrapped(text, width_ - indent)) {
      text_ += styled(start + piece, style) + "\n";
      start.assign(indent, ' ');
    }
  }

  [[nodiscard]] std::string text() const { return text_; }

 private:
  [[nodiscard]] std::string styled(const std::string& text, const char* style) const {
    return options_.colour && *style != '\0' ? style + text + "\x1b[0m" : text;
  }

  TerminalOptions options_;
  std::size_t width_;
  std::string text_;
};

std::string with_unit(const std::string& number, const std::string& unit) {
  return number == "not known" || number == "no bound" ? number : number + " " + unit;
}

std::string species_of(const Result& result, const Page& page) {
  const std::string formula = display_text(result.formula.empty() ? result.species : result.formula);
  return page.glyphs() == Glyphs::unicode ? typeset_formula(formula) : formula;
}

std::string transition_of(const std::string& label, const Page& page) {
  const std::string text = display_text(label);
  return page.glyphs() == Glyphs::unicode ? typeset_transition(text) : text;
}

void add_title(Page& page, const Result& result) {
  const std::string source = display_text(result.source);
  page.line(species_of(result, page) + (source.empty() ? "" : " toward " + source), kBold);
  page.blank();
}

void add_ranges(Page& page, const Estimate& estimate, const std::string& unit) {
  const auto range = [&](double low, double high) {
    return with_unit(rounded_interval(low, high, estimate.error, page.glyphs()), unit);
  };
  page.entry("", "68 %  " + range(estimate.low68, estimate.high68) + "    95 %  " +
                     range(estimate.low95, estimate.high95));
}

bool has_range(const Estimate& estimate) {
  return std::isfinite(estimate.low68) || std::isfinite(estimate.high68) || std::isfinite(estimate.low95) ||
         std::isfinite(estimate.high95);
}

/// A value with its error and ranges, or the ranges alone.
void add_estimate(Page& page, const std::string& label, const Estimate& estimate, const std::string& unit) {
  if (std::isfinite(estimate.value) || !has_range(estimate)) {
    page.entry(label, with_unit(value_with_error(estimate.value, estimate.error, page.glyphs()), unit), kBold);
    if (has_range(estimate)) add_ranges(page, estimate, unit);
    return;
  }
  // Without an error the ends are rounded to a hundredth of the wider one.
  Estimate ranges = estimate;
  const double widest = std::max(std::isfinite(estimate.high95) ? std::abs(estimate.high95) : 0.0,
                                 std::isfinite(estimate.low95) ? std::abs(estimate.low95) : 0.0);
  ranges.error = 0.1 * widest;
  page.entry(label, "no single value", kBold);
  add_ranges(page, ranges, unit);
}

/// T and N as far as they are known; of a result that is done, also that they are not.
void add_estimates(Page& page, const Result& result) {
  const Estimate& t = result.temperature_k;
  const Estimate& n = result.column_density_cm2;
  const Estimate& log_n = result.log10_column_density_cm2;
  const bool done = result.status == Status::done;
  const char* const per_area = page.pick("cm⁻²", "cm^-2");
  if (result.temperature_fixed) {
    page.entry("T", value_with_error(t.value, 0.0, page.glyphs()) + " K, stated and not fitted", kBold);
  } else if (done || std::isfinite(t.value) || has_range(t)) {
    add_estimate(page, "T_rot", t, "K");
  }
  if (!done && !std::isfinite(n.value) && !has_range(n)) return;
  if (done && !std::isfinite(n.error) && std::isfinite(n.value)) {
    page.entry("N_tot", significant(n.value, 4, page.glyphs()) + " " + per_area + ", stated and not fitted", kBold);
  } else {
    add_estimate(page, "N_tot", n, per_area);
    if (std::isfinite(log_n.value)) page.entry("log10 N", value_with_error(log_n.value, log_n.error, page.glyphs()));
  }
  if (has_range(result.source_size_fit_arcsec) || std::isfinite(result.source_size_fit_arcsec.value)) {
    add_estimate(page, "size", result.source_size_fit_arcsec, "arcsec");
  }
}

/// Place of ln N of an isomer among the parameters, or their number.
std::size_t column_parameter(const Result& result, const std::string& isomer) {
  const auto found =
      std::find_if(result.parameters.begin(), result.parameters.end(), [&](const FittedParameter& parameter) {
        return parameter.name == "ln_column_density_cm2_" + isomer;
      });
  return static_cast<std::size_t>(found - result.parameters.begin());
}

/// Ratios of the N of spin isomers to that of the last; the error from their covariance, that of T in it.
void add_isomer_ratios(Page& page, const Result& result) {
  if (result.status != Status::done || result.components.size() < 2) return;
  if (result.parameter_covariance.size() != result.parameters.size()) return;
  const std::string& last = result.components.back().name;
  const std::size_t b = column_parameter(result, last);
  if (b == result.parameters.size()) return;
  const auto& covariance = result.parameter_covariance;
  for (std::size_t i = 0; i + 1 < result.components.size(); ++i) {
    const std::string& name = result.components[i].name;
    const std::size_t a = column_parameter(result, name);
    if (a == result.parameters.size()) return;
    const double ratio = std::exp(result.parameters[a].value - result.parameters[b].value);
    const double variance = covariance[a][a] + covariance[b][b] - 2.0 * covariance[a][b];
    if (!std::isfinite(ratio) || !(variance > 0.0)) continue;
    page.entry(i == 0 ? "ratio" : "",
               fmt::format("N({})/N({}) = {}", display_text(name), display_text(last),
                           value_with_error(ratio, ratio * std::sqrt(variance), page.glyphs())));
  }
}

/// The parts of an answer that has several, one row each.
void add_components(Page& page, const Result& result) {
  if (result.components.empty()) return;
  TextColumn name{"", {}, false};
  TextColumn temperature{"T [K]", {}, false};
  TextColumn column{page.pick("N [cm⁻²]", "N [cm^-2]"), {}, false};
  TextColumn size{"size [arcsec]", {}};
  bool any_size = false;
  for (const Component& part : result.components) {
    name.cells.push_back(display_text(part.name));
    temperature.cells.push_back(
        value_with_error(part.temperature_k.value, part.temperature_k.error, page.glyphs()));
    column.cells.push_back(
        value_with_error(part.column_density_cm2.value, part.column_density_cm2.error, page.glyphs()));
    any_size = any_size || std::isfinite(part.source_size_arcsec);
    size.cells.push_back(significant(part.source_size_arcsec, 3, page.glyphs()));
  }
  std::vector<TextColumn> columns = {name, temperature, column};
  if (any_size) columns.push_back(size);
  for (const std::string& line : text_table(columns, page.width() - kLabelWidth, page.glyphs())) {
    page.line(std::string(kLabelWidth, ' ') + line);
  }
}

std::string p_value_text(double p, const Page& page) {
  if (p == 0.0) return page.pick("p < 10⁻³⁰⁰", "p < 1e-300");
  if (p >= 0.01) return fmt::format("p = {:.2f}", p);
  return "p = " + significant(p, 1, page.glyphs());
}

std::string scatter_text(double p) {
  constexpr double kSmall = 0.01;  // common practice
  constexpr double kLarge = 0.99;
  if (p < kSmall) return ": the lines scatter more than their errors allow";
  if (p > kLarge) return ": the lines scatter less than their errors say";
  return ": the scatter is what the errors allow";
}

void add_goodness(Page& page, const Result& result) {
  if (std::isnan(result.chi2)) return;
  if (result.dof <= 0) {
    page.entry("fit", "no degree of freedom left: nothing can be said of the goodness of fit");
    return;
  }
  std::string text =
      fmt::format("{} = {} with {} degree{} of freedom", page.pick("χ²", "chi2"),
                  significant(result.chi2, 3, page.glyphs()), result.dof, result.dof == 1 ? "" : "s");
  if (!std::isnan(result.p_value))
    text += ", " + p_value_text(result.p_value, page) + scatter_text(result.p_value);
  page.entry("fit", text);
  if (!std::isnan(result.correlation_ln_n_t)) {
    page.entry("",
               "correlation of ln N and T: " + fixed_decimals(result.correlation_ln_n_t, 2, page.glyphs()));
  }
}

std::string filling_text(const Result& result, const Page& page) {
  const Estimate& fitted = result.source_size_fit_arcsec;
  if (std::isnan(result.source_size_arcsec) && has_range(fitted)) return "source size free";
  if (std::isnan(result.source_size_arcsec)) return "the source fills every beam";
  const auto [least, most] =
      std::minmax_element(result.lines.begin(), result.lines.end(),
                          [](const LineResult& a, const LineResult& b) { return a.filling < b.filling; });
  std::string text = fmt::format("source size {} arcsec", value_with_error(result.source_size_arcsec, 0.0));
  if (least == result.lines.end()) return text;
  return text + fmt::format(" (beam filling {} to {})", significant(least->filling, 2, page.glyphs()),
                            significant(most->filling, 2, page.glyphs()));
}

std::string opacity_text(const Result& result, const Page& page) {
  const LineResult* most = nullptr;
  for (const LineResult& line : result.lines) {
    if (!std::isnan(line.optical_depth) && (!most || line.optical_depth > most->optical_depth)) most = &line;
  }
  if (!most) return {};
  return fmt::format("; largest {} {} ({})", page.pick("τ", "tau"),
                     significant(most->optical_depth, 2, page.glyphs()),
                     transition_of(most->transition, page));
}

void add_assumptions(Page& page, const Result& result) {
  std::string text;
  for (const std::string& assumption : result.assumptions) text += display_text(assumption) + "; ";
  text += fmt::format("background {} K; {}", value_with_error(result.background_k, 0.0, page.glyphs()),
                      filling_text(result, page));
  page.entry("assumes", text + opacity_text(result, page));
  if (!std::isnan(result.partition_function)) {
    const std::string source = display_text(result.partition_function_source);
    page.entry("Q", fmt::format("Q({} K) = {}{}", significant(result.temperature_k.value, 3, page.glyphs()),
                                significant(result.partition_function, 4, page.glyphs()),
                                source.empty() ? "" : ", " + source));
  }
  if (!result.method.empty()) page.entry("method", display_text(result.method));
}

std::string headline(Status status) {
  switch (status) {
    case Status::done:
      return {};
    case Status::one_line:
      return "No temperature: the lines have one upper energy.";
    case Status::not_thermal:
      return "No temperature: ln(N_u/g_u) does not fall with E_u.";
    case Status::only_limits:
      return "No line is detected: no temperature, and limits of N.";
    case Status::no_lines:
      return "No line is left to fit.";
    case Status::unbounded:
      return "The temperature lies outside the range for which Q(T) is known.";
    case Status::degenerate:
      return "The lines do not hold all parameters: ranges, and no single answer.";
    case Status::several:
      return "Several answers describe the lines alike.";
    case Status::at_bound:
      return "The best value lies at the end of a range: ranges, and no single answer.";
    case Status::no_solution:
      return "No temperature agrees with the opacity that it implies.";
    case Status::not_converged:
      return "The fit did not converge: there is no result.";
  }
  return {};
}

void add_slope(Page& page, const DiagramLine& line) {
  if (!std::isfinite(line.slope_per_k)) return;
  const double error = std::sqrt(line.slope_variance);
  std::string text = value_with_error(line.slope_per_k, error, page.glyphs()) + " per K";
  if (error > 0.0) {
    text +=
        fmt::format(", {} errors {} zero", significant(std::abs(line.slope_per_k) / error, 2, page.glyphs()),
                    line.slope_per_k < 0.0 ? "below" : "above");
  }
  page.entry("slope", text);
}

/// N at stated temperatures; where no line is detected it is the limit on N.
void add_columns_at_temperatures(Page& page, const Result& result) {
  if (result.columns_at_temperatures.empty()) return;
  TextColumn temperature{"T [K]", {}};
  TextColumn column{page.pick("N [cm⁻²]", "N [cm^-2]"), {}, false};
  for (const ColumnAtTemperature& row : result.columns_at_temperatures) {
    temperature.cells.push_back(value_with_error(row.temperature_k, 0.0, page.glyphs()));
    column.cells.push_back(row.upper_limit
                               ? "< " + significant(row.column_density_cm2, 2, page.glyphs())
                               : value_with_error(row.column_density_cm2, row.error_cm2, page.glyphs()));
  }
  for (const std::string& line :
       text_table({temperature, column}, page.width() - kLabelWidth, page.glyphs())) {
    page.line(std::string(kLabelWidth, ' ') + line);
  }
}

void add_posterior(Page& page, const Result& result) {
  const PosteriorSummary& posterior = result.posterior;
  if (posterior.method.empty()) return;
  std::string text = "ranges from the posterior, by " + display_text(posterior.method);
  if (!posterior.refusal.empty()) text = "no ranges from the posterior: " + display_text(posterior.refusal);
  if (!posterior.effective_size.empty()) {
    const double least = *std::min_element(posterior.effective_size.begin(), posterior.effective_size.end());
    const double worst = *std::max_element(posterior.split_r_hat.begin(), posterior.split_r_hat.end());
    text += fmt::format("; draws: seed {}, at least {} independent, split R-hat up to {}", posterior.seed,
                        significant(least, 3, page.glyphs()), fixed_decimals(worst, 3, page.glyphs()));
  }
  page.entry("", text);
}

void add_answer(Page& page, const Result& result) {
  if (result.status != Status::done) page.line("  " + headline(result.status), kYellow);
  const std::string message = display_text(result.message);
  if (!message.empty()) page.entry("", message);
  add_estimates(page, result);
  add_components(page, result);
  add_isomer_ratios(page, result);
  add_posterior(page, result);
  add_columns_at_temperatures(page, result);
  if (result.status == Status::not_thermal || result.status == Status::unbounded) {
    add_slope(page, result.diagram_line);
  }
  add_goodness(page, result);
  const std::string verdict = display_text(result.verdict);
  if (!verdict.empty()) page.entry("verdict", verdict);
}

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

void add_unused(Page& page, const Result& result) {
  const auto reasons = unused_by_reason(result, page);
  if (reasons.empty()) return;
  page.heading("Not used");
  for (const auto& [why, lines] : reasons) page.item("-", lines + page.pick(" – ", " - ") + why, kDim);
}

/// What leaving each line out does to T: the lines that move it most.
void add_leave_one_out(Page& page, const Result& result) {
  if (result.leave_one_out.empty() || !(result.temperature_k.error > 0.0)) return;
  constexpr std::size_t kMost = 3;
  std::vector<const LeftOut*> rows;
  for (const LeftOut& row : result.leave_one_out) rows.push_back(&row);
  const auto shift = [&](const LeftOut* row) { return std::abs(row->temperature_k - result.temperature_k.value); };
  std::stable_sort(rows.begin(), rows.end(), [&](const auto* a, const auto* b) { return shift(a) > shift(b); });
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
  if (boundary) page.line("  (p): the smaller model lies at the edge of the larger; p is a guide, no exact chance", kDim);
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
