// From a likelihood fit to the numbers of a Result.
#pragma once

#include <vector>

#include "likelihood_method.hpp"

namespace trotline {

/// T, N, size and background with errors and intervals; components; parameters with their covariance.
/// @param only_ranges  leave values out that the data do not set: the fit is no answer as a whole
void set_estimates(Result& result, const FittedModel& fitted, const Species& species,
                   const RunOptions& options, bool only_ranges);

/// What the model predicts for every line, used or not: intensity, residual, opacity, filling and the point
/// of the diagram; and the line or curves of the diagram.
void set_predictions(Result& result, const FittedModel& fitted, std::vector<PreparedLine>& lines,
                     const RunOptions& options);

/// N, or its upper limit (95 %, one-sided), at the given temperature or at a few, one component that fills
/// the beam or has the given size. Limits alone: the N at which a line above one of them is seen 95 % of the
/// time.
/// @param whole  the setup of what was asked for; taken apart to one component
void list_columns(Result& result, const std::vector<PreparedLine>& lines, const Species& species,
                  const RunOptions& options, const ModelKind& kind);

}  // namespace trotline
