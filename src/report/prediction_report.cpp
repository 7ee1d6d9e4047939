#include <trotline/report/prediction_report.hpp>

#include <fmt/format.h>

#include <nlohmann/json.hpp>

#include <cmath>

#include <trotline/base/version.hpp>
#include <trotline/report/display_text.hpp>
#include <trotline/report/rounding.hpp>
#include <trotline/report/text_table.hpp>
#include <trotline/report/text_tables.hpp>
#include <trotline/report/typeset.hpp>

namespace trotline {
namespace {

using Json = nlohmann::ordered_json;

constexpr std::size_t kMostRows = 60;

Glyphs glyphs_of(const TerminalOptions& options) { return options.unicode ? Glyphs::unicode : Glyphs::ascii; }

/// Three digits, fewer where they cost room: "0.0412", "12.3", "4510", "5e-04".
std::string three_digits(double value, Glyphs glyphs) {
  if (!std::isfinite(value)) return glyphs == Glyphs::ascii ? "-" : "–";
  const double size = std::abs(value);
  if (size > 0.0 && (size < 1e-3 || size >= 1e5)) return fmt::format("{:.0e}", value);
  const int decimals = size >= 100.0 || size == 0.0 ? 0 : size >= 10.0 ? 1 : size >= 1.0 ? 2 : size >= 0.1 ? 3 : 4;
  return fixed_decimals(value, decimals, glyphs);
}

/// The lines that are printed: the first by frequency, but chosen ones always.
std::vector<const PredictedLine*> printed_lines(const Prediction& prediction) {
  std::vector<const PredictedLine*> lines;
  for (const PredictedLine& line : prediction.lines) {
    if (lines.size() < kMostRows || line.chosen) lines.push_back(&line);
  }
  return lines;
}

std::string label_of(const PredictedLine& line, const TerminalOptions& options) {
  const std::string label = options.unicode ? typeset_transition(line.transition) : line.transition;
  return line.blended_with.empty() ? label : fmt::format("{} +{}", label, line.blended_with.size());
}

std::vector<std::string> line_table(const Prediction& prediction, const TerminalOptions& options) {
  const Glyphs glyphs = glyphs_of(options);
  const auto lines = printed_lines(prediction);
  std::vector<TextColumn> columns;
  const auto add = [&](const char* header, auto cell_of, bool right = true) {
    TextColumn column{header, {}, right};
    for (const PredictedLine* line : lines) column.cells.push_back(cell_of(*line));
    columns.push_back(std::move(column));
  };
  const auto number = [&](double PredictedLine::*member) {
    return [=](const PredictedLine& line) { return three_digits(line.*member, glyphs); };
  };
  const bool knows_time = !lines.empty() && std::isfinite(lines.front()->time_s);
  add("line", [&](const PredictedLine& line) { return label_of(line, options); }, false);
  add("GHz", [](const PredictedLine& line) { return fmt::format("{:.3f}", line.frequency_mhz / 1e3); });
  add(options.unicode ? "Eᵤ/k K" : "Eu/k K", number(&PredictedLine::upper_energy_k));
  add("fill", number(&PredictedLine::filling));
  add(options.unicode ? "τ" : "tau", number(&PredictedLine::optical_depth));
  add("peak K", number(&PredictedLine::peak_k));
  add("W K km/s", number(&PredictedLine::intensity_k_km_s));
  if (prediction.has_noise) add("S/N", number(&PredictedLine::snr));
  if (knows_time) add("time", [](const PredictedLine& line) { return observing_time_text(line.time_s); });
  if (prediction.choose > 0) {
    add("", [&](const PredictedLine& line) { return std::string(line.chosen ? "chosen" : ""); }, false);
  }
  return text_table(std::move(columns), options.width, glyphs);
}

std::string answer_text(const ExpectedAnswer& answer, Glyphs glyphs) {
  const char* plus_minus = glyphs == Glyphs::ascii ? "+/-" : "±";
  if (!std::isfinite(answer.temperature_error_k)) return "no temperature";
  return fmt::format("T {} {} K, lg N {} {}", plus_minus, significant(answer.temperature_error_k, 2, glyphs), plus_minus,
                     significant(answer.log10_column_error, 2, glyphs));
}

std::string choice_text(const Prediction& prediction, const TerminalOptions& options) {
  const Glyphs glyphs = glyphs_of(options);
  const bool column = prediction.aim == Aim::column;
  std::string text = fmt::format("\nExpected standard errors ({} aimed at)\n", column ? "N" : "T");
  TextColumn count{"lines", {}, true}, best{"best", {}, false}, bright{"brightest", {}, false};
  for (const ChoiceSize& size : prediction.sizes) {
    count.cells.push_back(fmt::format("{}{}", size.count, size.count == prediction.choose ? "*" : ""));
    best.cells.push_back(answer_text(size.best, glyphs) + (size.is_exhaustive ? "" : " (by exchange)"));
    bright.cells.push_back(answer_text(size.brightest, glyphs));
  }
  count.cells.push_back("all");
  best.cells.push_back(answer_text(prediction.all_lines, glyphs));
  bright.cells.emplace_back("");
  for (const std::string& line : text_table({count, best, bright}, options.width, glyphs)) text += line + "\n";
  return text;
}

std::string head_text(const Prediction& prediction, const TerminalOptions& options) {
  const Glyphs glyphs = glyphs_of(options);
  std::string text = fmt::format(
      "{}   T = {} K, N = {} cm-2, Q = {}\n",
      options.unicode ? typeset_formula(prediction.formula) : prediction.formula,
      significant(prediction.temperature_k, 4, glyphs), significant(prediction.column_density_per_cm2, 4, glyphs),
      significant(prediction.partition_function, 4, glyphs));
  std::string set;
  for (const auto& [key, value] : prediction.options) {
    const bool said = key == "temperature" || key == "column_density" || value == "not given";
    if (!said) set += fmt::format("{}{} {}", set.empty() ? "" : ", ", key, value);
  }
  for (const std::string& line : wrapped(display_text(set), options.width)) text += line + "\n";
  return text + "A model: one layer in LTE, Gaussian lines; the lines are these only if the source is so.\n\n";
}

Json number_or_null(double value) { return std::isfinite(value) ? Json(value) : Json(nullptr); }

Json answer_json(const ExpectedAnswer& answer) {
  return {{"temperature_error_k", number_or_null(answer.temperature_error_k)},
          {"log10_column_density_error", number_or_null(answer.log10_column_error)}};
}

Json line_json(const PredictedLine& line) {
  return {{"transition", line.transition},
          {"blended_with", line.blended_with},
          {"frequency_mhz", line.frequency_mhz},
          {"upper_energy_k", line.upper_energy_k},
          {"upper_degeneracy", line.upper_degeneracy},
          {"einstein_a_s1", line.einstein_a_s1},
          {"beam_fwhm_arcsec", number_or_null(line.beam_fwhm_arcsec)},
          {"filling", line.filling},
          {"optical_depth", line.optical_depth},
          {"peak_k", line.peak_k},
          {"intensity_k_km_s", line.intensity_k_km_s},
          {"intensity_error_k_km_s", number_or_null(line.intensity_error_k_km_s)},
          {"snr", number_or_null(line.snr)},
          {"rms_k", number_or_null(line.rms_k)},
          {"time_s", number_or_null(line.time_s)},
          {"d_intensity_d_lnN", line.by_ln_column},
          {"d_intensity_d_lnT", line.by_ln_temperature},
          {"chosen", line.chosen},
          {"among_brightest", line.among_brightest}};
}

std::vector<TableColumn> ecsv_columns() {
  return {{"transition", CellType::text, "", "the strongest line of the measurement"},
          {"blended_with", CellType::text, "", "lines that cannot be told apart from it"},
          {"frequency", CellType::number, "MHz", "rest frequency"},
          {"upper_energy", CellType::number, "K", "E_u/k"},
          {"upper_degeneracy", CellType::number, "", "g_u"},
          {"einstein_a", CellType::number, "s-1", "A_ul"},
          {"beam_fwhm", CellType::number, "arcsec", "FWHM of the beam"},
          {"filling", CellType::number, "", "beam filling factor"},
          {"optical_depth", CellType::number, "", "at line centre"},
          {"peak", CellType::number, "K", "main-beam temperature at line centre"},
          {"intensity", CellType::number, "K km s-1", "predicted integrated intensity"},
          {"intensity_error", CellType::number, "K km s-1", "standard error from noise"},
          {"snr", CellType::number, "", "intensity over its error"},
          {"rms", CellType::number, "K", "noise of a channel"},
          {"time", CellType::number, "s", "time on source"},
          {"chosen", CellType::flag, "", "among the lines chosen"}};
}

std::vector<Cell> ecsv_cells(const PredictedLine& line) {
  return {line.transition,       fmt::format("{}", fmt::join(line.blended_with, "; ")),
          line.frequency_mhz,    line.upper_energy_k,
          line.upper_degeneracy, line.einstein_a_s1,
          line.beam_fwhm_arcsec, line.filling,
          line.optical_depth,    line.peak_k,
          line.intensity_k_km_s, line.intensity_error_k_km_s,
          line.snr,              line.rms_k,
          line.time_s,           line.chosen};
}

}  // namespace

std::string observing_time_text(double seconds) {
  if (!std::isfinite(seconds)) return "–";
  if (seconds < 0.095) return "<0.1 s";
  if (seconds < 9.95) return fmt::format("{:.1f} s", seconds);
  if (seconds < 120.0) return fmt::format("{:.0f} s", seconds);
  if (seconds < 7200.0) return fmt::format("{:.0f} min", seconds / 60.0);
  if (seconds < 3.6e4) return fmt::format("{:.1f} h", seconds / 3600.0);
  if (seconds < 3.6e7) return fmt::format("{:.0f} h", seconds / 3600.0);
  return fmt::format("{:.1e} h", seconds / 3600.0);
}

std::string prediction_text(const Prediction& prediction, const TerminalOptions& options) {
  std::string text = head_text(prediction, options);
  for (const std::string& line : line_table(prediction, options)) text += line + "\n";
  const std::size_t printed = printed_lines(prediction).size();
  if (printed < prediction.lines.size()) {
    text += fmt::format("and {} more; --json and --out have all\n", prediction.lines.size() - printed);
  }
  if (prediction.lines_below > 0) {
    text += fmt::format("{} fainter ones are left out\n", prediction.lines_below);
  }
  if (!prediction.sizes.empty()) text += choice_text(prediction, options);
  for (const std::string& warning : prediction.warnings) {
    for (const std::string& line : wrapped("note: " + display_text(warning), options.width)) text += line + "\n";
  }
  return text;
}

std::string prediction_json(const Prediction& prediction) {
  Json lines = Json::array();
  for (const PredictedLine& line : prediction.lines) lines.push_back(line_json(line));
  Json sizes = Json::array();
  for (const ChoiceSize& size : prediction.sizes) {
    sizes.push_back({{"lines", size.count},
                     {"best", answer_json(size.best)},
                     {"brightest", answer_json(size.brightest)},
                     {"every_set_tried", size.is_exhaustive}});
  }
  Json options = Json::object();
  for (const auto& [key, value] : prediction.options) options[key] = value;
  const Json document = {{"schema", "trotline-prediction-1"},
                         {"species", prediction.species},
                         {"temperature_k", prediction.temperature_k},
                         {"column_density_cm2", prediction.column_density_per_cm2},
                         {"partition_function", prediction.partition_function},
                         {"aim", prediction.aim == Aim::column ? "column" : "temperature"},
                         {"lines", lines},
                         {"lines_below", prediction.lines_below},
                         {"expected_with_all_lines", answer_json(prediction.all_lines)},
                         {"expected_by_number_of_lines", sizes},
                         {"warnings", prediction.warnings},
                         {"provenance",
                          {{"version", version()},
                           {"species_file", prediction.species_file},
                           {"data_sources", prediction.data_sources},
                           {"options", options}}}};
  return quiet_json(document.dump(2, ' ', false, Json::error_handler_t::replace)) + "\n";
}

void write_prediction_ecsv(const Prediction& prediction, const std::filesystem::path& path) {
  TableMeta meta = {{"species", prediction.species}, {"made_by", fmt::format("trotline {}", version())}};
  for (const auto& option : prediction.options) meta.push_back(option);
  const auto writer = ecsv_writer(path, ecsv_columns(), meta);
  for (const PredictedLine& line : prediction.lines) writer->add(ecsv_cells(line));
  writer->finish();
}

}  // namespace trotline
