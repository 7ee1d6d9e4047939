#pragma once

#include <cstddef>
#include <filesystem>
#include <string>
#include <vector>

namespace trotline {

/// The figures over all sources of a survey.
enum class SurveyFigure {
  temperature_column,     ///< T against log N
  temperature_histogram,  ///< how often each T
  species_pairs,          ///< log N of one species against another, source by source
  line_residuals,         ///< mean residual of every line over all sources, by frequency
  verdicts                ///< does one temperature describe the lines?
};

/// File names begin so: "temperature-column" ...
[[nodiscard]] const char* name_of(SurveyFigure figure);

/// What the figure shows, one sentence.
[[nodiscard]] const char* caption_of(SurveyFigure figure);

/// The data file of a figure, in the folder where it is drawn. Tab-separated; the first line is a comment
/// that names the columns:
///
///     temperature-column.tsv     species (number), T [K], error, log10 N, error
///     temperature-histogram.tsv  lower and upper edge of a bin [K], jobs
///     species-pairs.tsv          pair (number), log10 N of the first, error, of the second, error
///     line-residuals.tsv         frequency [GHz], mean residual, its error, scatter, lines, kind (0 plain, 1
///     off) verdicts.tsv               row, jobs
///
/// Texts stand in NAME-text.tsv, which figure_texts() makes.
struct SurveyFigureInput {
  SurveyFigure figure = SurveyFigure::temperature_column;
  std::size_t rows = 0;            ///< of the data; beyond kMostPoints every second, third ... is drawn
  std::vector<std::string> texts;  ///< names of species, pairs, verdicts or lines that are off, by number
};

/// Names of a figure as its data file has them: number from 1, text, the text that fonts can show, and where
/// it stands (for the lines that are off: frequency and mean residual). Quotes and backslashes are escaped.
struct FigureText {
  std::string text;
  double x = 0.0;
  double y = 0.0;
};
[[nodiscard]] std::string figure_texts(const std::vector<FigureText>& texts, std::size_t most_columns);

inline constexpr std::size_t kMostPoints = 6000;

/// Draws a figure from its data: NAME.svg and NAME.pdf, with NAME.gp beside them. No text reaches the script.
/// @throws SystemError when the drawing program is missing or fails
void draw_survey_figure(const SurveyFigureInput& input, const std::filesystem::path& folder);

}  // namespace trotline
