#pragma once

#include <filesystem>
#include <string>
#include <vector>

#include <trotline/analysis/result.hpp>
#include <trotline/report/figure.hpp>

namespace trotline {

/// Fewest draws that make a figure; with less a density says nothing.
inline constexpr std::size_t kFewestCornerDraws = 100;

/// Draws the posterior's draws into `folder`: corner.svg, corner.pdf, corner.png as asked, and beside them
/// the script corner.gp with its data corner-*.tsv. Histograms of each parameter, density of each pair.
/// @return the names of all files written; none where the result holds fewer than kFewestCornerDraws draws
/// @throws SystemError with the message of the drawing program when it fails, is missing or does not end
std::vector<std::string> write_corner(const Result& result, const std::filesystem::path& folder,
                                      const std::vector<FigureFormat>& formats);

}  // namespace trotline
