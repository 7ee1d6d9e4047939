#pragma once

#include <string>

#include <trotline/analysis/result.hpp>

namespace trotline {

/// The rotation diagram of a result as a small inline SVG for a page: points with error bars, limits, lines
/// left out, the fitted line with its 68 % band, axes. Colours come from the page's style sheet. It holds
/// numbers and fixed words only, and says in words what it shows. Empty when no line can be drawn.
[[nodiscard]] std::string small_diagram(const Result& result);

}  // namespace trotline
