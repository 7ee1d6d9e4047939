// The files that the patterns of a survey stand for.
#pragma once

#include <string>
#include <vector>

#include <trotline/survey/description.hpp>

namespace trotline {

struct TableFile {
  std::string path;
  const SurveyTables* entry = nullptr;
};

struct TableFiles {
  std::vector<TableFile> files;    ///< in the order of the patterns, by name within each
  std::vector<InputError> errors;  ///< a pattern without a match, a file that two patterns match
};

[[nodiscard]] TableFiles table_files_of(const SurveyDescription& survey);

}  // namespace trotline
