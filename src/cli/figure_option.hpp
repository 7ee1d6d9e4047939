#pragma once

#include <string>
#include <vector>

#include <trotline/report/figure.hpp>

namespace trotline {

/// The value of --figures: "svg,pdf,png" or some of them, or "none". @throws UsageError for other words
[[nodiscard]] std::vector<FigureFormat> figure_formats(const std::string& text);

}  // namespace trotline
