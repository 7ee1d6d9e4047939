#include <trotline/base/text.hpp>

#include <fmt/format.h>

#include <algorithm>
#include <charconv>
#include <cstdint>

namespace trotline {
namespace {

bool is_space(char c) { return c == ' ' || (c >= '\t' && c <= '\r'); }

template <class Number>
std::optional<Number> parse_whole(std::string_view text) {
  text = trimmed(text);
  if (text.size() > 1 && text.front() == '+' && text[1] != '-' && text[1] != '+') text.remove_prefix(1);
  Number value{};
  const auto [end, error] = std::from_chars(text.data(), text.data() + text.size(), value);
  if (error != std::errc{} || end != text.data() + text.size()) return std::nullopt;
  return value;
}

/// Optimal string alignment distance: Levenshtein with swaps of neighbours.
std::size_t edit_distance(std::string_view a, std::string_view b) {
  std::vector<std::vector<std::size_t>> d(a.size() + 1, std::vector<std::size_t>(b.size() + 1));
  for (std::size_t i = 0; i <= a.size(); ++i) d[i][0] = i;
  for (std::size_t j = 0; j <= b.size(); ++j) d[0][j] = j;
  for (std::size_t i = 1; i <= a.size(); ++i) {
    for (std::size_t j = 1; j <= b.size(); ++j) {
      const std::size_t change = a[i - 1] == b[j - 1] ? 0 : 1;
      d[i][j] = std::min({d[i - 1][j] + 1, d[i][j - 1] + 1, d[i - 1][j - 1] + change});
      if (i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1]) {
        d[i][j] = std::min(d[i][j], d[i - 2][j - 2] + 1);
      }
    }
  }
  return d[a.size()][b.size()];
}

/// Length of the UTF-8 sequence that starts at `i`, or 0 when there is no valid one.
std::size_t utf8_length(std::string_view text, std::size_t i) {
  const auto byte = [&](std::size_t k) { return static_cast<std::uint8_t>(text[k]); };
  const std::uint8_t lead = byte(i);
  if (lead < 0x80) return 1;
  const std::size_t length = lead >= 0xF0 ? 4 : lead >= 0xE0 ? 3 : 2;
  if (lead < 0xC2 || lead > 0xF4 || i + length > text.size()) return 0;
  for (std::size_t k = 1; k < length; ++k) {
    if ((byte(i + k) & 0xC0) != 0x80) return 0;
  }
  const std::uint8_t second = byte(i + 1);
  if ((lead == 0xE0 && second < 0xA0) || (lead == 0xED && second > 0x9F)) return 0;
  if ((lead == 0xF0 && second < 0x90) || (lead == 0xF4 && second > 0x8F)) return 0;
  return length;
}

}  // namespace

std::string_view trimmed(std::string_view text) {
  while (!text.empty() && is_space(text.front())) text.remove_prefix(1);
  while (!text.empty() && is_space(text.back())) text.remove_suffix(1);
  return text;
}

std::string lower_case(std::string_view text) {
  std::string lower(text);
  for (char& c : lower) {
    if (c >= 'A' && c <= 'Z') c = static_cast<char>(c - 'A' + 'a');
  }
  return lower;
}

std::optional<double> parse_number(std::string_view text) { return parse_whole<double>(text); }

std::optional<long long> parse_whole_number(std::string_view text) { return parse_whole<long long>(text); }

std::optional<std::string> nearest_name(std::string_view word, const std::vector<std::string>& candidates) {
  constexpr std::size_t kLongestWord = 64;  // nobody mistypes a longer one, and the cost is quadratic
  if (word.size() > kLongestWord) return std::nullopt;
  std::size_t best = word.size() / 3 + 2;
  std::optional<std::string> nearest;
  for (const std::string& candidate : candidates) {
    if (candidate.size() > kLongestWord) continue;
    const std::size_t distance = edit_distance(lower_case(word), lower_case(candidate));
    if (distance < best) {
      best = distance;
      nearest = candidate;
    }
  }
  return nearest;
}

std::string did_you_mean(std::string_view word, const std::vector<std::string>& candidates) {
  const auto nearest = nearest_name(word, candidates);
  return nearest ? fmt::format("did you mean '{}'?", *nearest) : std::string{};
}

std::string listed(const std::vector<std::string>& names, std::size_t most) {
  std::string text;
  for (std::size_t i = 0; i < std::min(names.size(), most); ++i) text += (i ? ", " : "") + names[i];
  if (names.size() > most) text += fmt::format(" and {} more", names.size() - most);
  return text;
}

bool is_utf8(std::string_view text) {
  for (std::size_t i = 0; i < text.size();) {
    const std::size_t length = utf8_length(text, i);
    if (length == 0) return false;
    i += length;
  }
  return true;
}

std::string printable(std::string_view text) {
  std::string safe;
  for (std::size_t i = 0; i < text.size();) {
    const std::size_t length = utf8_length(text, i);
    const auto lead = static_cast<std::uint8_t>(text[i]);
    const bool c1_control = length == 2 && lead == 0xC2 && static_cast<std::uint8_t>(text[i + 1]) < 0xA0;
    if (length == 0) {
      safe += "\xEF\xBF\xBD";
    } else if (lead < 0x20 || lead == 0x7F || c1_control) {
      safe += ' ';
    } else {
      safe += text.substr(i, length);
    }
    i += std::max<std::size_t>(length, 1);
  }
  return safe;
}

std::string fingerprint(std::string_view bytes) {
  std::uint64_t hash = 14695981039346656037ULL;
  for (const char c : bytes) hash = (hash ^ static_cast<std::uint8_t>(c)) * 1099511628211ULL;
  return fmt::format("{:016x}", hash);
}

}  // namespace trotline
