#pragma once

#include <cstddef>
#include <string>

#include <trotline/species/partition_function.hpp>
#include <trotline/species/species.hpp>

namespace trotline {

/// How two files of one species differ.
struct SpeciesComparison {
  PartitionComparison partition;  ///< at the usual temperatures that both can give
  std::size_t common_lines = 0;   ///< lines of the same label
  std::size_t only_in_first = 0;  ///< further lines of the first, in the range of frequencies of both
  std::size_t only_in_second = 0;
  double largest_frequency_step_hz = 0.0;  ///< largest |difference| of frequencies
  std::string largest_frequency_label;     ///< of which line; empty without common lines
  double largest_energy_step_k = 0.0;      ///< largest |difference| of upper energies
  double a_factor = 1.0;  ///< median of the ratio first / second of A; NaN without common lines
  double a_spread = 0.0;  ///< largest |ratio / a_factor - 1|
};

/// Q at 2.725, 5, 9.375, 18.75, 37.5, 75, 150, 225, 300, 500 and 1000 K, and lines matched by label.
[[nodiscard]] SpeciesComparison compare(const Species& first, const Species& second);

}  // namespace trotline
