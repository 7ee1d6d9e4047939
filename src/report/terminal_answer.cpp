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
    page.entry(label, with_unit(value_with_error(estimate.value, estimate.error, page.glyphs()), unit),
               kBold);
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
    page.entry("N_tot", significant(n.value, 4, page.glyphs()) + " " + per_area + ", stated and not fitted",
               kBold);
  } else {
    add_estimate(page, "N_tot", n, per_area);
    if (std::isfinite(log_n.value))
      page.entry("log10 N", value_with_error(log_n.value, log_n.error, page.glyphs()));
  }
  if (has_range(result.source_size_fit_arcsec) || std::isfinite(result.source_size_fit_arcsec.value)) {
    add_estimate(page, "size", result.source_size_fit_arcsec, "arcsec");
  }
}

/// Place of ln N of an isomer among the parameters, or their number.
std::size_t column_parameter(const Result& result, const std::string& isomer) {
  const auto found = std::find_if(
      result.parameters.begin(), result.parameters.end(),
      [&](const FittedParameter& parameter) { return parameter.name == "ln_column_density_cm2_" + isomer; });
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

}  // namespace

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

}  // namespace trotline::terminal
