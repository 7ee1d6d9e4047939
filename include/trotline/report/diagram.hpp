#pragma once

#include <filesystem>
#include <string>
#include <vector>

#include <trotline/analysis/result.hpp>
#include <trotline/report/diagram_files.hpp>
#include <trotline/report/diagram_layout.hpp>

namespace trotline {

struct DiagramOptions {
  std::vector<FigureFormat> formats = {FigureFormat::svg, FigureFormat::pdf, FigureFormat::png};
  FigureSize size = {};
  double timeout_s = 60.0;          ///< for drawing all formats
  std::string program = "gnuplot";  ///< looked up in PATH
};

/// Draws the rotation diagram of a result into `folder`: diagram.svg, diagram.pdf, diagram.png as asked, and
/// beside them the script diagram.gp with its data diagram-*.tsv, which a user can change and run again. One
/// process draws all formats. The same result gives the same bytes on the same machine.
/// @return the names of all files written
/// @throws SystemError with the message of the drawing program when it fails, is missing or does not end
std::vector<std::string> write_diagram(const Result& result, const std::filesystem::path& folder,
                                       const DiagramOptions& options = {});

}  // namespace trotline
