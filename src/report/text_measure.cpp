#include <array>
#include <string>

#include <trotline/report/display_text.hpp>
#include <trotline/report/text_measure.hpp>

#include "generated/font_widths.hpp"

namespace trotline {
namespace {

using Widths = std::array<int, 95>;  // U+0020 to U+007E

constexpr double kRaisedOrLowered = 0.34;  // the widest of them but U+00B9 and U+2081, which are 0.384
constexpr double kOther = 0.6;

bool is_raised_or_lowered(char32_t code) {
  return code == 0xB2 || code == 0xB3 || code == 0xB9 || (code >= 0x2070 && code <= 0x209C);
}

double width_of(std::string_view character, const Widths& widths) {
  const char32_t code = code_point_of(character);
  if (code >= 0x20 && code <= 0x7E) return widths[code - 0x20] / 1000.0;
  if (is_raised_or_lowered(code)) return kRaisedOrLowered;
  const std::size_t columns = display_width(character);
  return columns == 0 ? 0.0 : columns == 2 ? 1.0 : kOther;
}

}  // namespace

double text_width_em(std::string_view text, bool bold) {
  double width = 0.0;
  for (const std::string_view character : characters_of(text))
    width += width_of(character, bold ? kBoldWidths : kRegularWidths);
  return width;
}

}  // namespace trotline
