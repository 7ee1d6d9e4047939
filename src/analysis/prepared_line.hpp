#pragma once

#include <vector>

#include <trotline/analysis/line_matching.hpp>
#include <trotline/analysis/result.hpp>
#include <trotline/analysis/run_options.hpp>
#include <trotline/excitation/thin_line.hpp>

namespace trotline {

/// A line with all that a fit needs: its constants, and its intensity as an ordinate of the diagram.
struct PreparedLine {
  LineConstants constants;
  LineResult result;           ///< filled as far as it can be before a fit
  double ln_thin = kNotKnown;  ///< ln(N_u/g_u) [cm^-2], thin, filling corrected, background not; NaN for W <= 0
  double ln_noise_sigma = kNotKnown;  ///< sigma / W
  std::size_t transition = 0;         ///< index into Species::transitions
  std::string spin;                   ///< spin isomer of the upper level; empty where there is only one
  std::string upper_label;            ///< quantum numbers of the upper level
};

/// True for the methods that fit intensities: limits, blends and negative intensities are data to them.
[[nodiscard]] bool fits_intensities(const RunOptions& options);

/// Main-beam scale, filling, calibration and selection of every row.
/// @throws InputError naming the row that lacks a beam or an efficiency
[[nodiscard]] std::vector<PreparedLine> prepare_lines(const MatchedTable& matched, const Species& species,
                                                      const RunOptions& options, const std::string& table_file);

}  // namespace trotline
