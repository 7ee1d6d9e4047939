#include <fmt/format.h>

#include <algorithm>
#include <cstdint>

#include <trotline/base/text.hpp>
#include <trotline/report/display_text.hpp>

namespace trotline {
namespace {

struct Range {
  char32_t first;
  char32_t last;
};

template <std::size_t size>
bool is_within(char32_t code, const Range (&ranges)[size]) {
  return std::any_of(std::begin(ranges), std::end(ranges),
                     [&](const Range& range) { return code >= range.first && code <= range.last; });
}

bool is_disruptive(char32_t code) {
  constexpr Range kReordering[] = {
      {0x200E, 0x200F}, {0x2028, 0x202E}, {0x2066, 0x2069}, {0xFDD0, 0xFDEF}, {0xFEFF, 0xFEFF}};
  return is_within(code, kReordering) || (code & 0xFFFE) == 0xFFFE;
}

std::size_t columns_of(char32_t code) {
  constexpr Range kNone[] = {{0x0300, 0x036F}, {0x0483, 0x0489}, {0x0591, 0x05BD},
                             {0x0610, 0x061A}, {0x064B, 0x065F}, {0x200B, 0x200D},
                             {0x20D0, 0x20F0}, {0xFE00, 0xFE0F}, {0xFE20, 0xFE2F}};
  constexpr Range kTwo[] = {{0x1100, 0x115F},  {0x2E80, 0x303E},   {0x3041, 0x4DBF},   {0x4E00, 0xA4CF},
                            {0xAC00, 0xD7A3},  {0xF900, 0xFAFF},   {0xFE30, 0xFE6F},   {0xFF00, 0xFF60},
                            {0xFFE0, 0xFFE6},  {0x1F300, 0x1F64F}, {0x1F680, 0x1F6FF}, {0x1F900, 0x1F9FF},
                            {0x20000, 0x3FFFD}};
  if (is_within(code, kNone)) return 0;
  return is_within(code, kTwo) ? 2 : 1;
}

/// Bytes of the character that starts `text`: as its lead byte says, where valid, else 1.
std::size_t length_of_first(std::string_view text) {
  const auto lead = static_cast<std::uint8_t>(text.front());
  const std::size_t length = lead < 0x80 ? 1 : lead >= 0xF0 ? 4 : lead >= 0xE0 ? 3 : lead >= 0xC0 ? 2 : 1;
  return length <= text.size() && is_utf8(text.substr(0, length)) ? length : 1;
}

}  // namespace

std::vector<std::string_view> characters_of(std::string_view text) {
  std::vector<std::string_view> characters;
  while (!text.empty()) {
    characters.push_back(text.substr(0, length_of_first(text)));
    text.remove_prefix(characters.back().size());
  }
  return characters;
}

char32_t code_point_of(std::string_view character) {
  if (!is_utf8(character) || character.empty()) return 0xFFFD;
  const auto byte = [&](std::size_t i) {
    return static_cast<char32_t>(static_cast<std::uint8_t>(character[i]));
  };
  if (character.size() == 1) return byte(0);
  char32_t code = byte(0) & (0x7FU >> character.size());
  for (std::size_t i = 1; i < character.size(); ++i) code = (code << 6) | (byte(i) & 0x3F);
  return code;
}

std::string display_text(std::string_view text) {
  const std::string safe = printable(text);
  std::string shown;
  for (const std::string_view character : characters_of(safe)) {
    shown += is_disruptive(code_point_of(character)) ? std::string_view(" ") : character;
  }
  return shown;
}

std::size_t display_width(std::string_view text) {
  std::size_t columns = 0;
  for (const std::string_view character : characters_of(text))
    columns += columns_of(code_point_of(character));
  return columns;
}

std::string shortened(std::string_view text, std::size_t width, bool ascii) {
  if (display_width(text) <= width) return std::string(text);
  if (width == 0) return {};
  std::string cut;
  std::size_t columns = 1;  // the ellipsis
  for (const std::string_view character : characters_of(text)) {
    columns += columns_of(code_point_of(character));
    if (columns > width) break;
    cut += character;
  }
  return cut + (ascii ? "~" : "…");
}

std::string padded_right(std::string_view text, std::size_t width) {
  const std::size_t columns = display_width(text);
  return std::string(text) + std::string(columns < width ? width - columns : 0, ' ');
}

std::string padded_left(std::string_view text, std::size_t width) {
  const std::size_t columns = display_width(text);
  return std::string(columns < width ? width - columns : 0, ' ') + std::string(text);
}

std::vector<std::string> wrapped(std::string_view text, std::size_t width) {
  width = std::max<std::size_t>(width, 2);  // room for a wide character
  std::vector<std::string> lines(1);
  std::size_t columns = 0;
  std::size_t last_space = std::string::npos;
  for (const std::string_view character : characters_of(text)) {
    const std::size_t more = columns_of(code_point_of(character));
    if (columns + more > width && character == " ") {  // the space ends the line and is dropped
      lines.emplace_back();
      columns = 0;
      last_space = std::string::npos;
      continue;
    }
    while (columns + more > width) {
      const std::string line = lines.back();
      const bool at_space = last_space != std::string::npos;
      lines.back() = at_space ? line.substr(0, last_space) : line;
      lines.push_back(at_space ? line.substr(last_space + 1) : std::string{});
      columns = display_width(lines.back());
      last_space = std::string::npos;
    }
    if (character == " ") last_space = lines.back().size();
    lines.back() += character;
    columns += more;
  }
  return lines;
}

std::string quiet_json(const std::string& json) {
  if (std::all_of(json.begin(), json.end(), [](char c) { return static_cast<unsigned char>(c) < 0x80; }))
    return json;
  std::string quiet;
  quiet.reserve(json.size());
  for (const std::string_view character : characters_of(json)) {
    const char32_t point = character.size() > 1 ? code_point_of(character) : U' ';
    const bool steers = (point >= 0x80 && point <= 0x9F) || (point >= 0x202A && point <= 0x202E) ||
                        (point >= 0x2066 && point <= 0x2069);
    quiet += steers ? fmt::format("\\u{:04x}", static_cast<unsigned>(point)) : std::string(character);
  }
  return quiet;
}

}  // namespace trotline
