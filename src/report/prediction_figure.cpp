#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/report/display_text.hpp>
#include <trotline/report/figure.hpp>
#include <trotline/report/prediction_report.hpp>
#include <trotline/report/survey_figures.hpp>
#include <trotline/report/typeset.hpp>

namespace trotline {
namespace {

constexpr std::size_t kMostLabels = 10;
constexpr std::size_t kLabelColumns = 24;

constexpr double kWidthMm = 164.0;
constexpr double kHeightOfOneMm = 77.0;
constexpr double kHeightOfTwoMm = 138.0;

const char* const kOpening = R"(umber = 0x7D6B3F
set encoding utf8
set datafile separator "\t"
do for [format in formats] {
  reset
  unset key
)";

const char* const kOpenPage = R"(  set output "prediction.".format
  set multiplot
  set border 3 linewidth 0.6 linecolor rgb soft back
  set grid ytics linetype 1 linewidth 0.4 linecolor rgb hair back
  set xtics nomirror out scale 0.55 textcolor rgb soft
  set ytics nomirror out scale 0.55 textcolor rgb soft
  set lmargin at screen 0.11
  set rmargin at screen 0.97
)";

/// The chosen lines, or the brightest ones where none are chosen, get a name.
std::vector<const PredictedLine*> named_lines(const Prediction& prediction) {
  std::vector<const PredictedLine*> lines;
  for (const PredictedLine& line : prediction.lines) {
    if (prediction.choose == 0 || line.chosen) lines.push_back(&line);
  }
  std::stable_sort(lines.begin(), lines.end(),
                   [](const PredictedLine* a, const PredictedLine* b) { return a->peak_k > b->peak_k; });
  if (lines.size() > kMostLabels) lines.resize(kMostLabels);
  return lines;
}

std::string lines_data(const Prediction& prediction) {
  std::string text = "# frequency [GHz]\tpeak [K]\trms [K]\tW [K km/s]\tchosen\n";
  for (const PredictedLine& line : prediction.lines) {
    text += fmt::format("{:.9g}\t{:.6g}\t{:.6g}\t{:.6g}\t{}\n", line.frequency_mhz / 1e3, line.peak_k,
                        line.rms_k, line.intensity_k_km_s, line.chosen ? 1 : 0);
  }
  return text;
}

/// The highest peak so near a line that its name would be written across it.
double peak_around(const Prediction& prediction, const PredictedLine& line) {
  const double near_mhz =
      0.012 * (prediction.lines.back().frequency_mhz - prediction.lines.front().frequency_mhz);
  double peak = line.peak_k;
  for (const PredictedLine& other : prediction.lines) {
    if (std::abs(other.frequency_mhz - line.frequency_mhz) <= near_mhz) peak = std::max(peak, other.peak_k);
  }
  return peak;
}

/// Names of neighbours are moved until they stand side by side: to the right, and back from the axis's end.
std::string labels_data(const Prediction& prediction) {
  constexpr double kBeside = 0.024;  // of the axis: the height of a letter
  auto lines = named_lines(prediction);
  std::sort(lines.begin(), lines.end(), [](const PredictedLine* a, const PredictedLine* b) {
    return a->frequency_mhz < b->frequency_mhz;
  });
  const double step_ghz =
      kBeside * (prediction.lines.back().frequency_mhz - prediction.lines.front().frequency_mhz) / 1e3;
  std::vector<FigureText> texts;
  for (const PredictedLine* line : lines) {
    double x_ghz = line->frequency_mhz / 1e3;
    if (!texts.empty()) x_ghz = std::max(x_ghz, texts.back().x + step_ghz);
    texts.push_back({typeset_transition(line->transition), x_ghz, peak_around(prediction, *line)});
  }
  double most_ghz =
      prediction.lines.back().frequency_mhz / 1e3 + step_ghz;  // inside of the axis's own margin
  for (auto text = texts.rbegin(); text != texts.rend(); ++text) {
    text->x = std::min(text->x, most_ghz);
    most_ghz = text->x - step_ghz;
  }
  return figure_texts(texts, kLabelColumns);
}

double error_of(const ExpectedAnswer& answer, Aim aim) {
  return aim == Aim::column ? answer.log10_column_error : answer.temperature_error_k;
}

std::string sizes_data(const Prediction& prediction) {
  std::string text = "# lines\terror with the best set\terror with the brightest\tasked for\n";
  for (const ChoiceSize& size : prediction.sizes) {
    text += fmt::format("{}\t{:.6g}\t{:.6g}\t{}\n", size.count, error_of(size.best, prediction.aim),
                        error_of(size.brightest, prediction.aim), size.count == prediction.choose ? 1 : 0);
  }
  return text;
}

/// Ends of the frequency axis with some room, and of the peaks (a decade below the faintest, at most six
/// down).
std::string lines_panel(const Prediction& prediction, bool alone) {
  double low = INFINITY, high = 0.0, most = 0.0, least = INFINITY;
  for (const PredictedLine& line : prediction.lines) {
    low = std::min(low, line.frequency_mhz / 1e3);
    high = std::max(high, line.frequency_mhz / 1e3);
    if (!(line.peak_k > 0.0)) continue;
    most = std::max(most, line.peak_k);
    least = std::min(least, std::isfinite(line.rms_k) ? std::min(line.rms_k, line.peak_k) : line.peak_k);
  }
  const double room = std::max(0.04 * (high - low), 0.01 * high);
  const double floor_k = std::max(least / 2.0, most * 1e-6);
  std::string text = fmt::format(
      "  set bmargin at screen {}\n  set tmargin at screen {}\n"
      "  set xlabel \"frequency (GHz)\" offset 0,0.3 textcolor rgb ink\n"
      "  set ylabel \"peak {{/:Italic T}}_{{mb}} (K)\" textcolor rgb ink\n"
      "  set logscale y\n  set xrange [{:.9g}:{:.9g}]\n  set yrange [{:.4g}:{:.4g}]\n",
      alone ? 0.16 : 0.56, 0.95, low - room, high + room, floor_k, most * 4.0);
  if (prediction.has_noise) {
    text += "  set label 3 \"crosses: rms of a channel\" at graph 0.01,0.96 left textcolor rgb umber\n";
  }
  text += fmt::format(
      "  plot \"prediction-lines.tsv\" using ($5==0?$1:NaN):2:(0):({0:.4g}-$2) with vectors nohead linewidth "
      "1.1 "
      "linecolor rgb grey notitle, \\\n"
      "    \"\" using ($5==1?$1:NaN):2:(0):({0:.4g}-$2) with vectors nohead linewidth 2.2 linecolor rgb line "
      "notitle, \\\n"
      "    \"\" using ($5==1?$1:NaN):2 with points pointtype 7 pointsize 0.45 linecolor rgb line notitle, "
      "\\\n"
      "    \"\" using 1:3 with points pointtype 2 pointsize 0.3 linewidth 0.8 linecolor rgb guide notitle, "
      "\\\n"
      "    \"prediction-text.tsv\" using 4:5:3 with labels left rotate by 60 offset 0.1,0.5 noenhanced font "
      "face.\",7\" textcolor rgb ink notitle\n",
      floor_k);
  return text;
}

std::string sizes_panel(const Prediction& prediction) {
  return fmt::format(
      "  unset logscale\n  unset label 3\n  set bmargin at screen 0.10\n  set tmargin at screen 0.42\n"
      "  set xlabel \"number of lines\" offset 0,0.3 textcolor rgb ink\n"
      "  set ylabel \"expected error of {}\" textcolor rgb ink\n"
      "  set xrange [1.7:{}]\n  set yrange [0:*]\n  set xtics 1\n"
      "  set label 1 \"as many of the brightest\" at graph 0.985,0.93 right textcolor rgb umber\n"
      "  set label 2 \"the best set\" at graph 0.985,0.80 right textcolor rgb line\n"
      "  plot \"prediction-sizes.tsv\" using 1:3 with linespoints pointtype 6 pointsize 0.5 linewidth 1.0 "
      "dashtype 2 "
      "linecolor rgb guide notitle, \\\n"
      "    \"\" using 1:2 with linespoints pointtype 7 pointsize 0.5 linewidth 1.4 linecolor rgb line "
      "notitle, \\\n"
      "    \"\" using ($4==1?$1:NaN):2 with points pointtype 6 pointsize 1.3 linewidth 1.0 linecolor rgb ink "
      "notitle\n",
      prediction.aim == Aim::column ? "log_{10} {/:Italic N}" : "{/:Italic T} (K)",
      static_cast<double>(prediction.sizes.back().count) + 0.3);
}

bool has_sizes(const Prediction& prediction) {
  return std::any_of(prediction.sizes.begin(), prediction.sizes.end(), [&](const ChoiceSize& size) {
    return std::isfinite(error_of(size.best, prediction.aim));
  });
}

}  // namespace

