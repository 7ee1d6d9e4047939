#pragma once

#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

namespace trotline {

/// What stands in the intensity column of a line list.
enum class LineListIntensity {
  integrated_300k,  ///< log10 of the integrated intensity at 300 K [nm2 MHz]: the format as published
  einstein_a        ///< log10 of A_ul [1/s]: what some services print in its place
};

/// One row of an 80-column line list, as printed; quantum numbers decoded.
/// Format: Pickett et al. 1998, JQSRT 60, 883, section 5 and the catalogue documentation.
struct LineListRow {
  double frequency_mhz = 0.0;        ///< negative frequencies do not occur; in MHz also where err < 0 says cm-1
  double frequency_sigma_mhz = 0.0;
  double log10_intensity = 0.0;      ///< see LineListIntensity
  double lower_energy_per_cm = 0.0;  ///< E_l [1/cm]
  std::int32_t upper_degeneracy = 0; ///< g_u; letters decoded (A00 = 1000)
  std::int32_t tag = 0;              ///< species tag; negative in the file for a measured frequency
  std::int16_t quantum_format = 0;
  std::int8_t degrees_of_freedom = 0;  ///< 0 atom, 2 linear, 3 nonlinear
  bool measured = false;               ///< tag was negative: the frequency was measured
  std::int8_t quanta = 0;              ///< how many quantum numbers each state has
  std::int16_t upper[6] = {};
  std::int16_t lower[6] = {};
};

/// A whole line list, column by column decoded. Rows that are printed twice are both there; merging is the
/// species' business, since it depends on what the doubling means.
struct LineList {
  std::vector<LineListRow> rows;
  std::vector<std::string> warnings;  ///< e.g. rows shorter than 80 columns, tags that differ
};

/// Decodes line-list text by column only (fields run together in places).
///
/// Lines of 79 columns (quantum numbers short of trailing blanks) and longer than 80 (further quantum
/// numbers or comments) are understood; blank lines are passed over.
/// @param name  stands for the file in messages
/// @throws InputError with line and column of the first field that cannot be read
[[nodiscard]] LineList parse_line_list(std::string_view text, const std::string& name);

/// Decodes a two-character quantum number: "12", " 7", "-3", "A4" = 104, "a4" = -14 ...
/// @return false when the characters are none
[[nodiscard]] bool decode_quantum_number(char tens, char units, std::int16_t& value);

}  // namespace trotline
