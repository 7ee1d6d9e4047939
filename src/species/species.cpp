#include <algorithm>
#include <array>
#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/species/species.hpp>

namespace trotline {
namespace {

/// What is read in place of a longer spelling, tried in this order. All in UTF-8.
struct Spelling {
  std::string_view from;
  std::string_view to;
};

constexpr std::array<Spelling, 22> kSpellings = {{
    {"-->", "-"},    {"<--", "-"},    {"->", "-"},     {"<-", "-"},
    {"\u2192", "-"}, {"\u2190", "-"},                   // arrows
    {"\u2010", "-"}, {"\u2011", "-"}, {"\u2012", "-"},  // hyphens
    {"\u2013", "-"}, {"\u2014", "-"}, {"\u2015", "-"},  // dashes
    {"\u2212", "-"}, {"\uFE63", "-"}, {"\uFF0D", "-"},  // minus, small and full-width hyphen
    {"\u00A0", ""},  {"\u2009", ""},  {"\u202F", ""},   // no-break, thin, narrow no-break space
    {" ", ""},       {"\t", ""},      {"\n", ""},      {"\r", ""},
}};

std::string respelled(std::string_view text) {
  std::string out;
  while (!text.empty()) {
    const auto hit = std::find_if(kSpellings.begin(), kSpellings.end(),
                                  [&](const Spelling& spelling) { return text.starts_with(spelling.from); });
    out += hit == kSpellings.end() ? text.substr(0, 1) : hit->to;
    text.remove_prefix(hit == kSpellings.end() ? 1 : hit->from.size());
  }
  return out;
}

bool is_letter(char c) { return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z'); }
bool is_index(char c) { return (c >= '0' && c <= '9') || c == ','; }

/// Without every "J=" that does not end a longer word.
std::string without_j(std::string text) {
  for (std::size_t at = text.find("J="); at != std::string::npos; at = text.find("J=", at)) {
    if (at > 0 && is_letter(text[at - 1])) {
      ++at;
    } else {
      text.erase(at, 2);
    }
  }
  return text;
}

/// "12_{3}" and "12_3" become "12(3)".
std::string without_subscripts(std::string_view text) {
  std::string out;
  while (!text.empty()) {
    if (text.front() != '_') {
      out += text.front();
      text.remove_prefix(1);
      continue;
    }
    text.remove_prefix(1);
    const bool braced = text.starts_with('{') && text.find('}') != std::string_view::npos;
    std::size_t length = 0;
    if (braced) {
      length = text.find('}') - 1;
      text.remove_prefix(1);
    } else {
      if (text.starts_with('-') || text.starts_with('+')) ++length;
      while (length < text.size() && is_index(text[length])) ++length;
    }
    std::string index(text.substr(0, length));
    std::erase(index, '_');
    out += "(" + index + ")";
    text.remove_prefix(length + (braced ? 1 : 0));
  }
  return out;
}

/// True when normalised_label() leaves a label as it is, found out without building it.
bool is_normal(std::string_view label) {
  return std::all_of(label.begin(), label.end(), [](char c) {
    return static_cast<unsigned char>(c) < 0x80 && std::string_view(" \t\n\r_<>=").find(c) == std::string_view::npos;
  });
}

/// True when `label` is `upper` + "-" + `lower`.
bool is_pair(std::string_view label, std::string_view upper, std::string_view lower) {
  return label.size() == upper.size() + 1 + lower.size() && label.starts_with(upper) &&
         label[upper.size()] == '-' && label.ends_with(lower);
}

}  // namespace

std::string_view name_of(SpeciesKind kind) {
  constexpr std::array<std::string_view, 8> kNames = {"linear",    "symmetric", "asymmetric", "triplet_sigma",
                                                      "inversion", "structure", "levels",     "line_list"};
  return kNames.at(static_cast<std::size_t>(kind));
}

std::string transition_label(const Species& species, const Transition& transition) {
  return species.levels.at(transition.upper).label + "-" + species.levels.at(transition.lower).label;
}

std::string normalised_label(std::string_view label) {
  return without_subscripts(without_j(respelled(label)));
}

std::vector<std::size_t> transitions_labelled(const Species& species, std::string_view label) {
  const std::string wanted = normalised_label(label);
  // Levels are fewer than lines: normalise each once, and build no label of a line that does not fit.
  std::vector<std::string> respelt;
  std::vector<std::string_view> levels;
  respelt.reserve(species.levels.size());
  levels.reserve(species.levels.size());
  for (const Level& level : species.levels) {
    if (is_normal(level.label)) {
      levels.emplace_back(level.label);
    } else {
      levels.emplace_back(respelt.emplace_back(normalised_label(level.label)));
    }
  }
  std::vector<std::size_t> found;
  for (std::size_t i = 0; i < species.transitions.size(); ++i) {
    const Transition& line = species.transitions[i];
    if (is_pair(wanted, levels.at(line.upper), levels.at(line.lower))) found.push_back(i);
  }
  return found;
}

std::vector<std::size_t> transitions_near(const Species& species, double frequency_hz, double tolerance_hz) {
  if (!std::isfinite(frequency_hz)) throw DomainError("frequency_hz", frequency_hz, "finite");
  if (!(tolerance_hz >= 0.0)) throw DomainError("tolerance_hz", tolerance_hz, "0 or above");
  const auto& lines = species.transitions;
  auto line = std::lower_bound(
      lines.begin(), lines.end(), frequency_hz - tolerance_hz,
      [](const Transition& transition, double limit) { return transition.frequency_hz < limit; });
  std::vector<std::size_t> found;
  for (; line != lines.end() && line->frequency_hz <= frequency_hz + tolerance_hz; ++line) {
    found.push_back(static_cast<std::size_t>(line - lines.begin()));
  }
  return found;
}

}  // namespace trotline