void draw_prediction(const Prediction& prediction, const std::filesystem::path& folder) {
  const bool visible = std::any_of(prediction.lines.begin(), prediction.lines.end(),
                                   [](const PredictedLine& line) { return line.peak_k > 0.0; });
  if (!visible) throw SystemError("the prediction has no line in emission to draw");
  const bool two = has_sizes(prediction);
  const std::vector<FigureFormat> formats = {FigureFormat::svg, FigureFormat::pdf, FigureFormat::png};
  const FigureSize size = {kWidthMm, two ? kHeightOfTwoMm : kHeightOfOneMm};
  const std::string script = "# Predicted lines. To draw them again: gnuplot prediction.gp\n" +
                             figure_palette(formats) + kOpening + figure_terminals(size) + kOpenPage +
                             lines_panel(prediction, !two) + (two ? sizes_panel(prediction) : "") +
                             "  unset multiplot\n  unset output\n}\n";
  write_file(folder / "prediction-lines.tsv", lines_data(prediction));
  write_file(folder / "prediction-text.tsv", labels_data(prediction));
  if (two) write_file(folder / "prediction-sizes.tsv", sizes_data(prediction));
  write_file(folder / "prediction.gp", script);
  draw_figure({.script = "prediction.gp",
               .stem = "prediction",
               .title = "Predicted lines",
               .formats = formats,
               .timeout_s = 120.0},
              folder);
}

}  // namespace trotline
