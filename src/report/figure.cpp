#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <system_error>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/report/display_text.hpp>
#include <trotline/report/figure.hpp>
#include <trotline/report/process.hpp>
#include <trotline/report/text_measure.hpp>

namespace trotline {
namespace fs = std::filesystem;
namespace {

// The colours differ in lightness as well as in hue: ink (dark), line (middle), grey (light middle), band and
// sand (pale). They keep apart in greyscale and for eyes that take red for green.
constexpr const char* kColours = R"(ink = 0x16212B
line = 0x1B7F8F
band = 0xCDE5E7
sand = 0xF3EDDF
guide = 0xBCAF93
hair = 0xEDEAE3
grey = 0x8A9299
soft = 0x46525C
)";

constexpr double kPngDotsPerInch = 300.0;
constexpr double kSvgPixelsPerInch = 96.0;
constexpr double kMmPerInch = 25.4;

std::string figure_name(const FigureDrawing& drawing, FigureFormat format) {
  return drawing.stem + "." + name_of(format);
}

void replace_all(std::string& text, const std::string& from, const std::string& to) {
  for (std::size_t at = text.find(from); at != std::string::npos; at = text.find(from, at + to.size())) {
    text.replace(at, from.size(), to);
  }
}

/// Fonts that may stand in where the figures' own is missing, as style sheets name them. Inside tags only: in
/// a text `<` is written as an entity, so that the pattern with its quotes may stand there but not after
/// `<g`.
void finish_svg(std::string& svg, const char* title) {
  const std::string family = fmt::format("font-family=\"{}\"", kFigureFont);
  const std::string families = fmt::format(
      "font-family=\"{}, Linux Biolinum, Optima, Candara, DejaVu Sans, sans-serif\"", kFigureFont);
  for (std::size_t open = svg.find('<'); open != std::string::npos; open = svg.find('<', open + 1)) {
    const std::size_t close = svg.find('>', open);
    const std::size_t at = svg.find(family, open);
    if (at < close && close != std::string::npos) svg.replace(at, family.size(), families);
  }
  replace_all(svg, "]]>", "]]&gt;");  // XML forbids it in a text
  replace_all(svg, "<title>Gnuplot</title>", fmt::format("<title>{}</title>", title));
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

void finish(const fs::path& path, FigureFormat format, const char* title) {
  if (format == FigureFormat::png) return;
  std::string bytes = read_file(path.string());
  format == FigureFormat::svg ? finish_svg(bytes, title) : finish_pdf(bytes);
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

void run(const FigureDrawing& drawing, const fs::path& folder) {
  const ProcessOutcome outcome = run_process({drawing.program, "-d", drawing.script},
                                             {.folder = folder, .timeout_s = drawing.timeout_s});
  if (outcome.exit_code != 0) {
    throw SystemError(fmt::format("{}: the figure could not be drawn (exit code {}): {}", drawing.program,
                                  outcome.exit_code, message_of(outcome.output)));
  }
  for (const FigureFormat format : drawing.formats) {
    std::error_code error;
    const auto size = fs::file_size(folder / figure_name(drawing, format), error);
    if (error || size == 0) {
      const std::string said = message_of(outcome.output);
      throw SystemError(fmt::format("{}: {} was not drawn: {}", drawing.program, figure_name(drawing, format),
                                    said.empty() ? "it gave no reason; is the disk full?" : said));
    }
  }
}

}  // namespace

const char* name_of(FigureFormat format) {
  switch (format) {
    case FigureFormat::svg:
      return "svg";
    case FigureFormat::pdf:
      return "pdf";
    case FigureFormat::png:
      return "png";
  }
  return "unknown";
}

std::string figure_palette(const std::vector<FigureFormat>& formats) {
  std::string names;
  for (const FigureFormat format : formats)
    names += (names.empty() ? "" : " ") + std::string(name_of(format));
  return fmt::format("formats = \"{}\"\nface = \"{}\"\n{}", names, kFigureFont, kColours);
}

/// Sizes are set so that one unit of type is a point and one unit of line width is a point in each.
std::string figure_terminals(const FigureSize& size) {
  const double width_in = size.width_mm / kMmPerInch;
  const double height_in = size.height_mm / kMmPerInch;
  const auto pixels = [](double inches, double density) { return std::lround(inches * density); };
  std::string text;
  text += fmt::format(
      "  if (format eq \"svg\") {{\n"
      "    set terminal svg size {},{} fixed enhanced font face.\",8\" fontscale {:.5f} linewidth {:.5f} "
      "dashlength 2 "
      "background \"white\"\n  }}\n",
      pixels(width_in, kSvgPixelsPerInch), pixels(height_in, kSvgPixelsPerInch), kSvgPixelsPerInch / 72.0,
      kSvgPixelsPerInch / 72.0);
  text += fmt::format(
      "  if (format eq \"pdf\") {{\n"
      "    set terminal pdfcairo size {:.6f}in,{:.6f}in enhanced font face.\",8\" fontscale 0.75 linewidth "
      "2\n  }}\n",
      width_in, height_in);
  text += fmt::format(
      "  if (format eq \"png\") {{\n"
      "    set terminal pngcairo size {},{} enhanced font face.\",8\" fontscale {:.5f} linewidth {:.5f} "
      "pointscale {:.5f} background \"white\"\n  }}\n",
      pixels(width_in, kPngDotsPerInch), pixels(height_in, kPngDotsPerInch), kPngDotsPerInch / 96.0,
      kPngDotsPerInch / 72.0, kPngDotsPerInch / 72.0);
  return text;
}

std::string figure_text(const std::string& text) {
  std::string result = "\"";
  bool after_escape = false;
  for (const char c : text) {
    after_escape = c == '\\' || c == '"' || (after_escape && c >= '0' && c <= '7');
    result += after_escape ? fmt::format("\\{:03o}", static_cast<unsigned char>(c)) : std::string(1, c);
  }
  return result + "\"";
}

std::vector<std::string> draw_figure(const FigureDrawing& drawing, const fs::path& folder) {
  if (drawing.formats.empty()) return {};
  run(drawing, folder);
  std::vector<std::string> names;
  for (const FigureFormat format : drawing.formats) {
    names.push_back(figure_name(drawing, format));
    finish(folder / names.back(), format, drawing.title);
  }
  return names;
}

}  // namespace trotline
