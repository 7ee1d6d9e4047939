#include <fmt/format.h>

#include <array>
#include <string>

#include <trotline/report/display_text.hpp>
#include <trotline/report/text_tables.hpp>

namespace trotline {
namespace {

/// Lower-case Greek from U+03B1; an empty name is written with the Latin letter of the same shape.
constexpr std::array<const char*, 25> kGreek = {
    "alpha", "beta",   "gamma",   "delta",  "varepsilon", "zeta", "eta",  "theta", "iota",
    "kappa", "lambda", "mu",      "nu",     "xi",         "",     "pi",   "rho",   "varsigma",
    "sigma", "tau",    "upsilon", "varphi", "chi",        "psi",  "omega"};

std::string special(char c) {
  switch (c) {
    case '\\':
      return "\\textbackslash{}";
    case '~':
      return "\\textasciitilde{}";
    case '^':
      return "\\textasciicircum{}";
    case '<':
      return "\\textless{}";
    case '>':
      return "\\textgreater{}";
    case '|':
      return "\\textbar{}";
    case '`':
      return "\\textasciigrave{}";
    case '"':
      return "\\textquotedblright{}";
    case '-':
      return "{-}";  // two of them would become a dash
    case '#':
    case '$':
    case '%':
    case '&':
    case '_':
    case '{':
    case '}':
      return std::string("\\") + c;
    default:
      return std::string(1, c);
  }
}

/// Latin letters with accents that LaTeX builds from its standard fonts; not eth and thorn, which they lack.
bool is_plain_accent(char32_t point) {
  return point >= 0xC0 && point <= 0xFF && point != 0xD0 && point != 0xDE && point != 0xF0 && point != 0xFE &&
         point != 0xD7 && point != 0xF7;
}

}  // namespace

std::string latex_text(std::string_view raw) {
  std::string latex;
  const std::string text = display_text(raw);
  for (const std::string_view character : characters_of(text)) {
    const char32_t point = code_point_of(character);
    if (point < 0x7F)
      latex += special(static_cast<char>(point));
    else if (is_plain_accent(point))
      latex += character;
    else if (point >= 0x3B1 && point <= 0x3C9 && point != 0x3BF)
      latex += fmt::format("$\\{}$", kGreek.at(point - 0x3B1));
    else
      latex += fmt::format("[U+{:04X}]", static_cast<std::uint32_t>(point));
  }
  return latex;
}

std::string latex_number(const std::string& ascii) {
  std::string latex = ascii;
  const auto replace = [&](const std::string& from, const std::string& to) {
    for (std::size_t at = 0; (at = latex.find(from, at)) != std::string::npos; at += to.size())
      latex.replace(at, from.size(), to);
  };
  replace("+/-", "\\pm");
  replace(" x 10^", " \\times 10^{");
  const std::size_t power = latex.find("10^{");
  if (power != std::string::npos) latex += "}";
  return "$" + latex + "$";
}

}  // namespace trotline
