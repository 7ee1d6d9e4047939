#include <trotline/report/corner_figure.hpp>
#include <trotline/report/ecsv.hpp>
#include <trotline/report/json.hpp>
#include <trotline/report/terminal.hpp>
#include <trotline/report/write_outputs.hpp>

namespace trotline {

void write_outputs(const Result& result, OutputFolder& folder, const OutputOptions& options) {
  folder.write("result.json", result_json(result));
  folder.write("lines.ecsv", lines_ecsv(result));
  if (!result.posterior.draws.empty()) folder.write("samples.ecsv", samples_ecsv(result));
  folder.write("report.txt", terminal_report(result, {.width = options.report_width}));
  if (options.formats.empty()) return;
  DiagramOptions diagram;
  diagram.formats = options.formats;
  diagram.size = options.figure_size;
  write_diagram(result, folder.staging(), diagram);
  write_corner(result, folder.staging(), options.formats);
}

const std::vector<std::string>& output_family() {
  static const std::vector<std::string> kNames = {
      "result.json", "lines.ecsv", "report.txt", "diagram.svg", "diagram.pdf", "diagram.png", "diagram.gp",
      "diagram-points.tsv", "diagram-line.tsv", "diagram-labels.tsv", "diagram-text.tsv", "samples.ecsv",
      "corner.svg", "corner.pdf", "corner.png", "corner.gp", "corner-histograms.tsv", "corner-cells.tsv",
      "corner-contours.tsv", "corner-text.tsv"};
  return kNames;
}

}  // namespace trotline
