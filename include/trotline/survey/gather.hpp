#pragma once

#include <filesystem>
#include <string>
#include <vector>

#include <trotline/survey/description.hpp>
#include <trotline/survey/ledger.hpp>

namespace trotline {

struct GatherOptions {
  SurveyOutputs outputs;
  std::string title;  ///< of the page and the tables, e.g. the name of the survey's file
  int threads = 0;    ///< 0: one for each core
};

/// What gather() wrote.
struct Gathered {
  std::vector<std::string> files;     ///< relative to the folder
  std::vector<std::string> warnings;  ///< outputs that could not be made, and why (gnuplot is missing ...)
};

/// Writes the outputs of a survey from its ledger: `results.*` with one row for each job, and what else the
/// outputs ask for. Nothing is computed; jobs are taken one after the other, so memory does not grow with
/// the survey. All files of the folder itself appear together, or none.
/// @throws SystemError when something cannot be written
Gathered gather(Ledger& ledger, const std::filesystem::path& folder, const GatherOptions& options);

}  // namespace trotline
