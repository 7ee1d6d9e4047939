#include "opacity_method.hpp"

#include <fmt/format.h>

#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/inference/opacity_line.hpp>

#include "diagram_results.hpp"

namespace trotline {
namespace {

Opacity opacity_of(const RunOptions& options) {
  if (options.opacity == "thin") {
    throw InputError({"method 'opacity-line' and opacity 'thin' contradict each other",
                      "opacity 'curve-of-growth' or 'line-centre'",
                      "method 'line' is the one for thin lines"});
  }
  return options.opacity == "line-centre" ? Opacity::line_centre : Opacity::curve_of_growth;
}

OpacityLineData corrected_data(const std::vector<PreparedLine>& lines, const std::vector<std::size_t>& used,
                               const RunOptions& options) {
  OpacityLineData data;
  data.diagram = diagram_data(lines, used, options);
  data.opacity = opacity_of(options);
  data.fwhm_km_s.resize(static_cast<Eigen::Index>(used.size()));
  for (std::size_t k = 0; k < used.size(); ++k) {
    const PreparedLine& line = lines[used[k]];
    if (!(line.result.fwhm_km_s > 0.0)) {
      throw InputError({fmt::format("line {} (table line {}) has no width, which its opacity needs",
                                    line.result.transition, line.result.table_line),
                        "a width for every line", "add a column 'fwhm [km/s]' or the option 'line_width'"});
    }
    data.lines.push_back(line.constants);
    data.fwhm_km_s[static_cast<Eigen::Index>(k)] = line.result.fwhm_km_s;
  }
  return data;
}

/// Ends of T and ln N from the curvature: symmetric in 1/T and in ln N. No bound above where 1/T = 0 is
/// inside.
void set_estimates(Result& result, const ThermalLineFit& fit, const ThermalState& state) {
  const double beta = fit.inverse_temperature_per_k;
  const double sigma = std::sqrt(fit.inverse_temperature_variance);
  const auto temperature = [&](double z) {
    return beta + z * sigma > 0.0 ? 1.0 / (beta + z * sigma) : kNotKnown;
  };
  result.temperature_k.value = state.temperature_k;
  if (!result.temperature_fixed) {
    result.temperature_k = {state.temperature_k, state.temperature_sigma_k, temperature(1.0),
                            temperature(-1.0),   temperature(kZ95),         temperature(-kZ95)};
    result.correlation_ln_n_t = state.correlation;
  }
  set_column(result, plain_estimate(state.ln_column_per_cm2, state.ln_column_sigma));
}

void fill_done(Result& result, std::vector<PreparedLine>& lines, const OpacityLineData& data,
               const OpacityLineFit& fit, const PartitionFunction& partition) {
  set_diagram_line(result, fit.line);
  const ThermalState state = thermal_state(fit.line, partition);
  result.status = Status::done;
  set_estimates(result, fit.line, state);
  set_partition(result, state.partition, partition);
  for (PreparedLine& line : lines) {
    const bool has_width = line.result.fwhm_km_s > 0.0;
    predict(line, state, data.diagram.background_k, has_width ? data.opacity : Opacity::thin);
  }
  if (fit.other_solutions > 0) {
    result.warnings.push_back(fmt::format(
        "{} other pair{} of T and N agree{} with the opacity corrections they imply; this is the one of "
        "least "
        "chi2. Compare the method 'likelihood'",
        fit.other_solutions, fit.other_solutions == 1 ? "" : "s", fit.other_solutions == 1 ? "s" : ""));
  }
}

void say_no_fit(Result& result, OpacityLineStatus status) {
  if (status == OpacityLineStatus::one_energy) {
    say_one_energy(result);
  } else if (status == OpacityLineStatus::not_thermal) {
    result.status = Status::not_thermal;
    result.message =
        "the populations do not fall with energy, with or without corrections for opacity: no temperature";
  } else {
    result.status = Status::no_solution;
    result.message =
        "no temperature and column density agree with the opacity corrections that they imply; the method "
        "'likelihood' fits the intensities themselves and may have an answer";
  }
}

void fit_both(Result& result, std::vector<PreparedLine>& lines, const OpacityLineData& data,
              const PartitionFunction& partition) {
  const OpacityLineFit fit = fit_opacity_line(data);
  const double t = 1.0 / fit.line.inverse_temperature_per_k;
  if (fit.status != OpacityLineStatus::done) {
    say_no_fit(result, fit.status);
  } else if (t < partition.lowest_k() || t > partition.highest_k()) {
    say_outside_of_q(result, fit.line, partition);
  } else {
    fill_done(result, lines, data, fit, partition);
  }
}

}  // namespace

void fit_by_opacity_line(Result& result, std::vector<PreparedLine>& lines, const Species& species,
                         const RunOptions& options) {
  const auto used = used_lines(lines);
  const PartitionFunction& partition = *species.partition;
  if (used.empty()) {
    say_nothing_to_fit(result, lines, partition, options);
    return;
  }
  const OpacityLineData data = corrected_data(lines, used, options);
  if (options.temperature_k) {
    require_usable_temperature(*options.temperature_k, options.background_k, species);
    const OpacityLineFit fit = fit_opacity_line_at(data, *options.temperature_k);
    if (fit.status == OpacityLineStatus::done) {
      fill_done(result, lines, data, fit, partition);
    } else {
      say_no_fit(result, fit.status);
    }
  } else if (used.size() == 1) {
    result.status = Status::one_line;
    result.message =
        "no temperature; give the option 'temperature' for N with its opacity, or take the method "
        "'likelihood' for N at several temperatures";
  } else {
    fit_both(result, lines, data, partition);
  }
}

}  // namespace trotline
