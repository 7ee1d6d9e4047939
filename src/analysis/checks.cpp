#include "checks.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <numbers>
#include <set>

#include <trotline/inference/lte_checks.hpp>

#include "check_hints.hpp"
#include "collision_rates.hpp"
#include "line_divisions.hpp"

namespace trotline {
namespace {

// At tau0 = 0.3 the Gaussian curve of growth takes 10 % off a line (PHYSICS: C = 1.10).
constexpr double kThinOpacity = 0.3;
constexpr double kMostRelativeError = 0.5;
// Deeper, a Gaussian line is saturated over more than its FWHM: what is left to set N are the wings.
constexpr double kWingOpacity = 10.0;

Outcome outcome_of(CheckOutcome outcome) {
  switch (outcome) {
    case CheckOutcome::pass:
      return Outcome::pass;
    case CheckOutcome::fail:
      return Outcome::fail;
    case CheckOutcome::not_testable:
      return Outcome::not_testable;
  }
  return Outcome::not_testable;
}

/// Whether the data set T at all: with an open interval, or an error of the size of T, every model would do.
Check temperature_set(const Result& result) {
  const Estimate& t = result.temperature_k;
  Check check{"temperature set by the data", kNotKnown, Outcome::not_testable, "T is given, not fitted"};
  if (result.temperature_fixed) return check;
  check.meaning = "there is no temperature";
  if (std::isnan(t.value) || std::isnan(t.error)) return check;
  check.figure = t.error / t.value;
  if (std::isnan(t.high95)) {
    check.meaning = "within 95 % T has no upper bound: the data bound it from below only";
  } else if (check.figure > kMostRelativeError) {
    check.meaning = "the error of T is more than half of T";
  } else {
    check.outcome = Outcome::pass;
    check.meaning = fmt::format("T is known to {:.2g} %", 100.0 * check.figure);
  }
  return check;
}

/// Limits against the model, whether they took part in the fit or not.
Check limits_kept(const Result& result) {
  Check check{"limits", kNotKnown, Outcome::not_testable, "no line is a limit"};
  int limits = 0;
  std::vector<std::string> broken;
  for (const LineResult& line : result.lines) {
    if (!line.limit || line.excluded || std::isnan(line.model_intensity_k_km_s)) continue;
    ++limits;
    const double sigma =
        std::isnan(line.intensity_error_k_km_s) ? line.intensity_k_km_s / 3.0 : line.intensity_error_k_km_s;
    const double error = std::hypot(sigma, line.calibration_error * line.model_intensity_k_km_s);
    const double above = (line.model_intensity_k_km_s - line.intensity_k_km_s) / error;
    if (!(check.figure >= above)) check.figure = above;
    if (above > kLteLimitSigma) broken.push_back(line.transition);
  }
  if (limits == 0) return check;
  check.outcome = broken.empty() ? Outcome::pass : Outcome::fail;
  const std::string most = fmt::format(
      "the model comes to {:+.1f} sigma of a limit at the most (above it where positive)", check.figure);
  check.meaning =
      broken.empty() ? most : fmt::format("the model lies above the limit of {}", fmt::join(broken, ", "));
  return check;
}

const LineResult* most_opaque(const Result& result) {
  const LineResult* most = nullptr;
  for (const LineResult& line : result.lines) {
    if (!line.used || std::isnan(line.optical_depth)) continue;
    if (most == nullptr || line.optical_depth > most->optical_depth) most = &line;
  }
  return most;
}

Check largest_opacity(const Result& result, Opacity opacity) {
  Check check{"opacity", kNotKnown, Outcome::not_testable, "no line has a width: opacity cannot be told"};
  const LineResult* most = most_opaque(result);
  if (most == nullptr) return check;
  check.figure = most->optical_depth;
  check.meaning = fmt::format("largest optical depth at line centre, by this model: {:.2g} in {}",
                              most->optical_depth, most->transition);
  if (opacity != Opacity::thin) {
    check.outcome = Outcome::pass;
    check.meaning += "; the fit takes it into account";
    if (most->optical_depth > kWingOpacity) {
      check.meaning +=
          ", but N then rests on the wings of the profile, taken as Gaussian: a thinner isotopologue is safer";
    }
  } else {
    check.outcome = most->optical_depth <= kThinOpacity ? Outcome::pass : Outcome::fail;
    if (check.outcome == Outcome::fail) check.meaning += "; thin lines are assumed, so N is too low";
  }
  return check;
}

std::string chance_text(double p) {
  return fmt::format("chance alone would give more with probability {:.2g}", p);
}

std::string transition_of_datum(const FittedModel& fitted, const std::vector<PreparedLine>& lines,
                                int datum) {
  std::vector<std::string> names;
  for (const std::size_t row : fitted.setup.rows_of_datum[static_cast<std::size_t>(datum)]) {
    names.push_back(lines[row].result.transition);
  }
  return fmt::format("{}", fmt::join(names, "+"));
}

Check goodness_of_fit(const LteCheck& from, const std::string& opacity_hint) {
  Check check{"goodness of fit", from.p_value, outcome_of(from.outcome),
              "chi2 needs more lines than fitted parameters"};
  if (from.outcome != CheckOutcome::not_testable) {
    check.meaning = fmt::format("chance alone would scatter the lines more than this with probability {:.2g}",
                                from.p_value);
  }
  if (from.outcome == CheckOutcome::fail) check.meaning += opacity_hint;
  return check;
}

Check curvature(const LteCheck& from, const std::string& opacity_hint) {
  Check check{"curvature", from.figure, outcome_of(from.outcome),
              "a curve needs three energies and a line to spare"};
  if (from.outcome == CheckOutcome::not_testable) return check;
  check.meaning = fmt::format("a term in E_u squared, in its errors; {}", chance_text(from.p_value));
  if (from.outcome == CheckOutcome::fail) {
    check.meaning += from.figure > 0.0
                         ? "; high levels hold more than one temperature allows: a warmer component?"
                         : "; high levels hold less than one temperature allows: not thermalised?";
    check.meaning += opacity_hint;
  }
  return check;
}

Check outlier(const LteCheck& from, const FittedModel& fitted, const std::vector<PreparedLine>& lines) {
  Check check{"outlying lines", from.figure, outcome_of(from.outcome),
              "no line can be held against the others"};
  if (from.outcome == CheckOutcome::not_testable) return check;
  check.meaning =
      fmt::format("largest residual over its expected scatter, in {}; {}",
                  transition_of_datum(fitted, lines, from.data.front()), chance_text(from.p_value));
  return check;
}

std::string subset_text(const std::vector<SubsetTemperature>& subsets, const std::string& division) {
  std::vector<std::string> texts;
  for (const SubsetTemperature& subset : subsets) {
    if (subset.division != division || std::isnan(subset.temperature_k)) continue;
    texts.push_back(fmt::format("{}: {:.3g} +/- {:.2g} K", subset.subset, subset.temperature_k,
                                subset.temperature_error_k));
  }
  return fmt::format("{}", fmt::join(texts, ", "));
}

Check groups(const Result& result, const LteCheck& from, const std::vector<PreparedLine>& lines,
             const RunOptions& options) {
  Check check{"temperature by " + from.grouping, from.figure, outcome_of(from.outcome),
              "needs lines of different energy in two groups, and a line to spare"};
  if (from.outcome == CheckOutcome::not_testable) return check;
  check.meaning = chance_text(from.p_value);
  const std::string temperatures = subset_text(result.subset_temperatures, from.grouping);
  if (!temperatures.empty()) check.meaning = temperatures + "; " + check.meaning;
  if (from.outcome == CheckOutcome::fail && temperatures_agree(result.subset_temperatures, from.grouping))
    check.meaning += offset_hint(from.grouping, result.subset_temperatures, lines, options);
  return check;
}

Check trend(const std::string& name, const LteCheck& from, const char* why_not,
            const std::string& cause) {
  Check check{name, from.figure, outcome_of(from.outcome), why_not};
  if (from.outcome == CheckOutcome::not_testable) return check;
  check.meaning = fmt::format("the trend in its errors; {}", chance_text(from.p_value));
  if (from.outcome == CheckOutcome::fail) check.meaning += cause;
  return check;
}

// ---- the fit that the checks look at
// -----------------------------------------------------------------------

/// The model that a method of lines in the diagram stands for, fitted to the intensities from its answer.
FittedModel refitted(const Result& result, const std::vector<PreparedLine>& lines, const Species& species,
                     const RunOptions& options, Opacity opacity) {
  const ModelKind kind{opacity, 1, false, NoiseModel::gaussian};
  FittedModel fitted{set_up_model(lines, species, options, kind), nullptr, {}};
  fitted.likelihood = std::make_unique<IntensityLikelihood>(*fitted.setup.model, fitted.setup.problem);
  const double ln_t = std::log(result.temperature_k.value);
  const double ln_n = std::log(result.column_density_cm2.value);
  FitOptions from_answer;
  from_answer.most_grid_starts = 0;
  from_answer.starts.resize(1);
  Eigen::VectorXd& start = from_answer.starts.front();
  start.resize(fitted.likelihood->free_count());
  start[0] = ln_n;
  if (start.size() > 1) start[1] = ln_t;
  fitted.fit = fit_likelihood(*fitted.likelihood, from_answer);
  return fitted;
}

/// Heavy tails hide what the checks look for: the same model with Gaussian noise, from the robust answer.
FittedModel with_gaussian_noise(const FittedModel& robust) {
  FittedModel fitted{robust.setup, nullptr, {}};
  fitted.setup.kind.noise = fitted.setup.problem.noise = NoiseModel::gaussian;
  fitted.likelihood = std::make_unique<IntensityLikelihood>(*fitted.setup.model, fitted.setup.problem);
  FitOptions from_answer;
  from_answer.most_grid_starts = 0;
  from_answer.starts = {robust.fit.free};
  fitted.fit = fit_likelihood(*fitted.likelihood, from_answer);
  return fitted;
}

void set_critical_densities(Result& result, const std::vector<PreparedLine>& lines, const Species& species,
                            const RunOptions& options) {
  if (options.collisions.empty()) return;
  const CollisionRates rates = read_collision_rates(options.collisions, species);
  result.provenance.data_sources.push_back(
      fmt::format("collision rates with {} ({}): {}", rates.partner, rates.file, rates.from));
  if (std::isnan(result.temperature_k.value)) return;
  bool outside = false;
  for (std::size_t i = 0; i < lines.size(); ++i) {
    const auto density =
        critical_density_per_cm3(rates, species.transitions[lines[i].transition], result.temperature_k.value);
    outside = outside || !density;
    result.lines[i].critical_density_cm3 = density.value_or(kNotKnown);
  }
  if (outside) {
    result.warnings.push_back(fmt::format("{} holds no rates for some of the lines at {:.4g} K", rates.file,
                                          result.temperature_k.value));
  }
}

Check critical_density(const Result& result, const RunOptions& options) {
  Check check{"critical density", kNotKnown, Outcome::not_testable,
              "needs the option 'collisions' with rates, and 'density'"};
  if (options.collisions.empty()) return check;
  check.meaning = "needs the option 'density' to hold the critical densities against";
  if (!options.density_per_cm3) return check;
  check.meaning = "the file of rates has none for these lines and this temperature";
  std::vector<std::string> above;
  for (const LineResult& line : result.lines) {
    const double ratio = line.critical_density_cm3 / *options.density_per_cm3;
    if (!line.used || std::isnan(ratio)) continue;
    if (!(check.figure >= ratio)) check.figure = ratio;
    if (ratio > 1.0) above.push_back(line.transition);
  }
  if (std::isnan(check.figure)) return check;
  check.outcome = above.empty() ? Outcome::pass : Outcome::fail;
  check.meaning = above.empty() ? "every line lies below its critical density"
                                : fmt::format(
                                      "the density given is below the critical one of {}: their levels need "
                                      "not be thermal",
                                      fmt::join(above, ", "));
  return check;
}

// ---- putting it together
// -----------------------------------------------------------------------------------

/// Whether T is held without one line: by lines of two energies or more, and to better than its own size.
bool holds_temperature(const LeaveOneOut& row, const FittedModel& fitted,
                       const std::vector<PreparedLine>& lines) {
  std::set<long> energies;  // in steps of 1e-3 K
  for (std::size_t datum = 0; datum < fitted.setup.rows_of_datum.size(); ++datum) {
    if (static_cast<int>(datum) == row.datum || fitted.setup.problem.data[datum].is_limit) continue;
    for (const std::size_t line : fitted.setup.rows_of_datum[datum])
      energies.insert(std::lround(1e3 * lines[line].constants.upper_energy_k));
  }
  const double relative = row.temperature_sigma_k / row.temperature_k;
  return energies.size() > 1 && relative > 0.0 && relative < kLteVagueLnT;
}

LteReport lte_report(Result& result, const FittedModel& fitted, const std::vector<PreparedLine>& lines) {
  std::vector<std::size_t> first_rows;
  for (const auto& rows : fitted.setup.rows_of_datum) first_rows.push_back(rows.front());
  const std::vector<LineDivision> divisions = line_divisions(lines, first_rows);
  LteOptions options;
  for (const LineDivision& division : divisions) options.groupings.push_back({division.name, division.group});
  LteReport report = check_lte(*fitted.likelihood, fitted.fit, options);
  for (const LeaveOneOut& row : report.leave_one_out) {
    if (!result.temperature_fixed && !holds_temperature(row, fitted, lines)) continue;
    result.leave_one_out.push_back({transition_of_datum(fitted, lines, row.datum), row.standardised_residual,
                                    row.temperature_k, row.temperature_sigma_k,
                                    row.ln_column / std::numbers::ln10});
  }
  for (const SubsetFit& subset : report.subsets) {
    const LineDivision& division = divisions[static_cast<std::size_t>(subset.grouping)];
    result.subset_temperatures.push_back({division.name,
                                          division.groups[static_cast<std::size_t>(subset.group)],
                                          subset.data, subset.temperature_k, subset.temperature_sigma_k});
  }
  return report;
}

void add_lte_checks(Result& result, const FittedModel& fitted, const std::vector<PreparedLine>& lines,
                    const RunOptions& options) {
  const std::string opacity_hint =
      fitted.setup.kind.opacity == Opacity::thin ? unseen_opacity_hint(result, options) : "";
  const LteReport report = lte_report(result, fitted, lines);
  for (const LteCheck& check : report.checks) {
    switch (check.kind) {
      case LteCheckKind::goodness_of_fit:
        result.checks.push_back(goodness_of_fit(check, opacity_hint));
        break;
      case LteCheckKind::curvature:
        result.checks.push_back(curvature(check, opacity_hint));
        break;
      case LteCheckKind::outlier:
        result.checks.push_back(outlier(check, fitted, lines));
        break;
      case LteCheckKind::groups:
        result.checks.push_back(groups(result, check, lines, options));
        break;
      case LteCheckKind::opacity_trend:
        result.checks.push_back(trend("residuals against opacity", check,
                                      "needs line widths, and lines opaque enough to show it",
                                      "; the lines are more, or less, opaque than the model has them"));
        break;
      case LteCheckKind::beam_trend:
        result.checks.push_back(trend("residuals against beam", check,
                                      "needs a beam for every line, of different size, and a line to spare",
                                      beam_hint(check.figure, options) + opacity_hint));
        break;
      case LteCheckKind::limits:
      case LteCheckKind::collisions:
        break;  // by limits_kept and critical_density, for every method alike
    }
  }
}

std::string verdict_of(const Result& result, const RunOptions& options) {
  if (result.status != Status::done) return "these lines cannot tell";
  const char* const model = options.components > 1 ? "two temperatures" : "one temperature";
  std::vector<std::string> failed;
  bool subcritical = false;
  bool fit_testable = false;
  for (const Check& check : result.checks) {
    fit_testable =
        fit_testable || (check.name == "goodness of fit" && check.outcome != Outcome::not_testable);
    if (check.outcome != Outcome::fail) continue;
    if (check.name == "critical density") {
      subcritical = true;
    } else {
      failed.push_back(check.name);
    }
  }
  const bool neglected = failed == std::vector<std::string>{"opacity"};
  if (!failed.empty() && !neglected) {
    const char* const verb = options.components > 1 ? "do" : "does";
    return fmt::format("{} {} not describe the lines (failed: {})", model, verb, fmt::join(failed, ", "));
  }
  const Check is_set = temperature_set(result);
  if (!fit_testable || !(result.temperature_fixed || is_set.outcome == Outcome::pass))
    return "these lines cannot tell";
  std::string text = fmt::format("{} describe{} the lines{}", model, options.components > 1 ? "" : "s",
                                 subcritical ? ", but at the density given it need not be that of the gas" : "");
  if (neglected) {
    text += fmt::format(", but they are opaque: N is too low and T may be off (use {})",
                        neglected_opacity_hint(options));
  }
  return text;
}

}  // namespace

void check_assumptions(Result& result, const std::vector<PreparedLine>& lines, const Species& species,
                       const RunOptions& options, const FittedModel& fitted, Opacity opacity) {
  set_critical_densities(result, lines, species, options);
  if (result.status == Status::done) {
    const bool robust = fitted.likelihood && fitted.setup.kind.noise != NoiseModel::gaussian;
    FittedModel own;
    if (!fitted.likelihood) own = refitted(result, lines, species, options, opacity);
    if (robust) own = with_gaussian_noise(fitted);
    add_lte_checks(result, own.likelihood ? own : fitted, lines, options);
  }
  result.checks.insert(result.checks.begin() + (result.checks.empty() ? 0 : 1), temperature_set(result));
  result.checks.push_back(largest_opacity(result, opacity));
  result.checks.push_back(limits_kept(result));
  result.checks.push_back(critical_density(result, options));
  result.verdict = verdict_of(result, options);
}

}  // namespace trotline
