// What a fitted model says of every line.
#pragma once

#include <vector>

#include "likelihood_method.hpp"

namespace trotline {

/// What the model predicts for every line, used or not: intensity, residual, opacity, filling and the point
/// of the diagram; and the line or curves of the diagram.
void set_predictions(Result& result, const FittedModel& fitted, std::vector<PreparedLine>& lines,
                     const RunOptions& options);

}  // namespace trotline
