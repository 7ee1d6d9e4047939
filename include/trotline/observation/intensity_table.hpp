#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

#include <trotline/base/errors.hpp>

namespace trotline {

/// The scale on which intensities are given.
enum class IntensityScale {
  main_beam,     ///< T_mb [K km/s]
  antenna,       ///< T_A*, corrected for the atmosphere and rear losses [K km/s]
  flux_per_beam  ///< velocity-integrated flux density per beam [Jy/beam km/s]
};

/// One row: one measured line, or one member of a blend.
struct IntensityRow {
  std::size_t line_number = 0;  ///< line of the text, or row of the binary table, from 1
  std::optional<std::string> transition;
  std::optional<double> frequency_hz;
  double intensity = 0.0;        ///< in K km/s, or Jy/beam km/s where scale is flux_per_beam; may be negative
  double intensity_sigma = 0.0;  ///< its standard error without calibration, same unit, > 0
                                 ///< (NaN only for a limit that gives none)
  IntensityScale scale = IntensityScale::main_beam;
  bool is_limit = false;  ///< intensity is an upper limit, not a measurement
  std::optional<std::string> source;
  std::optional<std::string> species;
  std::optional<double> beam_fwhm_rad;  ///< geometric mean for an elliptical beam
  std::optional<double> fwhm_km_s;      ///< line width
  std::optional<std::string> calibration_group;
  std::optional<double> calibration_error;  ///< fraction, 0.1 for 10 %
  std::optional<double> forward_efficiency;
  std::optional<double> main_beam_efficiency;
  std::optional<std::string> blend;
  std::optional<std::string> note;
};

struct IntensityTable {
  std::string file;
  std::vector<IntensityRow> rows;
  std::vector<std::string> warnings;  ///< e.g. columns that were not understood and passed over
  /// How it was made, as names and texts: written along, not read back.
  std::vector<std::pair<std::string, std::string>> provenance = {};
};

enum class TableFormat { automatic, ecsv, csv, text, fits };

/// Reads a table of integrated intensities; docs/tables.md describes the formats and columns.
///
/// Every dimensional column needs a unit: in ECSV and FITS as those formats have it; in CSV and text as
/// `name [unit]` in the header line. Intensities may be in any unit of temperature times velocity, or of
/// Jy/beam times velocity.
/// @param path    a file, or "-" for standard input
/// @param format  automatic: FITS by its first bytes, ECSV by its first line, CSV where the header line
///                holds a comma, white-space text otherwise
/// @throws InputError with file and line: unknown format, missing or double columns, no unit, a cell that
///         is no number, an error that is not positive, neither transition nor frequency, no row at all
[[nodiscard]] IntensityTable read_intensity_table(const std::string& path,
                                                  TableFormat format = TableFormat::automatic);

/// The same from bytes in memory. @param name  stands for the file in messages
[[nodiscard]] IntensityTable parse_intensity_table(std::string_view bytes, const std::string& name,
                                                   TableFormat format = TableFormat::automatic);

/// The table as ECSV text (version 1.0 of that format), with a unit for every column, in a form that
/// parse_intensity_table reads back to the same bits. Columns that no row fills are left out.
[[nodiscard]] std::string to_ecsv(const IntensityTable& table);

/// The same as the bytes of a FITS file with one binary table, the provenance as HISTORY. Numbers are 64-bit
/// and read back to the same bits; of texts FITS keeps printable ASCII, other characters become '?'.
[[nodiscard]] std::string to_fits(const IntensityTable& table);

}  // namespace trotline
