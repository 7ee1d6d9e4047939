#pragma once

#include <string_view>

namespace trotline {

/// The typeface of the figures, and the one that stands in where it is missing.
inline constexpr const char* kFigureFont = "Linux Biolinum O";

/// Height of a capital letter over the font size. Source: table OS/2 of the font.
inline constexpr double kCapHeight = 0.658;

/// Width that `text` fills when set in one line, over the font size. For printable ASCII and the digits
/// raised and lowered it is the sum of the font's own advance widths; other characters count 0.6, wide
/// ones 1. Source: table hmtx of Linux Biolinum O 5.3.0, Regular and Bold, units of 1/1000 em.
[[nodiscard]] double text_width_em(std::string_view text, bool bold = false);

/// Points to millimetres: 25.4 / 72.
inline constexpr double kMmPerPoint = 25.4 / 72.0;

}  // namespace trotline
