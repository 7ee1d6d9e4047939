#include "header_cards.hpp"

#include <trotline/base/text.hpp>

#include "fits_structure.hpp"

namespace trotline {
namespace {

/// A string value after its opening quotation mark: two marks stand for one, blanks at the end do not count.
std::string unquoted(std::string_view value) {
  std::string text;
  for (std::size_t i = 1; i < value.size(); ++i) {
    if (value[i] == '\'') {
      if (i + 1 >= value.size() || value[i + 1] != '\'') break;
      ++i;
    }
    text += value[i];
  }
  while (!text.empty() && text.back() == ' ') text.pop_back();
  return text;
}

/// FITS allows a D for the exponent.
std::optional<double> number_in(std::string text) {
  for (char& c : text) {
    if (c == 'D' || c == 'd') c = 'e';
  }
  return parse_number(text);
}

std::string make_card(const std::string& keyword, const std::string& value) {
  std::string line = fmt::format("{:<8}= {}", keyword, value);
  line.resize(kFitsCard, ' ');
  return line;
}

}  // namespace

std::string_view HeaderCards::card(std::string_view keyword) const {
  for (std::size_t at = 0; at + kFitsCard <= cards_.size(); at += kFitsCard) {
    const std::string_view line = cards_.substr(at, kFitsCard);
    if (line.starts_with(keyword) && line[8] == '=' && trimmed(line.substr(0, 8)) == keyword) return line;
  }
  return {};
}

std::optional<std::string> HeaderCards::text(std::string_view keyword) const {
  const std::string_view line = card(keyword);
  if (line.empty()) return std::nullopt;
  const std::string_view value = trimmed(line.substr(9));
  std::string found =
      value.starts_with('\'') ? unquoted(value) : std::string(trimmed(value.substr(0, value.find('/'))));
  if (found.empty()) return std::nullopt;
  return found;
}

std::optional<double> HeaderCards::number(std::string_view keyword) const {
  const auto found = text(keyword);
  if (!found) return std::nullopt;
  const auto value = number_in(*found);
  if (!value || !std::isfinite(*value)) {
    refuse(fmt::format("keyword {} is '{}'", keyword, printable(*found)), "a finite number");
  }
  return value;
}

std::optional<double> HeaderCards::first_number(std::string_view keywords) const {
  while (!keywords.empty()) {
    const std::size_t end = std::min(keywords.find(' '), keywords.size());
    if (const auto value = number(keywords.substr(0, end))) return value;
    keywords.remove_prefix(std::min(end + 1, keywords.size()));
  }
  return std::nullopt;
}

std::string text_card(const std::string& keyword, std::string_view value) {
  constexpr std::size_t kRoom = 66;  // 80 less name, sign and quotation marks
  std::string quoted = "'";
  for (const char c : value) {
    if (quoted.size() >= kRoom) break;
    quoted += c == '\'' ? std::string("''") : std::string(1, c);
  }
  return make_card(keyword, quoted + "'");
}

std::string number_card(const std::string& keyword, double value) {
  return make_card(keyword, fmt::format("{}", value));
}

}  // namespace trotline
