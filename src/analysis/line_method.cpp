#include "line_method.hpp"

#include <fmt/format.h>

#include <cmath>

#include <trotline/inference/thermal_line.hpp>

#include "diagram_results.hpp"

namespace trotline {
namespace {

void fill_done(Result& result, std::vector<PreparedLine>& lines, const DiagramData& data,
               const ThermalLineFit& fit, const PartitionFunction& partition) {
  const ThermalState state = thermal_state(fit, partition);
  result.status = Status::done;
  Estimate ln_column = plain_estimate(state.ln_column_per_cm2, state.ln_column_sigma);
  result.temperature_k.value = state.temperature_k;
  if (!result.temperature_fixed) {
    const ThermalIntervals one = thermal_intervals(data, fit, partition, 1.0);
    const ThermalIntervals two = thermal_intervals(data, fit, partition, kZ95);
    result.temperature_k = {state.temperature_k,    state.temperature_sigma_k, one.temperature_k.low,
                            one.temperature_k.high, two.temperature_k.low,     two.temperature_k.high};
    ln_column.low68 = one.ln_column_per_cm2.low;
    ln_column.high68 = one.ln_column_per_cm2.high;
    ln_column.low95 = two.ln_column_per_cm2.low;
    ln_column.high95 = two.ln_column_per_cm2.high;
    result.correlation_ln_n_t = state.correlation;
  }
  set_column(result, ln_column);
  set_partition(result, state.partition, partition);
  for (PreparedLine& line : lines) predict(line, state, data.background_k, Opacity::thin);
}

/// The temperature is given: N alone is fitted.
void fit_column(Result& result, std::vector<PreparedLine>& lines, const DiagramData& data,
                const Species& species, double temperature_k) {
  const PartitionFunction& partition = *species.partition;
  require_usable_temperature(temperature_k, data.background_k, species);
  const ThermalLineFit fit = fit_thermal_line_at(data, temperature_k);
  set_diagram_line(result, fit);
  fill_done(result, lines, data, fit, partition);
}

void say_not_thermal(Result& result, const ThermalLineFit& fit) {
  const double sigma = std::sqrt(fit.inverse_temperature_variance);
  const double steepest = fit.inverse_temperature_per_k + kZ95 * sigma;
  result.status = Status::not_thermal;
  result.message = fmt::format(
      "the populations do not fall with energy: the slope is {:+.3g} +/- {:.2g} per K, no temperature",
      -fit.inverse_temperature_per_k, sigma);
  if (steepest > 0.0) result.message += fmt::format("; T is above {:.3g} K (95 %)", 1.0 / steepest);
}

/// Two lines or more: T and N.
void fit_both(Result& result, std::vector<PreparedLine>& lines, const DiagramData& data,
              const PartitionFunction& partition) {
  const ThermalLineFit fit = fit_thermal_line(data);
  if (fit.status == ThermalStatus::one_energy) {
    say_one_energy(result);
    return;
  }
  if (fit.status != ThermalStatus::no_minimum) set_diagram_line(result, fit);
  const double t = 1.0 / fit.inverse_temperature_per_k;
  if (fit.status == ThermalStatus::not_thermal) {
    say_not_thermal(result, fit);
  } else if (fit.status == ThermalStatus::no_minimum) {
    result.status = Status::not_converged;
    result.message =
        "the best temperature is that of the background, where lines vanish: these intensities fit no "
        "emission "
        "from one temperature";
  } else if (t < partition.lowest_k() || t > partition.highest_k()) {
    say_outside_of_q(result, fit, partition);
  } else {
    fill_done(result, lines, data, fit, partition);
  }
}

}  // namespace

void fit_by_straight_line(Result& result, std::vector<PreparedLine>& lines, const Species& species,
                          const RunOptions& options) {
  const auto used = used_lines(lines);
  const PartitionFunction& partition = *species.partition;
  if (used.empty()) {
    say_nothing_to_fit(result, lines, partition, options);
    return;
  }
  const DiagramData data = diagram_data(lines, used, options);
  if (options.temperature_k) {
    fit_column(result, lines, data, species, *options.temperature_k);
  } else if (used.size() == 1) {
    result.status = Status::one_line;
    result.message = "N is listed for several temperatures; or give the option 'temperature'";
    tabulate_columns(result, lines, partition, options, false);
  } else {
    fit_both(result, lines, data, partition);
  }
}

}  // namespace trotline
