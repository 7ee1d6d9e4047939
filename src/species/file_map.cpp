#include "file_map.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include <trotline/base/text.hpp>
#include <trotline/physics/constants.hpp>

namespace trotline {
namespace {

std::string_view kind_of(const YAML::Node& node) {
  switch (node.Type()) {
    case YAML::NodeType::Map:
      return "a mapping";
    case YAML::NodeType::Sequence:
      return "a list";
    case YAML::NodeType::Scalar:
      return "a text";
    default:
      return "nothing";
  }
}

}  // namespace

FileMap::FileMap(const YAML::Node& node, std::string path, std::string file)
    : node_(node), path_(std::move(path)), file_(std::move(file)) {
  const std::string what = path_.empty() ? "the file" : fmt::format("'{}'", path_);
  if (!node_.IsMap()) {
    throw InputError(place(),
                     {fmt::format("{} holds {}", what, kind_of(node_)), "a mapping of keys to values"});
  }
  std::set<std::string> seen;
  for (const auto& entry : node_) {
    if (!entry.first.IsScalar())
      throw InputError(place_of(entry.first), {"a key is no text", "a plain text"});
    const std::string& key = entry.first.Scalar();
    if (!seen.insert(key).second) {
      throw InputError(
          place_of(entry.first),
          {fmt::format("the key '{}' of {} stands here again", printable(key), what), "each key once"});
    }
  }
}

bool FileMap::has(const std::string& key) const { return find(key).IsDefined(); }

bool FileMap::holds_map(const std::string& key) const {
  const YAML::Node node = find(key);
  return node.IsDefined() && node.IsMap();
}

std::string FileMap::text(const std::string& key) const {
  const std::string text(trimmed(scalar(require(key), key)));
  if (text.empty()) refuse(key, {fmt::format("'{}' is empty", full_name(key)), "a text"});
  return text;
}

std::string FileMap::optional_text(const std::string& key, const std::string& otherwise) const {
  return has(key) ? text(key) : otherwise;
}

double FileMap::quantity(const std::string& key, Dimension dimension) const {
  const std::string written = text(key);
  try {
    return parse_quantity(written, dimension);
  } catch (const InputError& error) {
    Complaint complaint = error.complaint();
    complaint.found = fmt::format("'{}': {}", full_name(key), complaint.found);
    refuse(key, complaint);
  }
}

double FileMap::optional_quantity(const std::string& key, Dimension dimension, double otherwise) const {
  return has(key) ? quantity(key, dimension) : otherwise;
}

double FileMap::energy_k(const std::string& key) const {
  const std::string written = text(key);
  const auto value = [&](Dimension dimension) -> std::optional<double> {
    try {
      return parse_quantity(written, dimension);
    } catch (const InputError&) {
      return std::nullopt;
    }
  };
  if (const auto kelvin = value(Dimension::temperature)) return *kelvin;
  if (const auto per_m = value(Dimension::wavenumber))
    return *per_m * constants::kKelvinPerWavenumberCm / 100.0;
  if (const auto hz = value(Dimension::frequency)) return *hz * constants::kKelvinPerHz;
  refuse(
      key,
      {fmt::format("'{}': '{}' is no energy", full_name(key), printable(written)),
       "a number with a unit of temperature (E/k), wavenumber or frequency, e.g. '5.53 K', '3.845 cm-1' or "
       "'115.271 GHz'"});
}

double FileMap::number(const std::string& key) const {
  const std::string written = text(key);
  const auto value = parse_number(written);
  if (!value || !std::isfinite(*value)) {
    refuse(key,
           {fmt::format("'{}' is '{}'", full_name(key), printable(written)), "a finite number without unit"});
  }
  return *value;
}

long long FileMap::whole(const std::string& key, WholeRange range) const {
  const std::string written = text(key);
  const auto value = parse_whole_number(written);
  if (!value || *value < range.low || *value > range.high) {
    refuse(key, {fmt::format("'{}' is '{}'", full_name(key), printable(written)),
                 fmt::format("a whole number from {} to {}", range.low, range.high)});
  }
  return *value;
}

long long FileMap::optional_whole(const std::string& key, WholeRange range, long long otherwise) const {
  return has(key) ? whole(key, range) : otherwise;
}

FileMap FileMap::map(const std::string& key) const { return {require(key), full_name(key), file_}; }

std::vector<FileMap> FileMap::maps(const std::string& key) const {
  std::vector<FileMap> maps;
  for (const auto& item : list(key))
    maps.emplace_back(item, fmt::format("{}[{}]", full_name(key), maps.size() + 1), file_);
  return maps;
}

std::vector<std::string> FileMap::texts(const std::string& key) const {
  std::vector<std::string> texts;
  for (const auto& item : list(key)) texts.emplace_back(trimmed(scalar(item, key)));
  return texts;
}

std::vector<std::vector<std::string>> FileMap::table(const std::string& key) const {
  std::vector<std::vector<std::string>> rows;
  for (const auto& row : list(key)) {
    if (!row.IsSequence()) {
      throw InputError(place_of(row), {fmt::format("a row of '{}' is {}", full_name(key), kind_of(row)),
                                       "a list, e.g. '[300 K, 108.87]'"});
    }
    rows.emplace_back();
    for (const auto& cell : row) rows.back().emplace_back(trimmed(scalar(cell, key)));
  }
  return rows;
}

std::vector<std::pair<std::string, std::string>> FileMap::entries() const {
  std::vector<std::pair<std::string, std::string>> entries;
  for (const auto& entry : node_) {
    const std::string& key = entry.first.Scalar();
    asked_.insert(key);
    entries.emplace_back(key, text(key));
  }
  return entries;
}

void FileMap::finish() const {
  for (const auto& entry : node_) {
    const std::string& key = entry.first.Scalar();
    if (asked_.contains(key)) continue;
    const std::vector<std::string> known(asked_.begin(), asked_.end());
    throw InputError(place_of(entry.first),
                     {fmt::format("the key '{}' is not known{}", printable(key),
                                  path_.empty() ? "" : fmt::format(" in '{}'", path_)),
                      fmt::format("one of {}", listed(known, 20)), did_you_mean(key, known)});
  }
}

void FileMap::refuse(const std::string& key, const Complaint& complaint) const {
  const YAML::Node node = find(key);
  throw InputError(node.IsDefined() ? place_of(node) : place(), complaint);
}

YAML::Node FileMap::find(const std::string& key) const {
  asked_.insert(key);
  for (const auto& entry : node_) {
    if (entry.first.Scalar() == key) return entry.second;
  }
  return YAML::Node(YAML::NodeType::Undefined);
}

YAML::Node FileMap::require(const std::string& key) const {
  const YAML::Node node = find(key);
  if (!node.IsDefined()) {
    throw InputError(place(), {fmt::format("the key '{}' is missing{}", key,
                                           path_.empty() ? "" : fmt::format(" in '{}'", path_)),
                               "it, as docs/species-files.md describes", misspelt(key)});
  }
  return node;
}

std::string FileMap::scalar(const YAML::Node& node, const std::string& key) const {
  if (!node.IsScalar()) {
    throw InputError(place_of(node),
                     {fmt::format("'{}' holds {}", full_name(key), kind_of(node)), "a text or a number"});
  }
  return node.Scalar();
}

YAML::Node FileMap::list(const std::string& key) const {
  YAML::Node node = require(key);
  if (!node.IsSequence() || node.size() == 0) {
    refuse(key,
           {fmt::format("'{}' holds {}", full_name(key), node.IsSequence() ? "an empty list" : kind_of(node)),
            "a list with at least one element"});
  }
  return node;
}

std::string FileMap::full_name(const std::string& key) const {
  return path_.empty() ? key : path_ + "." + key;
}

/// The key of the file that may be `key` misspelt: one that nobody has asked for so far.
std::string FileMap::misspelt(const std::string& key) const {
  std::vector<std::string> strangers;
  for (const auto& entry : node_) {
    if (!asked_.contains(entry.first.Scalar())) strangers.push_back(printable(entry.first.Scalar()));
  }
  const auto nearest = nearest_name(key, strangers);
  return nearest ? fmt::format("is '{}' meant to be it?", *nearest) : std::string{};
}

Place FileMap::place_of(const YAML::Node& node) const {
  const YAML::Mark mark = node.Mark();
  if (mark.is_null()) return {file_};
  return {file_, static_cast<std::size_t>(mark.line) + 1, static_cast<std::size_t>(mark.column) + 1};
}

}  // namespace trotline
