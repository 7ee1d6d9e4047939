#pragma once

#include <optional>
#include <string>

#include <trotline/analysis/measure_description.hpp>
#include <trotline/analysis/run_options.hpp>

namespace trotline {

/// One analysis as a person describes it: which table, which species, with which options.
struct RunDescription {
  std::string table;    ///< path of the intensity table, or "-"; empty where lines are measured first
  std::string species;  ///< name, or path of a species file
  RunOptions options;
  std::optional<MeasureDescription> measure;  ///< spectra from which the table comes
};

/// Reads a run description: a YAML mapping with `table`, `species` and any of the run options.
///
///     species: CO
///     table: lines.csv          # relative to this file
///     source_size: 12 arcsec
///     without: [7-6, 8-7]
///
/// In place of `table` a mapping `measure` names spectra, whose lines are measured first:
///
///     measure:
///       spectra: [co-115.fits, {file: co-230.fits, beam: 11 arcsec}]
///       vlsr: 5.2 km/s
///       window: 7 km/s
///
/// @throws InputError with file, line and column: unknown key (with the nearest one), key given twice,
///         `table` (or `measure`) or `species` missing, a value that is wrong
[[nodiscard]] RunDescription read_run_description(const std::string& path);

/// The same from text. @param name  stands for the file in messages; `table` and a species path are taken
/// from its folder
[[nodiscard]] RunDescription parse_run_description(const std::string& text, const std::string& name);

}  // namespace trotline
