// Reading YAML so that every error is collected with its place.
#pragma once

#include <yaml-cpp/yaml.h>

#include <functional>
#include <string>
#include <vector>

#include <trotline/base/errors.hpp>

namespace trotline {

/// Collects what is wrong with a YAML text.
class YamlComplaints {
 public:
  explicit YamlComplaints(std::string file) : file_(std::move(file)) {}

  [[nodiscard]] Place place_of(const YAML::Node& node) const;
  void add(const YAML::Node& node, const Complaint& complaint) { add(place_of(node), complaint); }
  void add(const Place& place, const Complaint& complaint) { errors_.emplace_back(place, complaint); }

  [[nodiscard]] std::size_t count() const { return errors_.size(); }

  /// The errors by place. @post empty
  [[nodiscard]] std::vector<InputError> take();

 private:
  std::string file_;
  std::vector<InputError> errors_;
};

/// One key of a mapping, its value, and where the key stands.
struct YamlEntry {
  std::string key;
  YAML::Node value;
  Place place;
};

/// The entries of a mapping; keys that are no text or stand there twice are complained of and left out.
/// @param what  names the node in messages, e.g. "'outputs'"
[[nodiscard]] std::vector<YamlEntry> entries_of(const YAML::Node& node, const std::string& what,
                                                YamlComplaints& complaints);

/// A text, or a list of texts; empty texts and other things are complained of and left out.
[[nodiscard]] std::vector<std::string> texts_of(const YamlEntry& entry, YamlComplaints& complaints);

/// Complains of a key that is none of `known`, with the nearest of them.
void complain_of_key(const YamlEntry& entry, const std::string& where, const std::vector<std::string>& known,
                     YamlComplaints& complaints);

}  // namespace trotline
