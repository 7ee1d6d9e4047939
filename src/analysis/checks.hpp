#pragma once

#include <trotline/analysis/result.hpp>

namespace trotline {

/// Fills Result::checks and Result::verdict from the fitted lines: whether one temperature describes them,
/// does not, or cannot be told.
void check_assumptions(Result& result);

}  // namespace trotline
