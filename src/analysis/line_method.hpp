#pragma once

#include <vector>

#include <trotline/analysis/result.hpp>
#include <trotline/analysis/run_options.hpp>
#include <trotline/species/species.hpp>

#include "prepared_line.hpp"

namespace trotline {

/// The method `line`: the straight line of the rotation diagram, thin lines, background exact.
///
/// Sets the status, T, N, the diagram's line and, where T and N are known, what they predict for every line.
/// @throws InputError where a given temperature lies below the background or outside the range of Q
void fit_by_straight_line(Result& result, std::vector<PreparedLine>& lines, const Species& species,
                          const RunOptions& options);

}  // namespace trotline
