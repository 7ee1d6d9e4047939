#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include <trotline/base/files.hpp>
#include <trotline/report/display_text.hpp>
#include <trotline/report/figure.hpp>
#include <trotline/report/font_coverage.hpp>
#include <trotline/report/survey_figures.hpp>

namespace trotline {
namespace {

constexpr FigureSize kSize = {130.0, 96.0};
constexpr std::size_t kMostNames = 8;  // colours and shapes that can be told apart
constexpr double kFirstName = 0.9;     // height of the first name, of the page
constexpr double kNameStep = 0.055;
constexpr double kNameLeft = 0.82;

// Lightness falls from one to the next, so that they keep apart in greyscale; shapes differ too.
const char* const kOpening = R"(set encoding utf8
set datafile separator "\t"
rust = 0xA03A17
array hue[8] = [0x1B7F8F, 0x16212B, 0xC98A2B, 0x7A9A4B, 0xA03A17, 0x6B4C8A, 0x8A9299, 0x3F6FB0]
array shape[8] = [7, 5, 9, 13, 11, 15, 6, 4]
do for [format in formats] {
  reset
  unset key
)";

std::string frame(const char* x_name, const char* y_name) {
  return fmt::format(
      "  set border 3 linewidth 0.6 linecolor rgb soft back\n"
      "  set grid linetype 1 linewidth 0.4 linecolor rgb hair back\n"
      "  set xtics nomirror out scale 0.55 textcolor rgb soft\n"
      "  set ytics nomirror out scale 0.55 textcolor rgb soft\n"
      "  set xlabel \"{}\" textcolor rgb ink enhanced\n"
      "  set ylabel \"{}\" textcolor rgb ink enhanced\n"
      "  set lmargin 10\n  set rmargin 3\n  set tmargin 3\n  set bmargin 4\n",
      x_name, y_name);
}

std::size_t names_drawn(const SurveyFigureInput& input) { return std::min(input.texts.size(), kMostNames); }

/// Every so many points are drawn.
std::size_t step_of(const SurveyFigureInput& input) { return 1 + input.rows / kMostPoints; }

/// Room for the names at the right of the panel.
std::string legend_room(const SurveyFigureInput& input) {
  return input.texts.empty() ? "" : "  set rmargin 20\n";
}

/// The panel, and over it a page of its own with marks and names; the names come from the data file.
std::string with_names(const SurveyFigureInput& input, const std::string& plot) {
  const std::string name = name_of(input.figure);
  std::string text = fmt::format("  set output \"{}.\".format\n  set multiplot\n  plot {}\n", name, plot);
  if (!input.texts.empty()) {
    text +=
        "  set lmargin at screen 0\n  set rmargin at screen 1\n  set bmargin at screen 0\n  set tmargin at "
        "screen 1\n"
        "  unset border\n  unset grid\n  unset tics\n  unset xlabel\n  unset ylabel\n  unset logscale\n"
        "  set xrange [0:1]\n  set yrange [0:1]\n  plot ";
    for (std::size_t i = 1; i <= names_drawn(input); ++i) {
      text += fmt::format(
          "\"{0}-text.tsv\" using ($1=={1}?{2}:NaN):({3}-{4}*($1-1)) with points pointtype shape[{1}] "
          "pointsize 0.6 "
          "linecolor rgb hue[{1}] notitle, \\\n    ",
          name, i, kNameLeft - 0.015, kFirstName, kNameStep);
    }
    text += fmt::format(
        "\"{}-text.tsv\" using ($1<={}?{}:NaN):({}-{}*($1-1)):3 with labels left noenhanced textcolor rgb "
        "ink notitle\n",
        name, kMostNames, kNameLeft, kFirstName, kNameStep);
  }
  return text + "  unset multiplot\n  unset output\n}\n";
}

std::string temperature_column(const SurveyFigureInput& input) {
  std::string plot;
  for (std::size_t i = 1; i <= names_drawn(input); ++i) {
    plot += fmt::format(
        "{0}\"temperature-column.tsv\" every {2} using ($1=={1}?$4:NaN):2:5:3 with xyerrorbars pointtype "
        "shape[{1}] "
        "pointsize 0.45 linewidth 0.5 linecolor rgb hue[{1}] notitle",
        i > 1 ? ", \\\n    " : "", i, step_of(input));
  }
  return frame("log_{10} {/:Italic N} (cm^{-2})", "{/:Italic T} (K)") + "  set logscale y\n" +
         legend_room(input) + with_names(input, plot);
}

std::string temperature_histogram() {
  return frame("{/:Italic T} (K)", "jobs") +
         "  set yrange [0:*]\n  set style fill solid 1.0 border rgb 0xFFFFFF\n"
         "  set output \"temperature-histogram.\".format\n"
         "  plot \"temperature-histogram.tsv\" using (0.5*($1+$2)):3:(0.94*($2-$1)) with boxes fillcolor rgb "
         "line notitle\n"
         "  unset output\n}\n";
}

std::string species_pairs(const SurveyFigureInput& input) {
  std::string points;
  for (std::size_t i = 1; i <= names_drawn(input); ++i) {
    points += fmt::format(
        "{2}\"species-pairs.tsv\" every {1} using ($1=={0}?$2:NaN):4:3:5 with xyerrorbars pointtype "
        "shape[{0}] "
        "pointsize 0.45 linewidth 0.5 linecolor rgb hue[{0}] notitle",
        i, step_of(input), i > 1 ? ", \\\n    " : "");
  }
  const std::string diagonal = "x with lines linewidth 0.8 dashtype 2 linecolor rgb guide notitle";
  return frame("log_{10} {/:Italic N} of the first (cm^{-2})",
               "log_{10} {/:Italic N} of the second (cm^{-2})") +
         legend_room(input) +
         // Only the data set the range of the dashed line.
         "  stats \"species-pairs.tsv\" using 2:4 nooutput\n"
         "  low = floor(10*(STATS_min_x < STATS_min_y ? STATS_min_x : STATS_min_y))/10.0 - 0.1\n"
         "  high = ceil(10*(STATS_max_x > STATS_max_y ? STATS_max_x : STATS_max_y))/10.0 + 0.1\n"
         "  set xrange [low:high]\n  set yrange [low:high]\n" +
         with_names(input, diagonal + ", \\\n    " + points);
}

std::string line_residuals(const SurveyFigureInput& input) {
  const std::string plot =
      "\"line-residuals.tsv\" using 1:2:4 with yerrorbars pointtype 0 linewidth 2.2 linecolor rgb band "
      "notitle, \\\n"
      "    0 with lines linewidth 1.0 linecolor rgb line notitle, \\\n"
      "    \"line-residuals.tsv\" using ($6==0?$1:NaN):2:3 with yerrorbars pointtype 7 pointsize 0.5 "
      "linewidth 0.7 "
      "linecolor rgb ink notitle, \\\n"
      "    \"line-residuals.tsv\" using ($6==1?$1:NaN):2:3 with yerrorbars pointtype 7 pointsize 0.6 "
      "linewidth 0.9 "
      "linecolor rgb rust notitle";
  const std::string names = input.texts.empty()
                                ? ""
                                : ", \\\n    \"line-residuals-text.tsv\" using 4:5:3 with labels left offset "
                                  "0.6,0.4 noenhanced textcolor rgb rust notitle";
  return frame("frequency (GHz)", "mean of (observed - model)/error") +
         "  set output \"line-residuals.\".format\n  plot " + plot + names + "\n  unset output\n}\n";
}

std::string verdicts(const SurveyFigureInput& input) {
  return fmt::format(
      "{}  unset ytics\n  set border 1 linewidth 0.6 linecolor rgb soft back\n  set lmargin 3\n  set xrange "
      "[0:*]\n"
      "  set yrange [{}:0.3]\n  set style fill solid 1.0 noborder\n"
      "  set output \"verdicts.\".format\n"
      "  plot \"verdicts.tsv\" using (0.5*$2):($1):(0.5*$2):(0.16) with boxxyerror fillcolor rgb line "
      "notitle, \\\n"
      "    \"\" using 2:1:2 with labels left offset 0.6,0 textcolor rgb ink notitle, \\\n"
      "    \"verdicts-text.tsv\" using (0):($1-0.38):3 with labels left offset 0.1,0 noenhanced textcolor "
      "rgb ink notitle\n"
      "  unset output\n}}\n",
      frame("jobs", ""), static_cast<double>(input.texts.size()) + 0.5);
}

std::string body(const SurveyFigureInput& input) {
  switch (input.figure) {
    case SurveyFigure::temperature_column:
      return temperature_column(input);
    case SurveyFigure::temperature_histogram:
      return temperature_histogram();
    case SurveyFigure::species_pairs:
      return species_pairs(input);
    case SurveyFigure::line_residuals:
      return line_residuals(input);
    case SurveyFigure::verdicts:
      break;
  }
  return verdicts(input);
}

}  // namespace

const char* name_of(SurveyFigure figure) {
  switch (figure) {
    case SurveyFigure::temperature_column:
      return "temperature-column";
    case SurveyFigure::temperature_histogram:
      return "temperature-histogram";
    case SurveyFigure::species_pairs:
      return "species-pairs";
    case SurveyFigure::line_residuals:
      return "line-residuals";
    case SurveyFigure::verdicts:
      break;
  }
  return "verdicts";
}

const char* caption_of(SurveyFigure figure) {
  switch (figure) {
    case SurveyFigure::temperature_column:
      return "Temperature against column density, with standard errors.";
    case SurveyFigure::temperature_histogram:
      return "How many jobs of all species have which temperature; the last bar holds all hotter ones too. "
             "Stated "
             "temperatures are left out.";
    case SurveyFigure::species_pairs:
      return "Column densities of two species in the same source; the dashed line marks equal ones.";
    case SurveyFigure::line_residuals:
      return "Mean residual of every line over all sources: a line far from zero (rust) has a wrong rest "
             "frequency, a "
             "miscalibrated band or a blend. Thin bars are errors of the mean, pale ones the scatter.";
    case SurveyFigure::verdicts:
      break;
  }
  return "Does one temperature describe the lines?";
}

std::string figure_texts(const std::vector<FigureText>& texts, std::size_t most_columns) {
  std::string bytes = "# number\ttext\ttext for which there are fonts\tx\ty\n";
  for (std::size_t i = 0; i < texts.size(); ++i) {
    const std::string text = shortened(display_text(texts[i].text), most_columns);
    bytes += fmt::format("{}\t{}\t{}\t{:.9g}\t{:.9g}\n", i + 1, figure_text(text),
                         figure_text(drawable_text(text)), texts[i].x, texts[i].y);
  }
  return bytes;
}

void draw_survey_figure(const SurveyFigureInput& input, const std::filesystem::path& folder) {
  const std::string name = name_of(input.figure);
  const std::vector<FigureFormat> formats = {FigureFormat::svg, FigureFormat::pdf};
  write_file(folder / (name + ".gp"), fmt::format("# To draw it again: gnuplot {}.gp\n", name) +
                                          figure_palette(formats) + kOpening + figure_terminals(kSize) +
                                          body(input));
  draw_figure({.script = name + ".gp",
               .stem = name,
               .title = caption_of(input.figure),
               .formats = formats,
               .timeout_s = 120.0},
              folder);
}

}  // namespace trotline
