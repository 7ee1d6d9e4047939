#include <algorithm>
#include <charconv>
#include <cstdint>
#include <vector>

#include <trotline/base/errors.hpp>
#include <trotline/report/display_text.hpp>
#include <trotline/report/font_coverage.hpp>
#include <trotline/report/process.hpp>

namespace trotline {
namespace {

struct Range {
  char32_t first;
  char32_t last;
};

/// In the figures' typeface and in DejaVu Sans, both of which the figures ask for.
bool is_common(char32_t code) {
  constexpr Range kCommon[] = {{0x20, 0x7E},     {0xA0, 0x17F},    {0x391, 0x3A1},   {0x3A3, 0x3C9},
                               {0x410, 0x44F},   {0x2013, 0x2014}, {0x2018, 0x2019}, {0x201C, 0x201D},
                               {0x2026, 0x2026}, {0x2070, 0x2070}, {0x2074, 0x2079}, {0x207A, 0x207B},
                               {0x2080, 0x2089}, {0x2212, 0x2212}};
  return std::any_of(std::begin(kCommon), std::end(kCommon),
                     [&](const Range& range) { return code >= range.first && code <= range.last; });
}

/// Reads one range of fontconfig's notation, "3b1-3c9" or "2212", in hexadecimal.
bool read_range(std::string_view text, Range& range) {
  const auto read = [](std::string_view digits, char32_t& code) {
    std::uint32_t number = 0;
    const auto [end, error] = std::from_chars(digits.data(), digits.data() + digits.size(), number, 16);
    code = number;
    return error == std::errc{} && end == digits.data() + digits.size();
  };
  const std::size_t dash = text.find('-');
  if (!read(text.substr(0, dash), range.first)) return false;
  range.last = range.first;
  return dash == std::string_view::npos || read(text.substr(dash + 1), range.last);
}

std::vector<Range> read_ranges(std::string_view text) {
  std::vector<Range> ranges;
  while (!text.empty()) {
    const std::size_t end = std::min(text.find_first_of(" \n"), text.size());
    Range range{};
    if (end > 0 && read_range(text.substr(0, end), range)) ranges.push_back(range);
    text.remove_prefix(std::min(end + 1, text.size()));
  }
  return ranges;
}

/// Nothing when the fonts cannot be asked: then only common characters count as covered.
std::vector<Range> installed_ranges() {
  try {
    const ProcessOutcome fonts = run_process({"fc-list", "--format", "%{charset}\n"}, {.timeout_s = 20.0});
    return fonts.exit_code == 0 ? read_ranges(fonts.output) : std::vector<Range>{};
  } catch (const SystemError&) {
    return {};
  }
}

bool is_installed(char32_t code) {
  static const std::vector<Range> kInstalled = installed_ranges();
  return std::any_of(kInstalled.begin(), kInstalled.end(),
                     [&](const Range& range) { return code >= range.first && code <= range.last; });
}

}  // namespace

std::string drawable_text(std::string_view text) {
  const std::string safe = display_text(text);
  std::string drawable;
  for (const std::string_view character : characters_of(safe)) {
    const char32_t code = code_point_of(character);
    if (is_common(code) || is_installed(code)) {
      drawable += character;
    } else if (display_width(character) > 0) {
      drawable += "□";
    }
  }
  return drawable;
}

}  // namespace trotline
