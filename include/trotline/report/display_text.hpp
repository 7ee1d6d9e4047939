#pragma once

#include <cstddef>
#include <string>
#include <string_view>
#include <vector>

namespace trotline {

/// `text` as one line that is safe to show: what printable() makes of it, without the characters that
/// reorder the text around them (U+202A-E, U+2066-9, U+200E-F), split lines (U+2028-9) or that XML and YAML
/// forbid (U+FFFE, U+FFFF and their like); each of these becomes a space.
[[nodiscard]] std::string display_text(std::string_view text);

/// Columns that `text` fills on a terminal: 2 for East Asian wide characters and emoji, 0 for combining
/// marks and joiners, 1 for the rest. Bytes that are no UTF-8 count 1 each.
/// Reference: the wide ranges follow Unicode Standard Annex 11, by block; from memory.
[[nodiscard]] std::size_t display_width(std::string_view text);

/// `text` cut at a whole character to at most `width` columns, the last of them an ellipsis when something
/// was cut ("…", or "~" where `ascii`).
[[nodiscard]] std::string shortened(std::string_view text, std::size_t width, bool ascii = false);

/// `text` padded with spaces to `width` columns, at its right or left side.
[[nodiscard]] std::string padded_right(std::string_view text, std::size_t width);
[[nodiscard]] std::string padded_left(std::string_view text, std::size_t width);

/// `text` in lines of at most `width` columns, split at spaces; a longer word is cut. Never empty.
[[nodiscard]] std::vector<std::string> wrapped(std::string_view text, std::size_t width);

/// The characters of a UTF-8 text one by one, as bytes; a byte that is no UTF-8 stands alone.
[[nodiscard]] std::vector<std::string_view> characters_of(std::string_view text);

/// The code point of one character from characters_of(); U+FFFD for a byte that is no UTF-8.
[[nodiscard]] char32_t code_point_of(std::string_view character);

/// JSON with the characters that steer a terminal (U+0080-9F) or reorder text (U+202A-E, U+2066-9) as escapes;
/// it reads back as the same document.
[[nodiscard]] std::string quiet_json(const std::string& json);

}  // namespace trotline
