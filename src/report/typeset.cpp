#include <algorithm>
#include <array>
#include <string>

#include <trotline/report/typeset.hpp>

namespace trotline {
namespace {

bool is_digit(char c) { return c >= '0' && c <= '9'; }
bool is_upper(char c) { return c >= 'A' && c <= 'Z'; }
bool is_lower(char c) { return c >= 'a' && c <= 'z'; }
bool is_ascii(std::string_view text) {
  return std::all_of(text.begin(), text.end(), [](char c) { return c > 0x1F && c < 0x7F; });
}

std::string raised(std::string_view digits) {
  static const char* const kRaised[] = {"⁰", "¹", "²", "³", "⁴", "⁵", "⁶", "⁷", "⁸", "⁹"};
  std::string text;
  for (const char digit : digits) text += kRaised[digit - '0'];
  return text;
}

std::string lowered(std::string_view digits) {
  static const char* const kLowered[] = {"₀", "₁", "₂", "₃", "₄", "₅", "₆", "₇", "₈", "₉"};
  std::string text;
  for (const char digit : digits) text += kLowered[digit - '0'];
  return text;
}

/// Stable isotopes whose mass number may follow another element in a formula, as in C18O.
/// Source: common knowledge of the elements, from memory.
bool is_isotope(std::string_view digits, std::string_view rest) {
  constexpr std::array<std::string_view, 15> kIsotopes = {"12C", "13C", "14N",  "15N",  "16O",
                                                          "17O", "18O", "28Si", "29Si", "30Si",
                                                          "32S", "33S", "34S",  "35Cl", "37Cl"};
  const std::size_t letters = rest.size() > 1 && is_lower(rest[1]) ? 2 : 1;
  const std::string name = std::string(digits) + std::string(rest.substr(0, letters));
  return std::find(kIsotopes.begin(), kIsotopes.end(), name) != kIsotopes.end();
}

std::string typeset_word(std::string_view word) {
  std::string text;
  for (std::size_t i = 0; i < word.size();) {
    if (is_digit(word[i])) {
      std::size_t end = i;
      while (end < word.size() && is_digit(word[end])) ++end;
      const std::string_view digits = word.substr(i, end - i);
      const char before = i > 0 ? word[i - 1] : ' ';
      const bool is_count = is_upper(before) || is_lower(before) || before == ')';
      text += is_count && !is_isotope(digits, word.substr(end)) ? lowered(digits) : raised(digits);
      i = end;
      continue;
    }
    const bool ends = i > 0 && i + 1 == word.size();
    text += ends && word[i] == '+' ? "⁺" : ends && word[i] == '-' ? "⁻" : std::string(1, word[i]);
    ++i;
  }
  return text;
}

}  // namespace

std::string typeset_formula(std::string_view formula) {
  const std::string_view word = formula.substr(0, formula.find_first_of(" ,;"));
  if (!is_ascii(word) || std::none_of(word.begin(), word.end(), is_upper)) return std::string(formula);
  return typeset_word(word) + std::string(formula.substr(word.size()));
}

std::string typeset_transition(std::string_view label) {
  std::string text;
  for (std::size_t i = 0; i < label.size(); ++i) {
    if (label[i] != '-') {
      text += label[i];
      continue;
    }
    const char before = i > 0 ? label[i - 1] : ' ';
    const char after = i + 1 < label.size() ? label[i + 1] : ' ';
    const bool joins =
        is_digit(before) || is_upper(before) || is_lower(before) || before == ')' || before == '+';
    text += joins && after != ' ' ? "–" : is_digit(after) ? "−" : "-";
  }
  return text;
}

}  // namespace trotline
