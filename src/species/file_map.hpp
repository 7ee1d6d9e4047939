// A mapping in a species file, read key by key, with the place of whatever is wrong.
#pragma once

#include <yaml-cpp/yaml.h>

#include <optional>
#include <set>
#include <string>
#include <string_view>
#include <vector>

#include <trotline/base/errors.hpp>
#include <trotline/physics/quantity.hpp>

namespace trotline {

/// Whole numbers that a key may hold.
struct WholeRange {
  long long low;
  long long high;
};

/// Every function that takes a key throws InputError with file, line and column: where the key is missing
/// (unless the function is named optional), where it holds something of another kind, or a quantity of
/// another dimension or without unit. finish() refuses keys that nobody asked for.
class FileMap {
 public:
  /// @param path  how messages name the mapping, e.g. "dipole"; empty at the top of the file
  FileMap(const YAML::Node& node, std::string path, std::string file);

  [[nodiscard]] bool has(const std::string& key) const;
  [[nodiscard]] std::string text(const std::string& key) const;
  [[nodiscard]] std::string optional_text(const std::string& key, const std::string& otherwise) const;
  [[nodiscard]] double quantity(const std::string& key, Dimension dimension) const;
  [[nodiscard]] double optional_quantity(const std::string& key, Dimension dimension, double otherwise) const;

  /// E/k [K] from "5.53 K", "3.845 cm-1" or "115.271 GHz".
  [[nodiscard]] double energy_k(const std::string& key) const;
  [[nodiscard]] double number(const std::string& key) const;
  [[nodiscard]] long long whole(const std::string& key, WholeRange range) const;
  [[nodiscard]] long long optional_whole(const std::string& key, WholeRange range, long long otherwise) const;
  [[nodiscard]] FileMap map(const std::string& key) const;
  [[nodiscard]] std::vector<FileMap> maps(const std::string& key) const;
  [[nodiscard]] std::vector<std::string> texts(const std::string& key) const;

  /// Whether the key holds a mapping (and not a text or a list).
  [[nodiscard]] bool holds_map(const std::string& key) const;

  /// The element of a list of lists: [["300 K", "108.9"], ...].
  [[nodiscard]] std::vector<std::vector<std::string>> table(const std::string& key) const;

  /// Every key with its text, for mappings whose keys are the user's own.
  [[nodiscard]] std::vector<std::pair<std::string, std::string>> entries() const;

  /// Refuses the first key that nobody has asked for, with the nearest one that somebody did.
  void finish() const;

  /// Refuses what `key` holds.
  [[noreturn]] void refuse(const std::string& key, const Complaint& complaint) const;

  [[nodiscard]] Place place() const { return place_of(node_); }
  [[nodiscard]] const std::string& file() const { return file_; }

 private:
  [[nodiscard]] YAML::Node find(const std::string& key) const;
  [[nodiscard]] YAML::Node require(const std::string& key) const;
  [[nodiscard]] std::string scalar(const YAML::Node& node, const std::string& key) const;
  [[nodiscard]] YAML::Node list(const std::string& key) const;
  [[nodiscard]] std::string full_name(const std::string& key) const;
  [[nodiscard]] std::string misspelt(const std::string& key) const;
  [[nodiscard]] Place place_of(const YAML::Node& node) const;

  YAML::Node node_;
  std::string path_;
  std::string file_;
  mutable std::set<std::string> asked_;
};

}  // namespace trotline
