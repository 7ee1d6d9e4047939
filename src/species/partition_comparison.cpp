#include <algorithm>
#include <cmath>
#include <limits>

#include <trotline/species/partition_function.hpp>

namespace trotline {
namespace {

double median(std::vector<double> values) {
  if (values.empty()) return std::numeric_limits<double>::quiet_NaN();
  std::sort(values.begin(), values.end());
  const std::size_t half = values.size() / 2;
  return values.size() % 2 == 1 ? values[half] : 0.5 * (values[half - 1] + values[half]);
}

bool can_give(const PartitionFunction& partition, double temperature_k) {
  return temperature_k >= partition.lowest_k() && temperature_k <= partition.highest_k();
}

}  // namespace

PartitionComparison compare(const PartitionFunction& first, const PartitionFunction& second,
                            const std::vector<double>& temperatures_k) {
  PartitionComparison comparison;
  std::vector<double> ratios;
  for (const double temperature_k : temperatures_k) {
    if (!can_give(first, temperature_k) || !can_give(second, temperature_k)) continue;
    ratios.push_back(first.at(temperature_k).q / second.at(temperature_k).q);
    comparison.ratios.emplace_back(temperature_k, ratios.back());
  }
  comparison.constant_factor = median(ratios);
  if (ratios.empty()) comparison.spread = comparison.constant_factor;
  for (const double ratio : ratios) {
    comparison.spread = std::max(comparison.spread, std::abs(ratio / comparison.constant_factor - 1.0));
  }
  comparison.is_difference_of_convention =
      std::abs(comparison.constant_factor - 1.0) > kSameConvention && comparison.spread <= kSameConvention;
  return comparison;
}

}  // namespace trotline
