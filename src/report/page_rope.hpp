// The page's picture of a whole survey: a rope with a line for every job.
#pragma once

#include <string>
#include <vector>

namespace trotline {

struct RopeHook {
  double temperature_k;
  double log10_column;  ///< NaN where not known
  bool is_in_doubt;     ///< a check failed
};

/// An inline SVG: temperatures on a logarithmic rope, from which a line hangs for every job, the longer the
/// larger its column density. Beyond 4000 jobs every second, third ... is drawn.
[[nodiscard]] std::string rope_svg(const std::vector<RopeHook>& hooks);

}  // namespace trotline
