#pragma once

#include <cstddef>
#include <string>
#include <vector>

#include <trotline/report/rounding.hpp>

namespace trotline {

/// One column of a table of characters.
struct TextColumn {
  std::string header;
  std::vector<std::string> cells;  ///< as many as every other column has; not padded
  bool right = true;               ///< numbers stand at the right, words at the left
};

/// The table in lines, header first, columns two spaces apart, at most `width` columns wide: the first column
/// is shortened to make the rest fit (down to 6), then whole lines are. No spaces at the ends of lines.
[[nodiscard]] std::vector<std::string> text_table(std::vector<TextColumn> columns, std::size_t width,
                                                  Glyphs glyphs = Glyphs::unicode);

/// A residual in units of its error as a bar of 11 characters with zero in the middle, a character to 1 sigma
/// in steps of half: "     │█▌   " is +1.5. Beyond 5 sigma the bar ends in an arrow. Empty for NaN.
[[nodiscard]] std::string residual_bar(double residual_sigma, Glyphs glyphs = Glyphs::unicode);

}  // namespace trotline
