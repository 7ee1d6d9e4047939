#include <trotline/base/files.hpp>
#include <trotline/report/diagram.hpp>

namespace trotline {
namespace fs = std::filesystem;
namespace {

constexpr const char* kScriptName = "diagram.gp";

}  // namespace

std::vector<std::string> write_diagram(const Result& result, const fs::path& folder,
                                       const DiagramOptions& options) {
  const DiagramLayout layout = lay_out_diagram(result, options.size);
  std::vector<std::string> names;
  for (const NamedBytes& file : diagram_data(layout)) {
    write_file(folder / file.name, file.bytes);
    names.push_back(file.name);
  }
  write_file(folder / kScriptName, diagram_script(layout, options.formats));
  names.emplace_back(kScriptName);
  const auto figures = draw_figure(
      {kScriptName, "diagram", "Rotation diagram", options.formats, options.timeout_s, options.program},
      folder);
  names.insert(names.end(), figures.begin(), figures.end());
  return names;
}

}  // namespace trotline
