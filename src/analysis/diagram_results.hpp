// What the methods that draw a line through the diagram share, and how estimates are filled.
#pragma once

#include <cstddef>
#include <vector>

#include <trotline/analysis/result.hpp>
#include <trotline/analysis/run_options.hpp>
#include <trotline/excitation/curve_of_growth.hpp>
#include <trotline/inference/thermal_line.hpp>
#include <trotline/species/species.hpp>

#include "prepared_line.hpp"

namespace trotline {

inline constexpr double kZ95 = 1.959963984540054;  // normal quantile of 0.975

/// Temperatures at which N is listed where the lines give none [K].
inline constexpr double kListedTemperaturesK[] = {5.0, 10.0, 20.0, 40.0, 75.0, 150.0, 300.0};

[[nodiscard]] std::vector<std::size_t> used_lines(const std::vector<PreparedLine>& lines);

/// Two lines share their calibration factor where they name the same group; a line without one is alone,
/// unless the options say that all such lines belong together.
[[nodiscard]] bool share_calibration(const LineResult& a, const LineResult& b, const RunOptions& options);

/// The diagram of the lines `used`, filling corrected, background and opacity not.
[[nodiscard]] DiagramData diagram_data(const std::vector<PreparedLine>& lines,
                                       const std::vector<std::size_t>& used, const RunOptions& options);

/// value -/+ sigma, and -/+ 1.96 sigma.
[[nodiscard]] Estimate plain_estimate(double value, double sigma);

/// exp of an estimate of a natural logarithm; the same over ln 10.
[[nodiscard]] Estimate exponential(const Estimate& natural_log);
[[nodiscard]] Estimate to_log10(const Estimate& natural_log);

/// N of the result from an estimate of ln N.
void set_column(Result& result, const Estimate& ln_column);

/// Q of the result, with a warning where it is uncertain; T of the result is set already.
void set_partition(Result& result, const PartitionValue& value, const PartitionFunction& partition);

/// Model intensity, residual, opacity and the corrected ordinate of one line at the fitted state. With an
/// opacity other than thin the line has a width.
void predict(PreparedLine& line, const ThermalState& state, double background_k, Opacity opacity);

/// Line, chi2, dof and p of the diagram.
void set_diagram_line(Result& result, const ThermalLineFit& fit);

/// N, or its limit, at the given temperature or at a few: all that one line, or limits alone, can say.
void tabulate_columns(Result& result, const std::vector<PreparedLine>& lines,
                      const PartitionFunction& partition, const RunOptions& options, bool from_limits);

/// The status where no line is left to fit.
void say_nothing_to_fit(Result& result, const std::vector<PreparedLine>& lines,
                        const PartitionFunction& partition, const RunOptions& options);

/// The status of lines that all have the same upper energy.
void say_one_energy(Result& result);

/// The status where the diagram's line gives a temperature for which there is no Q(T).
void say_outside_of_q(Result& result, const ThermalLineFit& fit, const PartitionFunction& partition);

/// @throws InputError where a given temperature lies below the background or outside the range of Q
void require_usable_temperature(double temperature_k, double background_k, const Species& species);

}  // namespace trotline
