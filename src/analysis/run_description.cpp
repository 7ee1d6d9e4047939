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
    std::vector<std::string> keys = {"table", "species", "measure"};
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

std::string key_of(const YAML::Node& node, const std::string& name) {
  if (node.IsScalar()) return node.Scalar();
  throw InputError(place_of(name, node.Mark()), {"a key is no plain text", "keys such as 'species'"});
}

/// Calls set() and tells where in the file its complaint belongs.
template <class Set>
void at_place(const Place& place, const Set& set) {
  try {
    set();
  } catch (const InputError& error) {
    throw InputError(place, error.complaint());
  }
}

/// A path, or a mapping with `file` and what is known of that file.
void read_spectrum(const YAML::Node& node, const std::string& name, SpectrumInput& input) {
  if (node.IsScalar()) {
    input.path = beside(name, node.Scalar());
    return;
  }
  const Place place = place_of(name, node.Mark());
  const Complaint expected{"an entry of 'spectra' names no file", "a path, or '{file: PATH, beam: 11 arcsec}'"};
  if (!node.IsMap()) throw InputError(place, expected);
  for (const auto& entry : node) {
    const std::string key = key_of(entry.first, name);
    const std::string value = text_of(entry.second, key, name);
    if (key == "file") {
      input.path = beside(name, value);
    } else {
      at_place(place_of(name, entry.first.Mark()), [&] { set_input_option(input, key, value); });
    }
  }
  if (input.path.empty()) throw InputError(place, expected);
}

/// The mapping `measure`: options of all files are set first, so that a file's own win.
MeasureDescription measure_of(const YAML::Node& node, const std::string& name) {
  const Place place = place_of(name, node.Mark());
  if (!node.IsMap() || !node["spectra"])
    throw InputError(place, {"'measure' names no spectra", "a mapping with 'spectra' and 'vlsr'"});
  const YAML::Node spectra = node["spectra"];
  MeasureDescription description;
  description.inputs.resize(spectra.IsSequence() ? spectra.size() : 1);
  std::set<std::string> seen;
  for (const auto& entry : node) {
    const std::string key = key_of(entry.first, name);
    const Place here = place_of(name, entry.first.Mark());
    if (!seen.insert(key).second)
      throw InputError(here, {fmt::format("'{}' is given twice", printable(key)), "each key once"});
    if (key == "spectra") continue;
    at_place(here, [&] { set_measure_option(description, key, text_of(entry.second, key, name)); });
  }
  if (!description.vlsr_km_s)
    throw InputError(place, {"'vlsr' is missing in 'measure'", "the source's velocity, such as '5.2 km/s'"});
  for (std::size_t i = 0; i < description.inputs.size(); ++i)
    read_spectrum(spectra.IsSequence() ? spectra[i] : spectra, name, description.inputs[i]);
  return description;
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
    if (key == "measure") {
      run.measure = measure_of(entry.second, name);
    } else {
      set_key(run, key, text_of(entry.second, key, name), place, name);
    }
  }
  if (run.measure && !run.table.empty()) {
    throw InputError(Place{name}, {"both 'table' and 'measure' are given", "one of them"});
  }
  if (run.table.empty() && !run.measure) {
    throw InputError(Place{name}, {"'table' is missing", "both 'table' (or 'measure') and 'species'"});
  }
  if (run.species.empty()) {
    throw InputError(Place{name}, {"'species' is missing", "both 'table' (or 'measure') and 'species'"});
  }
  if (run.measure) run.measure->species = run.species;
  return run;
}

}  // namespace trotline
