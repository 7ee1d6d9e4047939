#include "yaml_reader.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <map>

#include <trotline/base/text.hpp>

namespace trotline {

Place YamlComplaints::place_of(const YAML::Node& node) const {
  const YAML::Mark mark = node.Mark();
  if (mark.is_null()) return {file_};
  return {file_, static_cast<std::size_t>(mark.line) + 1, static_cast<std::size_t>(mark.column) + 1};
}

std::vector<InputError> YamlComplaints::take() {
  std::stable_sort(errors_.begin(), errors_.end(), [](const InputError& a, const InputError& b) {
    return std::pair(a.place().line, a.place().column) < std::pair(b.place().line, b.place().column);
  });
  return std::move(errors_);
}

std::vector<YamlEntry> entries_of(const YAML::Node& node, const std::string& what,
                                  YamlComplaints& complaints) {
  std::vector<YamlEntry> entries;
  if (!node.IsMap()) {
    complaints.add(node, {fmt::format("{} is no mapping", what), "keys with values, as in 'key: value'"});
    return entries;
  }
  std::map<std::string, std::size_t> first_line;
  for (const auto& pair : node) {
    const Place place = complaints.place_of(pair.first);
    if (!pair.first.IsScalar() || pair.first.Scalar().empty()) {
      complaints.add(place, {fmt::format("a key in {} is no plain text", what), "a plain word as key"});
      continue;
    }
    const std::string key = pair.first.Scalar();
    if (const auto [seen, is_new] = first_line.emplace(key, place.line); !is_new) {
      complaints.add(place, {fmt::format("'{}' is given twice in {}, first in line {}", printable(key), what,
                                         seen->second),
                             "each key once"});
      continue;
    }
    entries.push_back({key, pair.second, place});
  }
  return entries;
}

std::vector<std::string> texts_of(const YamlEntry& entry, YamlComplaints& complaints) {
  std::vector<std::string> texts;
  const auto take = [&](const YAML::Node& node) {
    if (node.IsScalar() && !trimmed(node.Scalar()).empty()) {
      texts.push_back(node.Scalar());
    } else {
      complaints.add(
          node.Mark().is_null() ? entry.place : complaints.place_of(node),
          {fmt::format("'{}' holds {}", printable(entry.key),
                       node.IsScalar() || node.IsNull() ? "an empty value" : "something that is no text"),
           "a text, or a list of texts in square brackets"});
    }
  };
  if (entry.value.IsSequence()) {
    if (entry.value.size() == 0)
      complaints.add(entry.value, {fmt::format("'{}' is an empty list", entry.key), "at least one text"});
    for (const YAML::Node& item : entry.value) take(item);
  } else {
    take(entry.value);
  }
  return texts;
}

void complain_of_key(const YamlEntry& entry, const std::string& where, const std::vector<std::string>& known,
                     YamlComplaints& complaints) {
  complaints.add(entry.place, {fmt::format("'{}' is no key of {}", printable(entry.key), where),
                               "one of: " + listed(known, known.size()), did_you_mean(entry.key, known)});
}

}  // namespace trotline
