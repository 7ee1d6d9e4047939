#pragma once

#include <filesystem>
#include <string>
#include <vector>

#include <trotline/analysis/measurement.hpp>
#include <trotline/report/figure.hpp>

namespace trotline {

struct LinePanelOptions {
  std::vector<FigureFormat> formats = {FigureFormat::svg, FigureFormat::pdf, FigureFormat::png};
  double timeout_s = 60.0;          ///< for one page in all formats
  std::string program = "gnuplot";  ///< looked up in PATH
};

/// Panels on one page, three beside one another and eight rows of them.
inline constexpr std::size_t kPanelsOnAPage = 24;
/// Pages that are drawn at most; panels beyond them are left out.
inline constexpr std::size_t kMostPanelPages = 20;

/// Draws every measured line that kept its panel into `folder`: data, baseline, window, fit, prediction, the
/// noise as a bar, and where other lines lie. A page has the files panels.svg, panels.pdf, panels.png as asked,
/// and beside them the script panels.gp with its data panels-data.tsv and panels-text.tsv, which a user can
/// change and run again; pages after the first are panels-2.svg and so on. The same lines give the same bytes
/// on the same machine.
/// @return the names of all files written; none where no line has a panel
/// @throws SystemError with the message of the drawing program when it fails, is missing or does not end
std::vector<std::string> write_line_panels(const SpeciesMeasurement& measurement,
                                           const std::filesystem::path& folder,
                                           const LinePanelOptions& options = {});

/// How many panels there are to draw, those beyond the last page included.
[[nodiscard]] std::size_t count_line_panels(const SpeciesMeasurement& measurement);

}  // namespace trotline
