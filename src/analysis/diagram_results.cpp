#include "diagram_results.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <iterator>
#include <numbers>

#include <trotline/base/errors.hpp>
#include <trotline/inference/least_squares.hpp>

namespace trotline {

std::vector<std::size_t> used_lines(const std::vector<PreparedLine>& lines) {
  std::vector<std::size_t> used;
  for (std::size_t i = 0; i < lines.size(); ++i) {
    if (lines[i].result.used) used.push_back(i);
  }
  return used;
}

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

Estimate plain_estimate(double value, double sigma) {
  return {value, sigma, value - sigma, value + sigma, value - kZ95 * sigma, value + kZ95 * sigma};
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
    result.warnings.push_back(
        fmt::format("Q({:.4g} K) may be off by {:.2g} %: the levels or the table of the "
                    "species file do not carry further",
                    result.temperature_k.value, 100.0 * value.relative_error));
  }
}

void predict(PreparedLine& line, const ThermalState& state, double background_k, Opacity opacity) {
  LineResult& result = line.result;
  const LineConstants& c = line.constants;
  const double contrast = background_contrast(c.frequency_hz, state.temperature_k, background_k);
  const double upper_column =
      std::exp(state.ln_column_per_cm2 - state.partition.ln_q - c.upper_energy_k / state.temperature_k) *
      c.upper_degeneracy;
  if (result.fwhm_km_s > 0.0) {
    result.optical_depth = central_optical_depth(c, upper_column, state.temperature_k, result.fwhm_km_s);
  }
  const double correction =
      opacity == Opacity::thin
          ? 1.0
          : opacity_correction(opacity, std::min(result.optical_depth, kMostOpticalDepth)).factor;
  result.model_intensity_k_km_s =
      upper_column * intensity_per_upper_column_k_km_s_cm2(c) * result.filling * contrast / correction;
  result.residual_sigma =
      (result.intensity_k_km_s - result.model_intensity_k_km_s) /
      std::hypot(result.intensity_error_k_km_s, result.calibration_error * result.model_intensity_k_km_s);
  if (contrast > 0.0) result.ln_nu_gu = line.ln_thin - std::log(contrast) + std::log(correction);
}

void set_diagram_line(Result& result, const ThermalLineFit& fit) {
  result.diagram_line = {fit.intercept, -fit.inverse_temperature_per_k, fit.intercept_variance,
                         fit.inverse_temperature_variance, -fit.covariance};
  result.chi2 = fit.chi2;
  result.dof = fit.dof;
  result.p_value = chi2_survival(fit.chi2, fit.dof);
}

namespace {

/// A limit that the user has not put aside.
bool is_usable_limit(const LineResult& line) {
  return line.limit && !line.excluded && line.intensity_k_km_s > 0.0;
}

}  // namespace

void tabulate_columns(Result& result, const std::vector<PreparedLine>& lines,
                      const PartitionFunction& partition, const RunOptions& options, bool from_limits) {
  const double background_k = options.background_k;
  std::vector<double> temperatures_k(std::begin(kListedTemperaturesK), std::end(kListedTemperaturesK));
  if (options.temperature_k) temperatures_k = {*options.temperature_k};
  for (const double t : temperatures_k) {
    if (t <= 1.05 * background_k || t < partition.lowest_k() || t > partition.highest_k()) continue;
    ColumnAtTemperature column{t, kNotKnown, kNotKnown, from_limits};
    for (const PreparedLine& line : lines) {
      const bool serves = from_limits ? is_usable_limit(line.result) : line.result.used;
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
  const bool any_limit = std::any_of(lines.begin(), lines.end(),
                                     [](const PreparedLine& line) { return is_usable_limit(line.result); });
  const bool any_measured =
      std::any_of(lines.begin(), lines.end(), [](const PreparedLine& line) { return !line.result.limit; });
  if (!any_limit || any_measured) {
    result.status = Status::no_lines;
    result.message = "the reasons stand beside the lines that are not used";
    return;
  }
  result.status = Status::only_limits;
  result.message = "at each temperature listed, N stays below the limit beside it";
  tabulate_columns(result, lines, partition, options, true);
}

void say_one_energy(Result& result) {
  result.status = Status::one_line;
  result.message = "all lines have the same upper energy: no temperature; give 'temperature' for N";
}

void say_outside_of_q(Result& result, const ThermalLineFit& fit, const PartitionFunction& partition) {
  const double t = 1.0 / fit.inverse_temperature_per_k;
  result.status = Status::unbounded;
  result.message = fmt::format(
      "the line gives T = {:.4g} K, outside the range in which the species has a Q(T), {:g} K to {:g} K: no "
      "column density",
      t, partition.lowest_k(), partition.highest_k());
  result.temperature_k.value = t;
  result.temperature_k.error = t * t * std::sqrt(fit.inverse_temperature_variance);
}

void require_usable_temperature(double temperature_k, double background_k, const Species& species) {
  const PartitionFunction& partition = *species.partition;
  if (temperature_k <= background_k) {
    throw InputError(
        {fmt::format("temperature: {:g} K is not above the background, {:g} K", temperature_k, background_k),
         "a temperature at which the lines emit"});
  }
  if (temperature_k < partition.lowest_k() || temperature_k > partition.highest_k()) {
    throw InputError({fmt::format("temperature: {:g} K is outside the range of Q(T)", temperature_k),
                      fmt::format("{:g} K to {:g} K, as the species file of {} allows", partition.lowest_k(),
                                  partition.highest_k(), species.name)});
  }
}

}  // namespace trotline
