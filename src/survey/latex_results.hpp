// The table of results for a paper.
#pragma once

#include <filesystem>
#include <memory>

#include "result_rows.hpp"

namespace trotline {

/// Writes a LaTeX table row by row: T and N with their errors, rounded as the trade does, and a note where
/// there is no answer. Up to kShortTable rows it is a `tabular` without any package; beyond, a `longtable`.
class LatexResults {
 public:
  static constexpr std::int64_t kShortTable = 60;

  LatexResults(const std::filesystem::path& path, const std::string& title, std::int64_t rows);
  ~LatexResults();

  void add(const GatheredJob& gathered);
  void finish();

 private:
  class File;
  std::unique_ptr<File> file_;
  bool long_;
};

}  // namespace trotline
