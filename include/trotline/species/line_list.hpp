#pragma once

#include <array>
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
///
/// - columns 1-13 (F13.4): frequency [MHz]; [1/cm] where the uncertainty is negative
/// - 14-21 (F8.4): its uncertainty, in the same unit
/// - 22-29 (F8.4): log10 of intensity, see LineListIntensity
/// - 30-31 (I2): rotational degrees of freedom
/// - 32-41 (F10.4): energy of the lower state [1/cm]
/// - 42-44 (I3): degeneracy of the upper state; 1000 and more with a letter in front, A00 = 1000, B00 = 1100
/// - 45-51 (I7): tag of the species; negative where the frequency was measured
/// - 52-55 (I4): format of the quantum numbers: 100 Q + 10 H + n
/// - 56-67 (6I2): quantum numbers of the upper state; n up to 6
/// - 68-79 (6I2): those of the lower state; where n > 6 they follow the upper state's n directly
///
/// Reference: Pickett et al. 1998, JQSRT 60, 883, section 5, and the documentation of the published
/// catalogues in that format. The rule of the negative uncertainty is cited from memory; a row to which it
/// applies and whose frequency would then be above 1e5 cm-1 is refused.
struct LineListRow {
  static constexpr std::size_t kMostQuanta = 9;

  double frequency_mhz = 0.0;         ///< > 0; in MHz also where the file has 1/cm
  double frequency_sigma_mhz = 0.0;   ///< >= 0
  double log10_intensity = 0.0;       ///< see LineListIntensity
  double lower_energy_per_cm = 0.0;   ///< E_l [1/cm]; may be a rounding below 0
  std::int32_t upper_degeneracy = 0;  ///< g_u, > 0
  std::int32_t tag = 0;               ///< > 0
  std::int16_t quantum_format = 0;
  std::int8_t degrees_of_freedom = 0;  ///< 0 atom, 2 linear, 3 nonlinear
  bool measured = false;               ///< tag was negative: the frequency was measured
  std::int8_t quanta = 0;              ///< how many quantum numbers each state has: n of the format
  std::array<std::int16_t, kMostQuanta> upper = {};
  std::array<std::int16_t, kMostQuanta> lower = {};

  /// Whether quantum number `index` stands for a half-integer and is printed rounded up (3/2 as 2), by the
  /// three bits H of the format, which count from the last number to the left. Some lists leave H at 0.
  [[nodiscard]] bool is_half_integer(int index) const {
    const int from_last = quanta - 1 - index;
    return from_last >= 0 && from_last < 4 && ((quantum_format / 10 % 10) >> from_last & 1) != 0;
  }

  friend bool operator==(const LineListRow&, const LineListRow&) = default;
};

/// A whole line list, column by column decoded. Rows that are printed twice are both there; merging is the
/// species' business, since it depends on what the doubling means.
struct LineList {
  std::vector<LineListRow> rows;
  std::vector<std::uint32_t> line_numbers;  ///< of each row in the text, from 1
  std::vector<std::string> warnings;        ///< e.g. frequencies given in 1/cm, tags that differ
};

/// Decodes line-list text by column only (fields run together in places).
///
/// Rows may be short of trailing blanks or longer than 80 columns (more quantum numbers, comments); both
/// kinds of line end are understood; blank lines are passed over.
/// @param name  stands for the file in messages
/// @throws InputError with line and column of the first field that cannot be read, and if there is no row
/// Speed: above 200 MB/s on one core of 2.3 GHz (tests/benchmark/line_list_benchmark.cpp).
[[nodiscard]] LineList parse_line_list(std::string_view text, const std::string& name);

/// Decodes a two-character quantum number: "12", " 7", "-3"; a capital stands for ten times 10 to 35
/// ("A4" = 104, "Z9" = 359), a small letter for the same below zero ("a4" = -14, "b0" = -20).
/// @return false when the characters are none
[[nodiscard]] bool decode_quantum_number(char tens, char units, std::int16_t& value);

}  // namespace trotline
