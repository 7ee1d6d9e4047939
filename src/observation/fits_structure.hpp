// The skeleton of a FITS file, checked before any library walks over it: where each header and its data lie.
#pragma once

#include <cstddef>
#include <string>
#include <string_view>
#include <vector>

namespace trotline {

/// One header-and-data unit.
struct FitsUnit {
  std::string_view header;     ///< its cards, END included
  std::size_t data_start = 0;  ///< byte of the file
  std::size_t data_bytes = 0;  ///< without padding
};

/// Checks that every unit has the mandatory keywords of the FITS standard (version 4.0, sections 4.4.1 and 7)
/// in their places, with values that make sense, and data that lie inside of the file.
///
/// Bytes behind the last unit are not looked at. Padding may be missing at the end of the file.
/// @throws InputError naming the unit and the keyword
[[nodiscard]] std::vector<FitsUnit> fits_structure(std::string_view bytes, const std::string& name);

inline constexpr std::size_t kFitsBlock = 2880;  ///< FITS files come in blocks of this many bytes
inline constexpr std::size_t kFitsCard = 80;     ///< and their headers in cards of this many

}  // namespace trotline
