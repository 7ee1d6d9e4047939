#include "line_method.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <iterator>
#include <numbers>

#include <trotline/base/errors.hpp>
#include <trotline/inference/least_squares.hpp>
#include <trotline/inference/thermal_line.hpp>

namespace trotline {
namespace {

constexpr double kZ95 = 1.959963984540054;  // normal quantile of 0.975
constexpr double kTemperaturesForOneLine[] = {5.0, 10.0, 20.0, 40.0, 75.0, 150.0, 300.0};

std::vector<std::size_t> used_lines(const std::vector<PreparedLine>& lines) {
  std::vector<std::size_t> used;
  for (std::size_t i = 0; i < lines.size(); ++i) {
    if (lines[i].result.used) used.push_back(i);
  }
  return used;
}

/// Two lines share their calibration factor where they name the same group; a line without one is alone,
/// unless the options say that all such lines belong together.
bool share_calibration(const LineResult& a, const LineResult& b, const RunOptions& options) {
  if (a.calibration_group.empty() && b.calibration_group.empty()) return options.calibration_shared;
  return a.calibration_group == b.calibration_group;
}

DiagramData diagram_data(const std::vector<PreparedLine>& lines, const std::vector<std::size_t>& used,
                         const RunOptions& options) {
  const auto size = static_cast<Eigen::Index>(used.size());
  DiagramData data;
  data.ln_nu_over_gu.resize(size);
  data.upper_energy_k.resize(size);
  data.frequency_hz.resize(size);
  data.covariance.setZero(size, size);
  data.background_k = options.background_k;
  for (Eigen::Index i = 0; i < size; ++i) {
    const PreparedLine& line = lines[used[static_cast<std::size_t>(i)]];
    data.ln_nu_over_gu[i] = line.ln_thin;
    data.upper_energy_k[i] = line.constants.upper_energy_k;
    data.frequency_hz[i] = line.constants.frequency_hz;
    for (Eigen::Index j = 0; j <= i; ++j) {
      const LineResult& a = line.result;
      const LineResult& b = lines[used[static_cast<std::size_t>(j)]].result;
      const bool shared = i == j || share_calibration(a, b, options);
      const double calibration = shared ? a.calibration_error * b.calibration_error : 0.0;
      const double noise = i == j ? line.ln_noise_sigma * line.ln_noise_sigma : 0.0;
      data.covariance(i, j) = data.covariance(j, i) = noise + calibration;
    }
  }
  return data;
}

Estimate exponential(const Estimate& natural_log) {
  Estimate estimate;
  estimate.value = std::exp(natural_log.value);
  estimate.error = estimate.value * natural_log.error;
  estimate.low68 = std::exp(natural_log.low68);
  estimate.high68 = std::exp(natural_log.high68);
  estimate.low95 = std::exp(natural_log.low95);
  estimate.high95 = std::exp(natural_log.high95);
  return estimate;
}

Estimate to_log10(const Estimate& e) {
  const double f = 1.0 / std::numbers::ln10;
  return {e.value * f, e.error * f, e.low68 * f, e.high68 * f, e.low95 * f, e.high95 * f};
}

void set_column(Result& result, const Estimate& ln_column) {
  result.column_density_cm2 = exponential(ln_column);
  result.log10_column_density_cm2 = to_log10(ln_column);
}

void set_partition(Result& result, const PartitionValue& value, const PartitionFunction& partition) {
  result.partition_function = value.q;
  result.partition_function_source = partition.description();
  constexpr double kWorthSaying = 1e-3;
  if (value.relative_error > kWorthSaying) {
    result.warnings.push_back(fmt::format("Q({:.4g} K) may be off by {:.2g} %: the levels or the table of the "
                                          "species file do not carry further",
                                          result.temperature_k.value, 100.0 * value.relative_error));
  }
}

/// Model intensity, residual, opacity and the corrected ordinate of one line at the fitted state.
void predict(PreparedLine& line, double ln_column, double temperature_k, double ln_q, double background_k) {
  LineResult& result = line.result;
  const LineConstants& c = line.constants;
  const double contrast = background_contrast(c.frequency_hz, temperature_k, background_k);
  const double upper_column = std::exp(ln_column - ln_q - c.upper_energy_k / temperature_k) * c.upper_degeneracy;
  result.model_intensity_k_km_s =
      upper_column * intensity_per_upper_column_k_km_s_cm2(c) * result.filling * contrast;
  result.residual_sigma = (result.intensity_k_km_s - result.model_intensity_k_km_s) /
                          std::hypot(result.intensity_error_k_km_s,
                                     result.calibration_error * result.model_intensity_k_km_s);
  if (contrast > 0.0) result.ln_nu_gu = line.ln_thin - std::log(contrast);
  if (result.fwhm_km_s > 0.0) {
    result.optical_depth = central_optical_depth(c, upper_column, temperature_k, result.fwhm_km_s);
  }
}

void set_diagram_line(Result& result, const ThermalLineFit& fit) {
  result.diagram_line = {fit.intercept, -fit.inverse_temperature_per_k, fit.intercept_variance,
                         fit.inverse_temperature_variance, -fit.covariance};
  result.chi2 = fit.chi2;
  result.dof = fit.dof;
  result.p_value = chi2_survival(fit.chi2, fit.dof);
}

Estimate plain_estimate(double value, double sigma) {
  return {value, sigma, value - sigma, value + sigma, value - kZ95 * sigma, value + kZ95 * sigma};
}

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
  for (PreparedLine& line : lines) {
    predict(line, state.ln_column_per_cm2, state.temperature_k, state.partition.ln_q, data.background_k);
  }
}

/// N, or its limit, at the given temperature or at a few: all that one line, or limits alone, can say.
void tabulate_columns(Result& result, const std::vector<PreparedLine>& lines, const PartitionFunction& partition,
                      const RunOptions& options, bool from_limits) {
  const double background_k = options.background_k;
  std::vector<double> temperatures_k(std::begin(kTemperaturesForOneLine), std::end(kTemperaturesForOneLine));
  if (options.temperature_k) temperatures_k = {*options.temperature_k};
  for (const double t : temperatures_k) {
    if (t <= 1.05 * background_k || t < partition.lowest_k() || t > partition.highest_k()) continue;
    ColumnAtTemperature column{t, kNotKnown, kNotKnown, from_limits};
    for (const PreparedLine& line : lines) {
      const bool serves = from_limits ? line.result.limit && line.result.intensity_k_km_s > 0.0 : line.result.used;
      const double contrast = background_contrast(line.constants.frequency_hz, t, background_k);
      if (!serves || !(contrast > 0.0)) continue;
      const double n = std::exp(line.ln_thin - std::log(contrast) + partition.at(t).ln_q +
                                line.constants.upper_energy_k / t);
      if (column.column_density_cm2 < n) continue;  // the strictest limit counts; NaN compares false
      column.column_density_cm2 = n;
      if (!from_limits) column.error_cm2 = n * line.result.ln_nu_gu_error;
    }
    result.columns_at_temperatures.push_back(column);
  }
}

void say_nothing_to_fit(Result& result, const std::vector<PreparedLine>& lines,
                        const PartitionFunction& partition, const RunOptions& options) {
  const bool any_limit = std::any_of(lines.begin(), lines.end(), [](const PreparedLine& line) {
    return line.result.limit && line.result.intensity_k_km_s > 0.0;
  });
  if (!any_limit) {
    result.status = Status::no_lines;
    result.message = "the reasons stand beside the lines that are not used";
    return;
  }
  result.status = Status::only_limits;
  result.message = "at each temperature listed, N stays below the limit beside it";
  tabulate_columns(result, lines, partition, options, true);
}

/// The temperature is given: N alone is fitted.
void fit_column(Result& result, std::vector<PreparedLine>& lines, const DiagramData& data, const Species& species,
                double temperature_k) {
  const PartitionFunction& partition = *species.partition;
  if (temperature_k <= data.background_k) {
    throw InputError({fmt::format("temperature: {:g} K is not above the background, {:g} K", temperature_k,
                                  data.background_k),
                      "a temperature at which the lines emit"});
  }
  if (temperature_k < partition.lowest_k() || temperature_k > partition.highest_k()) {
    throw InputError({fmt::format("temperature: {:g} K is outside the range of Q(T)", temperature_k),
                      fmt::format("{:g} K to {:g} K, as the species file of {} allows", partition.lowest_k(),
                                  partition.highest_k(), species.name)});
  }
  const ThermalLineFit fit = fit_thermal_line_at(data, temperature_k);
  set_diagram_line(result, fit);
  fill_done(result, lines, data, fit, partition);
}

void say_not_thermal(Result& result, const ThermalLineFit& fit) {
  const double sigma = std::sqrt(fit.inverse_temperature_variance);
  const double steepest = fit.inverse_temperature_per_k + kZ95 * sigma;
  result.status = Status::not_thermal;
  result.message =
      fmt::format("the populations do not fall with energy: the slope is {:+.3g} +/- {:.2g} per K, no temperature",
                  -fit.inverse_temperature_per_k, sigma);
  if (steepest > 0.0) result.message += fmt::format("; T is above {:.3g} K (95 %)", 1.0 / steepest);
}

void say_outside_of_q(Result& result, const ThermalLineFit& fit, const PartitionFunction& partition) {
  const double t = 1.0 / fit.inverse_temperature_per_k;
  result.status = Status::unbounded;
  result.message = fmt::format(
      "the slope gives T = {:.4g} K, outside the range in which the species has a Q(T), {:g} K to {:g} K: no "
      "column density",
      t, partition.lowest_k(), partition.highest_k());
  result.temperature_k.value = t;
  result.temperature_k.error = t * t * std::sqrt(fit.inverse_temperature_variance);
}

/// Two lines or more: T and N.
void fit_both(Result& result, std::vector<PreparedLine>& lines, const DiagramData& data,
              const PartitionFunction& partition) {
  const ThermalLineFit fit = fit_thermal_line(data);
  if (fit.status == ThermalStatus::one_energy) {
    result.status = Status::one_line;
    result.message = "all lines have the same upper energy: no temperature; give 'temperature' for N";
    return;
  }
  if (fit.status != ThermalStatus::no_minimum) set_diagram_line(result, fit);
  const double t = 1.0 / fit.inverse_temperature_per_k;
  if (fit.status == ThermalStatus::not_thermal) {
    say_not_thermal(result, fit);
  } else if (fit.status == ThermalStatus::no_minimum) {
    result.status = Status::not_converged;
    result.message =
        "the best temperature is that of the background, where lines vanish: these intensities fit no emission "
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
