#pragma once

#include <vector>

#include <trotline/analysis/result.hpp>
#include <trotline/analysis/run_options.hpp>
#include <trotline/species/species.hpp>

#include "likelihood_method.hpp"
#include "prepared_line.hpp"

namespace trotline {

/// Fills Result::checks, leave_one_out, subset_temperatures, critical densities and Result::verdict: whether
/// one temperature describes the lines, does not, or cannot be told.
///
/// The checks are made on the intensities, by the model of the method (thin lines for `line`), whatever the
/// method: one that did not fit intensities is fitted again from its own answer.
/// @param fitted  what a likelihood method left; without a likelihood for the others
/// @throws InputError as read_collision_rates
void check_assumptions(Result& result, const std::vector<PreparedLine>& lines, const Species& species,
                       const RunOptions& options, const FittedModel& fitted, Opacity opacity);

}  // namespace trotline
