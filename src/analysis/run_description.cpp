#include <trotline/analysis/run_description.hpp>

#include <fmt/format.h>
#include <yaml-cpp/yaml.h>

#include <filesystem>
#include <set>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/base/text.hpp>

namespace trotline {
namespace {

Place place_of(const std::string& name, const YAML::Mark& mark) {
  if (mark.is_null()) return {name};
  return {name, static_cast<std::size_t>(mark.line) + 1, static_cast<std::size_t>(mark.column) + 1};
}

/// A scalar, or a list of scalars joined by commas.
std::string text_of(const YAML::Node& node, const std::string& key, const std::string& name) {
  if (node.IsScalar()) return node.Scalar();
  std::string joined;
  if (node.IsSequence() && node.size() > 0) {
    for (const auto& item : node) {
      if (!item.IsScalar()) break;
      joined += (joined.empty() ? "" : ", ") + item.Scalar();
    }
  }
  if (joined.empty()) {
    throw InputError(place_of(name, node.Mark()), {fmt::format("'{}' holds no plain value", key),
                                                   "a text, or a list of texts in square brackets"});
  }
  return joined;
}

std::string beside(const std::string& name, const std::string& path) {
  namespace fs = std::filesystem;
  if (path == "-" || fs::path(path).is_absolute()) return path;
  return (fs::path(name).parent_path() / path).string();
}

bool is_species_path(const std::string& species) {
  return species.find('/') != std::string::npos || species.ends_with(".yaml");
}

void set_key(RunDescription& run, const std::string& key, const std::string& value, const Place& place,
             const std::string& name) {
  if (key == "table") {
    run.table = beside(name, value);
  } else if (key == "species") {
    run.species = is_species_path(value) ? beside(name, value) : value;
  } else {
    std::vector<std::string> keys = {"table", "species"};
    for (const RunOption& option : run_option_table()) keys.push_back(option.key);
    if (std::find(keys.begin(), keys.end(), key) == keys.end()) {
      throw InputError(place, {fmt::format("'{}' is no key of a run description", printable(key)),
                               "one of: " + listed(keys, keys.size()), did_you_mean(key, keys)});
    }
    try {
      set_run_option(run.options, key, key == "collisions" ? beside(name, value) : value);
    } catch (const InputError& error) {
      throw InputError(place, error.complaint());
    }
  }
}

YAML::Node load(const std::string& text, const std::string& name) {
  try {
    return YAML::Load(text);
  } catch (const YAML::Exception& error) {
    throw InputError(place_of(name, error.mark), {"is no valid YAML: " + error.msg, "a mapping of keys to values"});
  }
}

}  // namespace

RunDescription read_run_description(const std::string& path) {
  constexpr std::size_t kMostBytes = 1 << 20;
  return parse_run_description(read_file(path, kMostBytes), path);
}

RunDescription parse_run_description(const std::string& text, const std::string& name) {
  const YAML::Node root = load(text, name);
  if (!root.IsMap()) {
    throw InputError(Place{name, 1}, {"is no run description", "a YAML mapping such as 'species: CO'"});
  }
  RunDescription run;
  std::set<std::string> seen;
  for (const auto& entry : root) {
    const Place place = place_of(name, entry.first.Mark());
    if (!entry.first.IsScalar()) throw InputError(place, {"a key is no plain text", "keys such as 'species'"});
    const std::string key = entry.first.Scalar();
    if (!seen.insert(key).second) {
      throw InputError(place, {fmt::format("'{}' is given twice", printable(key)), "each key once"});
    }
    set_key(run, key, text_of(entry.second, key, name), place, name);
  }
  for (const auto& [value, key] : {std::pair{run.table, "table"}, std::pair{run.species, "species"}}) {
    if (value.empty()) {
      throw InputError(Place{name}, {fmt::format("'{}' is missing", key), "both 'table' and 'species'"});
    }
  }
  return run;
}

}  // namespace trotline
