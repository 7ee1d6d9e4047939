// From a likelihood fit to the numbers of a Result.
#pragma once

#include <vector>

#include "likelihood_method.hpp"

namespace trotline {

/// T, N, size and background with errors and intervals; components; parameters with their covariance.
/// @param only_ranges  leave values out that the data do not set: the fit is no answer as a whole
void set_estimates(Result& result, const FittedModel& fitted, const Species& species,
                   const RunOptions& options, bool only_ranges);

}  // namespace trotline
