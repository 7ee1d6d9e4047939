#pragma once

#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <map>
#include <sstream>
#include <string>
#include <vector>

namespace trotline::testing_support {

/// Where files from outside lie that may not be copied into the repository: the folder that TROTLINE_SHARED
/// names, or `shared` beside the clone. Tests skip where it does not exist.
inline std::filesystem::path shared_folder() {
  if (const char* folder = std::getenv("TROTLINE_SHARED")) return folder;
  return std::filesystem::path(TROTLINE_SOURCE_DIR) / ".." / "shared";
}

inline std::filesystem::path reference_file(const std::string& name) {
  return shared_folder() / "reference" / name;
}

/// Rows of a plain comma-separated table with `#` comments and one header line; no quoting.
inline std::vector<std::map<std::string, std::string>> read_plain_csv(const std::filesystem::path& path) {
  std::ifstream file(path);
  std::vector<std::string> header;
  std::vector<std::map<std::string, std::string>> rows;
  for (std::string line; std::getline(file, line);) {
    if (line.empty() || line.front() == '#') continue;
    std::vector<std::string> cells;
    std::istringstream stream(line);
    for (std::string cell; std::getline(stream, cell, ',');) cells.push_back(cell);
    if (header.empty()) {
      header = cells;
      continue;
    }
    std::map<std::string, std::string> row;
    for (std::size_t i = 0; i < header.size(); ++i) row[header[i]] = i < cells.size() ? cells[i] : "";
    rows.push_back(row);
  }
  return rows;
}

}  // namespace trotline::testing_support
