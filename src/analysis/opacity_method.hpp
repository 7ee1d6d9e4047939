#pragma once

#include <vector>

#include <trotline/analysis/result.hpp>
#include <trotline/analysis/run_options.hpp>
#include <trotline/species/species.hpp>

#include "prepared_line.hpp"

namespace trotline {

/// The method `opacity-line`: the straight line through a diagram whose points are corrected for the opacity
/// that the line itself implies.
///
/// Sets the status, T, N, the diagram's line, optical depths and corrected points, or says that no
/// temperature and column density agree with their own corrections.
/// @throws InputError where a line has no width, and as fit_by_straight_line
void fit_by_opacity_line(Result& result, std::vector<PreparedLine>& lines, const Species& species,
                         const RunOptions& options);

}  // namespace trotline
