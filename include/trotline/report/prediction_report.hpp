#pragma once

#include <filesystem>
#include <string>
#include <vector>

#include <trotline/analysis/prediction.hpp>
#include <trotline/report/terminal.hpp>

namespace trotline {

/// A prediction as a page for a terminal: the lines with opacity, intensity, S/N and time, the chosen ones
/// marked; then what T and N will be known to, for every number of lines.
[[nodiscard]] std::string prediction_text(const Prediction& prediction, const TerminalOptions& options = {});

/// The same as one JSON document ending in '\n'; docs/predict.md describes its keys. What is not known or
/// infinite is null.
[[nodiscard]] std::string prediction_json(const Prediction& prediction);

/// Writes the lines as ECSV into a file that must not exist yet. @throws SystemError
void write_prediction_ecsv(const Prediction& prediction, const std::filesystem::path& path);

/// Draws prediction.svg, .pdf and .png in `folder`, with the data (prediction-*.tsv) and the script beside
/// them: the lines over frequency, and the expected error of the aim against the number of lines.
/// @throws SystemError when a file cannot be written, or the drawing program is missing or fails
void draw_prediction(const Prediction& prediction, const std::filesystem::path& folder);

/// "45 s", "12 min", "3.4 h", "120 h".
[[nodiscard]] std::string observing_time_text(double seconds);

}  // namespace trotline
