#pragma once

#include <memory>
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

/// A vibrational mode that multiplies Q by (1 - exp(-hc omega/kT))^(-degeneracy).
struct VibrationalMode {
  double energy_k = 0.0;  ///< hc omega / k [K]
  int degeneracy = 1;
};

/// Direct sum over levels, times harmonic vibrational factors.
///
/// relative_error estimates the part of the sum that lies above the last level, from the growth of g over
/// the last levels; highest_k() is where it reaches kMostTruncation, or `highest_k` if that is lower.
/// @param levels  at least one, energies finite and >= 0, degeneracies > 0
/// @throws DomainError naming level and value
[[nodiscard]] std::shared_ptr<const PartitionFunction> partition_function_from_levels(
    const std::vector<Level>& levels, std::vector<VibrationalMode> modes = {}, double highest_k = 1e5);

inline constexpr double kMostTruncation = 1e-2;

/// A table of (T, Q), interpolated monotonically in ln T - ln(Q / T^(d/2)).
///
/// @param points  at least 3, T rising, Q > 0 and not falling
/// @param rotational_degrees_of_freedom  d: 2 for a linear species, 3 otherwise
/// relative_error comes from leaving out every second point; it is large for wide tables at low T.
/// @throws DomainError naming the offending point
[[nodiscard]] std::shared_ptr<const PartitionFunction> partition_function_from_table(
    std::vector<std::pair<double, double>> points, int rotational_degrees_of_freedom);

/// How one Q relates to another over the temperatures that both can give.
struct PartitionComparison {
  double constant_factor = 1.0;  ///< median of ratio first / second
  double spread = 0.0;           ///< largest |ratio / constant_factor - 1|
  std::vector<std::pair<double, double>> ratios;  ///< (T, first / second)
  bool is_difference_of_convention = false;       ///< factor is not 1, but constant: spins counted otherwise
};

/// @param temperatures_k  where to compare; those outside either range are left out
[[nodiscard]] PartitionComparison compare(const PartitionFunction& first, const PartitionFunction& second,
                                          const std::vector<double>& temperatures_k);

}  // namespace trotline
