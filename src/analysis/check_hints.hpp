// What a check that failed may be due to, and what to try: the ends of its sentences.
#pragma once

#include <string>
#include <vector>

#include <trotline/analysis/result.hpp>
#include <trotline/analysis/run_options.hpp>

#include "prepared_line.hpp"

namespace trotline {

/// Where a fit takes lines as thin and widths are missing, opacity is a cause that no check can see; empty
/// otherwise.
[[nodiscard]] std::string unseen_opacity_hint(const Result& result, const RunOptions& options);

/// @param trend  z of a power of the beam: dilution of a source taken to fill every beam makes it negative
[[nodiscard]] std::string beam_hint(double trend, const RunOptions& options);

/// Whether the temperatures of a division's parts agree, fitted each by itself: the weighted scatter of ln T
/// about its mean has a chance of kLteCheckChance or more. False with fewer than two temperatures.
[[nodiscard]] bool temperatures_agree(const std::vector<SubsetTemperature>& subsets,
                                      const std::string& division);

/// For parts of a division whose temperatures agree while the check fails: they differ in N.
[[nodiscard]] std::string offset_hint(const std::string& division, const std::vector<SubsetTemperature>& subsets,
                                      const std::vector<PreparedLine>& lines, const RunOptions& options);

/// For a verdict that only the check of opacity stands against.
[[nodiscard]] std::string neglected_opacity_hint(const RunOptions& options);

}  // namespace trotline
