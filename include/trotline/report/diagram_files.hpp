#pragma once

#include <string>
#include <vector>

#include <trotline/report/diagram_layout.hpp>
#include <trotline/report/figure.hpp>

namespace trotline {

/// The data of a figure as tab-separated files, columns named in a comment at their head: diagram-points.tsv,
/// diagram-line.tsv, diagram-labels.tsv, diagram-text.tsv. Numbers with nine digits; texts in double quotes
/// with \ and " escaped, once as they are and once as drawable_text().
[[nodiscard]] std::vector<NamedBytes> diagram_data(const DiagramLayout& layout);

/// The script that draws the figure from these files: `gnuplot diagram.gp`, in their folder. It holds fixed
/// words and numbers of the layout, and no text of the result: two layouts that differ in texts alone have
/// the same script.
[[nodiscard]] std::string diagram_script(const DiagramLayout& layout,
                                         const std::vector<FigureFormat>& formats);

}  // namespace trotline
