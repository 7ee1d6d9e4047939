#pragma once

#include <cstddef>
#include <string>
#include <vector>

#include <trotline/analysis/result.hpp>
#include <trotline/base/files.hpp>
#include <trotline/report/diagram.hpp>

namespace trotline {

struct OutputOptions {
  std::vector<FigureFormat> formats = {FigureFormat::svg, FigureFormat::pdf, FigureFormat::png};
  FigureSize figure_size = {};
  std::size_t report_width = 100;  ///< columns of report.txt
};

/// Makes all outputs of a result in the staging of `folder`: result.json, lines.ecsv, report.txt and, unless
/// `formats` is empty, the diagram with its script and data; where the result holds draws of a posterior also
/// samples.ecsv and the corner figure of the draws. They appear when the caller commits the folder,
/// so a failure here leaves nothing behind. docs/outputs.md describes them.
/// @throws SystemError when a file cannot be written or the figure not drawn
void write_outputs(const Result& result, OutputFolder& folder, const OutputOptions& options = {});

/// Every name that write_outputs() may write: to be given to OutputFolder::commit(), so that what an earlier run
/// left does not stand beside this one's result.
[[nodiscard]] const std::vector<std::string>& output_family();

}  // namespace trotline
