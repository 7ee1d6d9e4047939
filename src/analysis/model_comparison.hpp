#pragma once

#include <vector>

#include <trotline/analysis/result.hpp>
#include <trotline/analysis/run_options.hpp>
#include <trotline/species/species.hpp>

#include "prepared_line.hpp"

namespace trotline {

/// Fills Result::models and model_choice: one component thin and with opacity, spin isomers apart, a free
/// source size, two components, as far as the lines allow each, on the data that the method has fitted.
///
/// Likelihood ratios are against the basic model: one component, isomers together, with opacity where every
/// line has a width.
void compare_models(Result& result, const std::vector<PreparedLine>& lines, const Species& species,
                    const RunOptions& options);

}  // namespace trotline
