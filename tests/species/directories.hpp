// Q(T) of the library beside the two published directories: the rows of a table.
#pragma once

#include <yaml-cpp/yaml.h>

#include <cmath>
#include <map>
#include <string>
#include <vector>

#include <trotline/species/species_file.hpp>

namespace trotline::test {

struct DirectoryRow {
  std::string species;
  std::string directory;
  int tag = 0;
  std::string entry;
  double factor = 1.0;      ///< what the directory counts more than the species file
  std::string counts = {};  ///< in words
  bool all_states = false;
  std::map<double, double> ratios = {};        ///< T [K]: directory / (factor times ours)
  std::map<double, std::string> reasons = {};  ///< T [K]: why the ratio is not 1
};

inline YAML::Node reference_yaml(const std::string& name) {
  return YAML::LoadFile(std::string(TROTLINE_SOURCE_DIR) + "/tests/reference/" + name);
}

inline std::string library_file(const std::string& name) {
  return std::string(TROTLINE_SOURCE_DIR) + "/configs/species/" + name + ".yaml";
}

/// What partition_conventions.yaml says of an entry; an empty node where it says nothing.
inline YAML::Node convention_of(const YAML::Node& conventions, const std::string& species, int tag) {
  for (const auto& node : conventions) {
    if (node["species"].as<std::string>() == species && node["tag"].as<int>() == tag) return node;
  }
  return YAML::Node(YAML::NodeType::Map);
}

inline std::string reason_at(const YAML::Node& convention, double temperature_k) {
  if (!convention["remarks"]) return "";
  for (const auto& remark : convention["remarks"]) {
    const double to = remark["to"] ? remark["to"].as<double>() : 1e9;
    if (temperature_k >= remark["from"].as<double>() && temperature_k <= to) {
      return remark["reason"].as<std::string>();
    }
  }
  return "";
}

inline DirectoryRow row_of(const YAML::Node& entry, const YAML::Node& conventions) {
  DirectoryRow row{.species = entry["species"].as<std::string>(),
                   .directory = entry["directory"].as<std::string>(),
                   .tag = entry["tag"].as<int>(),
                   .entry = entry["entry"].as<std::string>()};
  const YAML::Node convention = convention_of(conventions, row.species, row.tag);
  if (convention["factor"]) row.factor = convention["factor"].as<double>();
  if (convention["counts"]) row.counts = convention["counts"].as<std::string>();
  row.all_states = convention["states"] && convention["states"].as<std::string>() == "all";
  const Species species = read_species_file(library_file(row.species));
  const auto ground = partition_function_from_levels(species.levels);
  const PartitionFunction& ours = row.all_states ? *species.partition : *ground;
  for (const auto& value : entry["log10_q"]) {
    const auto t = value.first.as<double>();
    if (t > species.partition->highest_k() || t > ours.highest_k() || t > 500.0) continue;
    row.ratios[t] = std::pow(10.0, value.second.as<double>()) / (row.factor * ours.at(t).q);
    row.reasons[t] = reason_at(convention, t);
  }
  return row;
}

inline std::vector<DirectoryRow> directory_rows() {
  const YAML::Node conventions = reference_yaml("partition_conventions.yaml");
  std::vector<DirectoryRow> rows;
  for (const auto& entry : reference_yaml("partition_directories.yaml"))
    rows.push_back(row_of(entry, conventions));
  return rows;
}

}  // namespace trotline::test
