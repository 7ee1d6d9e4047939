#pragma once

#include <memory>
#include <optional>
#include <string>
#include <utility>
#include <vector>

#include <trotline/species/level.hpp>

namespace trotline {

/// Q and its slope at one temperature.
struct PartitionValue {
  double q = 0.0;        ///< Q(T), dimensionless
  double ln_q = 0.0;     ///< its natural logarithm
  double dlnq_dt = 0.0;  ///< d ln Q / dT [1/K]; the mean energy <E>/k is T^2 times this

  /// Relative error of Q that the truncation of the sum, or the interpolation, may have caused.
  double relative_error = 0.0;
};

/// Q(T) = sum over levels of g exp(-E/kT), however it is come by.
class PartitionFunction {
 public:
  PartitionFunction() = default;
  PartitionFunction(const PartitionFunction&) = delete;
  PartitionFunction& operator=(const PartitionFunction&) = delete;
  virtual ~PartitionFunction() = default;

  /// @param temperature_k  T [K], inside [lowest_k(), highest_k()]
  /// @throws DomainError outside of that range: nothing is ever extrapolated
  [[nodiscard]] virtual PartitionValue at(double temperature_k) const = 0;

  [[nodiscard]] virtual double lowest_k() const = 0;   ///< lowest temperature that can be asked for [K]
  [[nodiscard]] virtual double highest_k() const = 0;  ///< highest one [K]

  /// One phrase for reports, e.g. "sum over 100 levels" or "table of 11 temperatures".
  [[nodiscard]] virtual std::string description() const = 0;
};

/// A vibrational mode that multiplies Q by (1 - exp(-hc omega/kT))^(-degeneracy): harmonic, and with the
/// rotational levels of the ground state in every excited one.
struct VibrationalMode {
  double energy_k = 0.0;  ///< hc omega / k [K], > 0
  int degeneracy = 1;     ///< > 0
};

/// What a sum over levels is to know besides the levels.
struct LevelSumOptions {
  std::vector<VibrationalMode> modes = {};
  double highest_k = 1e5;  ///< no temperature above can be asked for [K]; > kLowestTemperatureK

  /// No level is missing below this energy [K]; > 0. Without it: below the last level. Infinity: the levels
  /// are all there are, e.g. the fine structure of an atom well below its next term.
  std::optional<double> complete_to_k = std::nullopt;
};

/// Direct sum over levels, times harmonic vibrational factors.
///
/// relative_error estimates the part of the sum that is missing above complete_to_k: the number of states
/// is taken to go on growing as the power of energy with which it grew over the upper half of what is
/// complete. highest_k() is where the estimate reaches kMostTruncation, or options.highest_k if that is
/// lower. The estimate knows nothing of anharmonicity.
/// @param levels  at least one, in any order; energies finite and >= 0, degeneracies finite and > 0
/// @throws DomainError naming level and value
[[nodiscard]] std::shared_ptr<const PartitionFunction> partition_function_from_levels(
    const std::vector<Level>& levels, const LevelSumOptions& options = {});

inline constexpr double kMostTruncation = 1e-2;

/// Lowest temperature at which a sum over levels can be asked for [K].
inline constexpr double kLowestTemperatureK = 1e-3;

/// A table of (T, Q), interpolated by a cubic that never overshoots, in ln T - ln Q.
///
/// Slopes follow Steffen 1990, A&A 239, 443: those of the parabola through three points, limited so that Q
/// never falls. Such a cubic reproduces straight lines, so dividing Q by T^(d/2) first, d being the number of
/// rotational degrees of freedom, would change nothing.
/// relative_error in an interval is the error that the interpolation makes when the nearest inner points are
/// left out, each in its turn: the worse of the two ends. Leaving a point out doubles the step, so the
/// estimate is a cautious one; it is large for wide tables at low T. The rounding of the table adds to it.
/// @param points  (T [K], Q): at least 5, T > 0 and rising, Q > 0 and not falling
/// @throws DomainError naming the offending point
[[nodiscard]] std::shared_ptr<const PartitionFunction> partition_function_from_table(
    const std::vector<std::pair<double, double>>& points);

/// How one Q relates to another over the temperatures that both can give.
struct PartitionComparison {
  double constant_factor = 1.0;  ///< median of ratio first / second; NaN when no temperature is left
  double spread = 0.0;           ///< largest |ratio / constant_factor - 1|; NaN when no temperature is left
  std::vector<std::pair<double, double>> ratios;  ///< (T, first / second)

  /// The factor is not 1 within kSameConvention, but constant within it: spins are counted otherwise.
  bool is_difference_of_convention = false;
};

inline constexpr double kSameConvention = 0.02;

/// @param temperatures_k  where to compare; those outside either range are left out
[[nodiscard]] PartitionComparison compare(const PartitionFunction& first, const PartitionFunction& second,
                                          const std::vector<double>& temperatures_k);

}  // namespace trotline
