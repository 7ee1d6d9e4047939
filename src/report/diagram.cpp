#include <fmt/format.h>

#include <algorithm>
#include <cctype>
#include <system_error>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/report/diagram.hpp>
#include <trotline/report/display_text.hpp>
#include <trotline/report/process.hpp>
#include <trotline/report/text_measure.hpp>

namespace trotline {
namespace fs = std::filesystem;
namespace {

constexpr const char* kScriptName = "diagram.gp";

std::string figure_name(FigureFormat format) { return std::string("diagram.") + name_of(format); }

void replace_all(std::string& text, const std::string& from, const std::string& to) {
  for (std::size_t at = text.find(from); at != std::string::npos; at = text.find(from, at + to.size())) {
    text.replace(at, from.size(), to);
  }
}

/// Fonts that may stand in where the figures' own is missing, as style sheets name them. Inside tags only: in
/// a text `<` is written as an entity, so that the pattern with its quotes may stand there but not after
/// `<g`.
void finish_svg(std::string& svg) {
  const std::string family = fmt::format("font-family=\"{}\"", kFigureFont);
  const std::string families = fmt::format(
      "font-family=\"{}, Linux Biolinum, Optima, Candara, DejaVu Sans, sans-serif\"", kFigureFont);
  for (std::size_t open = svg.find('<'); open != std::string::npos; open = svg.find('<', open + 1)) {
    const std::size_t close = svg.find('>', open);
    const std::size_t at = svg.find(family, open);
    if (at < close && close != std::string::npos) svg.replace(at, family.size(), families);
  }
  replace_all(svg, "]]>", "]]&gt;");  // XML forbids it in a text
  replace_all(svg, "<title>Gnuplot</title>", "<title>Rotation diagram</title>");
  const std::size_t root = svg.find("<svg ");  // spaces between roman and italic type are part of the text
  if (root != std::string::npos) svg.insert(root + 5, "xml:space=\"preserve\" ");
}

/// Sets the date of creation, which is the time of drawing, to a fixed one of the same length.
void finish_pdf(std::string& pdf) {
  const std::string key = "/CreationDate (D:";
  const std::string date = "20000101000000";
  for (std::size_t at = pdf.find(key); at != std::string::npos; at = pdf.find(key, at + 1)) {
    const std::size_t start = at + key.size();
    if (start + date.size() > pdf.size()) return;
    const auto digit = [](char c) { return c >= '0' && c <= '9'; };
    const auto first = pdf.begin() + static_cast<std::ptrdiff_t>(start);
    if (std::all_of(first, first + static_cast<std::ptrdiff_t>(date.size()), digit)) {
      pdf.replace(start, date.size(), date);
    }
  }
}

void finish(const fs::path& path, FigureFormat format) {
  if (format == FigureFormat::png) return;
  std::string bytes = read_file(path.string());
  format == FigureFormat::svg ? finish_svg(bytes) : finish_pdf(bytes);
  write_file(path, bytes);
}

/// The end of what the program said, where the error stands, on one line.
std::string message_of(const std::string& output) {
  constexpr std::size_t kMost = 600;
  const std::string end = output.size() > kMost ? output.substr(output.size() - kMost) : output;
  std::string message;
  for (const char c : display_text(end)) {
    if (c != ' ' || (!message.empty() && message.back() != ' ')) message += c;
  }
  return message;
}

void draw(const fs::path& folder, const DiagramOptions& options) {
  const ProcessOutcome outcome =
      run_process({options.program, "-d", kScriptName}, {.folder = folder, .timeout_s = options.timeout_s});
  if (outcome.exit_code != 0) {
    throw SystemError(fmt::format("{}: the figure could not be drawn (exit code {}): {}", options.program,
                                  outcome.exit_code, message_of(outcome.output)));
  }
  for (const FigureFormat format : options.formats) {
    std::error_code error;
    const auto size = fs::file_size(folder / figure_name(format), error);
    if (error || size == 0) {
      const std::string said = message_of(outcome.output);
      throw SystemError(fmt::format("{}: {} was not drawn: {}", options.program, figure_name(format),
                                    said.empty() ? "it gave no reason; is the disk full?" : said));
    }
  }
}

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
  if (options.formats.empty()) return names;
  draw(folder, options);
  for (const FigureFormat format : options.formats) {
    finish(folder / figure_name(format), format);
    names.push_back(figure_name(format));
  }
  return names;
}

}  // namespace trotline
