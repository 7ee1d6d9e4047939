#include "likelihood_method.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <numbers>

#include <trotline/base/errors.hpp>

#include "diagram_results.hpp"
#include "column_scan.hpp"
#include "model_answer.hpp"
#include "model_predictions.hpp"

namespace trotline {
namespace {

// 2 ln of the likelihood ratio against no emission at all below which nothing counts as detected: 3 sigma.
constexpr double kLeastDetection = 9.0;

/// 2 ln L above that of no emission.
double detection(const FittedModel& fitted) {
  const IntensityLikelihood& likelihood = *fitted.likelihood;
  const StateLayout& layout = fitted.setup.model->layout();
  Eigen::VectorXd none = fitted.fit.free;
  const Eigen::VectorXd lower = likelihood.lower_bounds();
  bool any = false;
  for (Eigen::Index k = 0; k < none.size(); ++k) {
    const int entry = likelihood.free_entries()[static_cast<std::size_t>(k)];
    const bool is_column = entry != layout.background() && entry % (layout.isomers + 2) < layout.isomers;
    if (is_column) none[k] = lower[k];
    any = any || is_column;
  }
  if (!any) return HUGE_VAL;  // N is given
  LikelihoodWorkspace workspace = likelihood.workspace();
  return 2.0 * (likelihood.cost(none, workspace) - fitted.fit.cost);
}

enum class EntryKind { column, temperature, size, background };

EntryKind kind_of(int entry, const StateLayout& layout) {
  if (entry == layout.background()) return EntryKind::background;
  const int place = entry % (layout.isomers + 2);
  return place < layout.isomers    ? EntryKind::column
         : place == layout.isomers ? EntryKind::temperature
                                   : EntryKind::size;
}

std::string name_of_entry(int entry, const FittedModel& fitted) {
  const StateLayout& layout = fitted.setup.model->layout();
  std::string name;
  switch (kind_of(entry, layout)) {
    case EntryKind::column:
      name = "N";
      break;
    case EntryKind::temperature:
      name = "T";
      break;
    case EntryKind::size:
      name = "the source size";
      break;
    case EntryKind::background:
      return "the background";
  }
  const int component = entry / (layout.isomers + 2);
  if (layout.components > 1) name += fmt::format(" of component {}", component + 1);
  const int isomer = entry % (layout.isomers + 2);
  if (layout.isomers > 1 && isomer < layout.isomers) {
    name += " of " + fitted.setup.isomers[static_cast<std::size_t>(isomer)];
  }
  return name;
}

bool is_at_upper(const FittedModel& fitted, int entry) {
  const auto& parameter = fitted.setup.problem.parameters[static_cast<std::size_t>(entry)];
  return fitted.fit.state[entry] > 0.5 * (parameter.lower + parameter.upper);
}

/// Sizes at the upper end of their range: the source fills every beam, and that is an answer.
bool only_sizes_fill_the_beam(const FittedModel& fitted) {
  const StateLayout& layout = fitted.setup.model->layout();
  return std::all_of(fitted.fit.at_bound.begin(), fitted.fit.at_bound.end(), [&](int entry) {
    return kind_of(entry, layout) == EntryKind::size && is_at_upper(fitted, entry);
  });
}

std::string names_of_weak_entries(const FittedModel& fitted) {
  constexpr double kTakesPart = 0.25;
  std::vector<std::string> names;
  for (Eigen::Index k = 0; k < fitted.fit.weakest_direction.size(); ++k) {
    if (std::abs(fitted.fit.weakest_direction[k]) < kTakesPart) continue;
    names.push_back(name_of_entry(fitted.likelihood->free_entries()[static_cast<std::size_t>(k)], fitted));
  }
  return fmt::format("{}", fmt::join(names, " and "));
}

Alternative alternative_of(const FittedModel& fitted, const Eigen::VectorXd& free, double excess_cost) {
  const StateLayout& layout = fitted.setup.model->layout();
  const Eigen::VectorXd state = fitted.likelihood->state_of(free);
  double column = 0.0;
  for (int c = 0; c < layout.components; ++c) {
    for (int i = 0; i < layout.isomers; ++i) column += std::exp(state[layout.ln_column(c, i)]);
  }
  const double size = std::exp(state[layout.ln_size(0)]);
  return {std::exp(state[layout.ln_temperature(0)]), std::log10(column),
          std::isfinite(size) ? size : kNotKnown, 2.0 * excess_cost};
}

void say_several(Result& result, const FittedModel& fitted) {
  result.status = Status::several;
  result.alternatives.push_back(alternative_of(fitted, fitted.fit.free, 0.0));
  for (const OtherMinimum& other : fitted.fit.others) {
    result.alternatives.push_back(alternative_of(fitted, other.free, other.excess_cost));
  }
  std::vector<std::string> texts;
  for (const Alternative& a : result.alternatives) {
    texts.push_back(fmt::format("T = {:.4g} K with N = {:.3g} cm^-2", a.temperature_k,
                                std::pow(10.0, a.log10_column_density_cm2)));
  }
  result.message = fmt::format(
      "{} answers describe the lines about as well (chi2 within 4): {}. A width, a size, a "
      "line of another opacity or energy would tell them apart",
      texts.size(), fmt::join(texts, "; "));
}

void say_at_bound(Result& result, const FittedModel& fitted) {
  const StateLayout& layout = fitted.setup.model->layout();
  std::vector<std::string> texts;
  bool too_hot = false;
  for (const int entry : fitted.fit.at_bound) {
    const bool upper = is_at_upper(fitted, entry);
    too_hot = too_hot || (upper && kind_of(entry, layout) == EntryKind::temperature);
    const auto& p = fitted.setup.problem.parameters[static_cast<std::size_t>(entry)];
    double edge = upper ? p.upper : p.lower;
    if (kind_of(entry, layout) != EntryKind::background) edge = std::exp(edge);
    texts.push_back(
        fmt::format("{} ({} end, {:.3g})", name_of_entry(entry, fitted), upper ? "upper" : "lower", edge));
  }
  result.status = too_hot ? Status::unbounded : Status::at_bound;
  result.message = fmt::format(
      "the likelihood still rises at the end of the range of {}: the ranges below are what "
      "the lines set",
      fmt::join(texts, ", "));
}

/// The status of a fit whose lines are detected and more than its parameters.
void set_status(Result& result, const FittedModel& fitted) {
  switch (fitted.fit.status) {
    case FitStatus::converged:
      result.status = Status::done;
      return;
    case FitStatus::multimodal:
      say_several(result, fitted);
      return;
    case FitStatus::degenerate:
      result.status = Status::degenerate;
      result.message = fmt::format("the lines do not hold {}: what they set are the ranges given",
                                   names_of_weak_entries(fitted));
      return;
    case FitStatus::at_bound:
      if (only_sizes_fill_the_beam(fitted)) {
        result.status = Status::done;
        result.warnings.push_back(
            "the best source size is the largest that is looked at: the source fills every "
            "beam, and the lines set a lower limit of its size at most");
      } else {
        say_at_bound(result, fitted);
      }
      return;
    case FitStatus::only_limits:
    case FitStatus::too_few_data:
    case FitStatus::not_converged:
      result.status = Status::not_converged;
      result.message = "no start led to a minimum of the likelihood";
      return;
  }
}

/// Fewer measurements than parameters, or lines of one upper energy: no temperature.
bool is_one_line(const FittedModel& fitted, const RunOptions& options) {
  if (fitted.fit.status == FitStatus::too_few_data) return true;
  if (options.temperature_k || options.temperature_prior_k || options.column_density_per_cm2) return false;
  const auto& lines = fitted.setup.model->lines();
  return std::all_of(lines.begin(), lines.end(), [&](const ModelLine& line) {
    return std::abs(line.constants.upper_energy_k - lines.front().constants.upper_energy_k) < 1e-6;
  });
}

void say_one_line(Result& result, const FittedModel& fitted) {
  const auto measured = fitted.likelihood->measured_count();
  result.status = Status::one_line;
  if (measured > 1 && fitted.fit.status == FitStatus::too_few_data) {
    result.message = fmt::format(
        "{} measurements for {} free parameters: no answer. N of one component is listed for "
        "several temperatures",
        measured, fitted.likelihood->free_count());
  } else {
    result.message = "no temperature; N is listed for several, or give the option 'temperature'";
  }
}

std::string refusal_of(PosteriorStatus status) {
  switch (status) {
    case PosteriorStatus::done:
      return {};
    case PosteriorStatus::unbounded:
      return "a parameter has no bounds";
    case PosteriorStatus::too_short:
      return "the walk did not come to the length that its autocorrelation asks for";
    case PosteriorStatus::not_mixed:
      return "the walkers disagree on where the density lies";
  }
  return {};
}

std::vector<double> numbers(const Eigen::VectorXd& vector) { return {vector.begin(), vector.end()}; }

void add_posterior(Result& result, FittedModel& fitted, const RunOptions& options) {
  const StateLayout& layout = fitted.setup.model->layout();
  PosteriorOptions asked;
  asked.ensemble.seed = options.seed;
  asked.with_draws = options.keep_samples || layout.components > 1 || layout.isomers > 1;
  try {
    fitted.posterior = posterior(*fitted.likelihood, fitted.fit, asked);
  } catch (const DomainError&) {
    // The best fit lies where no walker can start, at bounds of several parameters: an answer, not a fault.
    result.posterior.refusal = "the best fit lies at the bounds of its parameters, where no draw can start";
    result.warnings.push_back("the posterior gives no ranges: " + result.posterior.refusal);
    return;
  }
  PosteriorSummary& summary = result.posterior;
  summary.method = fitted.posterior->by_quadrature ? "quadrature" : "ensemble sampler";
  summary.refusal = refusal_of(fitted.posterior->status);
  if (!summary.refusal.empty()) {
    result.warnings.push_back("the posterior gives no ranges: " + summary.refusal);
  }
  if (!fitted.posterior->sample) return;
  const EnsembleSample& sample = *fitted.posterior->sample;
  summary.seed = sample.seed;
  summary.walkers = sample.walkers;
  summary.ensembles = sample.ensembles;
  summary.steps = sample.steps;
  summary.acceptance = sample.acceptance;
  summary.autocorrelation_steps = numbers(sample.autocorrelation_steps);
  summary.effective_size = numbers(sample.effective_size);
  summary.split_r_hat = numbers(sample.split_r_hat);
  if (!options.keep_samples || !sample.usable()) return;
  for (Eigen::Index k = 0; k < sample.draws.rows(); ++k)
    summary.draws.push_back(numbers(sample.draws.row(k)));
}

/// Optical depths come from the width that a line would have were it thin, and a measured one is larger.
void warn_of_broadened_widths(Result& result, const std::vector<PreparedLine>& lines,
                              const RunOptions& options) {
  constexpr double kOpaque = 1.0;
  double largest = 0.0;
  for (const PreparedLine& line : lines) {
    const bool is_from_table = line.result.fwhm_km_s > 0.0 && line.result.fwhm_km_s != options.fwhm_km_s;
    if (line.result.used && is_from_table && line.result.optical_depth > kOpaque) {
      largest = std::max(largest, line.result.optical_depth);
    }
  }
  if (largest == 0.0) return;
  result.warnings.push_back(fmt::format(
      "optical depths reach {:.2g}, from widths of the table: 'fwhm' is the width that a line would have "
      "were it "
      "thin. A width measured on an opaque line is broadened and shifts T and N; take that of a thin line",
      largest));
}

}  // namespace

FittedModel fit_by_likelihood(Result& result, std::vector<PreparedLine>& lines, const Species& species,
                              const RunOptions& options) {
  if (options.temperature_k)
    require_usable_temperature(*options.temperature_k, options.background_k, species);
  if (used_lines(lines).empty()) {
    say_nothing_to_fit(result, lines, *species.partition, options);
    return {};
  }
  const ModelKind kind = model_kind(lines, options, result.warnings);
  FittedModel fitted{set_up_model(lines, species, options, kind), nullptr, {}};
  fitted.likelihood = std::make_unique<IntensityLikelihood>(*fitted.setup.model, fitted.setup.problem);
  if (fitted.likelihood->measured_count() == 0) {
    result.status = Status::only_limits;
    result.message =
        "no line is measured: at each temperature listed N stays below the limit beside it (95 %)";
    list_columns(result, lines, species, options, kind);
    return {};
  }
  fitted.fit = fit_likelihood(*fitted.likelihood);
  const double detected = detection(fitted);
  if (detected < kLeastDetection) {
    result.status = Status::only_limits;
    result.message = fmt::format(
        "no line is detected: all together stand out by {:.1f} sigma. At each temperature "
        "listed N stays below the limit beside it (95 %)",
        std::sqrt(std::max(0.0, detected)));
    list_columns(result, lines, species, options, kind);
    return {};
  }
  if (is_one_line(fitted, options)) {
    say_one_line(result, fitted);
    list_columns(result, lines, species, options, kind);
    return {};
  }
  set_status(result, fitted);
  if (result.status == Status::not_converged) return fitted;
  if (options.intervals == "posterior") add_posterior(result, fitted, options);
  set_estimates(result, fitted, species, options, result.status != Status::done);
  if (result.status != Status::done) return fitted;
  set_predictions(result, fitted, lines, options);
  warn_of_broadened_widths(result, lines, options);
  return fitted;
}

}  // namespace trotline
