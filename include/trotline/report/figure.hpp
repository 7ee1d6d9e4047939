#pragma once

#include <filesystem>
#include <string>
#include <vector>

namespace trotline {

enum class FigureFormat { svg, pdf, png };

/// "svg", "pdf", "png".
[[nodiscard]] const char* name_of(FigureFormat format);

/// Size of the figure [mm]. The default is one column of a journal.
struct FigureSize {
  double width_mm = 88.0;
  double height_mm = 92.0;
};

/// A file by its plain name.
struct NamedBytes {
  std::string name;
  std::string bytes;
};

/// What draws a figure, and what becomes of it.
struct FigureDrawing {
  std::string script;            ///< file name of the script, inside the folder
  std::string stem;              ///< the figures are stem.svg, stem.pdf, stem.png
  const char* title = "Figure";  ///< of the SVG document, for readers that speak; XML text
  std::vector<FigureFormat> formats = {};
  double timeout_s = 60.0;          ///< for drawing all formats
  std::string program = "gnuplot";  ///< looked up in PATH
};

/// The start of every script: the list `formats`, the typeface and the colours. They differ in lightness as
/// well as in hue: ink (dark), line (middle), grey (light middle), band and sand (pale), and keep apart in
/// greyscale and for eyes that take red for green.
[[nodiscard]] std::string figure_palette(const std::vector<FigureFormat>& formats);

/// The terminal of each format, inside a loop over `format`. One unit of type is a point and one unit of line
/// width is a point in each.
[[nodiscard]] std::string figure_terminals(const FigureSize& size);

/// A text in double quotes as the drawing program reads it back from a data file. It looks for quotes before it
/// undoes escapes, so a quote must not stand there as such, not even behind a backslash: both are written as
/// octal escapes, and so is a digit that follows one, which would be taken for a part of it.
[[nodiscard]] std::string figure_text(const std::string& text);

/// Runs the script in its folder, once for all formats, and finishes the figures: fonts that may stand in,
/// fixed dates, so that the same script gives the same bytes on the same machine.
/// @return the names of the figures
/// @throws SystemError with the message of the drawing program when it fails, is missing or does not end
std::vector<std::string> draw_figure(const FigureDrawing& drawing, const std::filesystem::path& folder);

}  // namespace trotline
