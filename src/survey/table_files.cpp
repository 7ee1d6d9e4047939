#include "table_files.hpp"

#include <fmt/format.h>
#include <glob.h>

#include <algorithm>
#include <filesystem>
#include <map>

#include <trotline/base/text.hpp>

namespace trotline {
namespace {

namespace fs = std::filesystem;

/// The paths that fit, sorted by their bytes: the same on every machine, whatever its language.
std::vector<std::string> matches_of(const std::string& pattern) {
  std::error_code ignored;
  if (fs::exists(pattern, ignored)) return {pattern};  // a name with brackets in it is still a name
  std::vector<std::string> paths;
  glob_t found{};
  if (glob(pattern.c_str(), GLOB_NOSORT, nullptr, &found) == 0) {
    paths.assign(found.gl_pathv, found.gl_pathv + found.gl_pathc);
  }
  globfree(&found);
  std::sort(paths.begin(), paths.end());
  return paths;
}

std::vector<std::string> names_beside(const std::string& path) {
  std::vector<std::string> names;
  std::error_code error;
  for (const auto& entry : fs::directory_iterator(fs::path(path).parent_path(), error)) {
    if (names.size() < 2000) names.push_back(entry.path().filename().string());
  }
  return names;
}

InputError no_match(const SurveyTables& entry) {
  const std::string name = fs::path(entry.pattern).filename().string();
  return InputError(entry.place, {fmt::format("no file fits '{}'", printable(entry.pattern)),
                                  "the path of a table, or a pattern that some tables fit",
                                  did_you_mean(name, names_beside(entry.pattern))});
}

}  // namespace

TableFiles table_files_of(const SurveyDescription& survey) {
  TableFiles result;
  std::map<std::string, const SurveyTables*> owners;
  for (const SurveyTables& entry : survey.tables) {
    const std::vector<std::string> paths = matches_of(entry.pattern);
    if (paths.empty()) result.errors.push_back(no_match(entry));
    for (const std::string& path : paths) {
      const auto [owner, is_new] = owners.emplace(fs::path(path).lexically_normal().string(), &entry);
      if (is_new) {
        result.files.push_back({path, &entry});
      } else {
        result.errors.emplace_back(
            entry.place, Complaint{fmt::format("'{}' is matched here and in line {}", printable(path),
                                               owner->second->place.line),
                                   "each table once"});
      }
    }
  }
  return result;
}

}  // namespace trotline
