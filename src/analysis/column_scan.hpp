// N at stated temperatures, where a fit sets none.
#pragma once

#include <vector>

#include "likelihood_method.hpp"

namespace trotline {

/// N, or its upper limit (95 %, one-sided), at the given temperature or at a few, one component that fills
/// the beam or has the given size. Limits alone: the N at which a line above one of them is seen 95 % of the
/// time.
/// @param whole  the setup of what was asked for; taken apart to one component
void list_columns(Result& result, const std::vector<PreparedLine>& lines, const Species& species,
                  const RunOptions& options, const ModelKind& kind);

}  // namespace trotline
