// The table of all results: its columns, and the row of one job.
#pragma once

#include <optional>
#include <vector>

#include <trotline/analysis/result.hpp>
#include <trotline/base/table.hpp>
#include <trotline/survey/ledger.hpp>

namespace trotline {

/// A job with its result parsed; nothing where the job failed.
struct GatheredJob {
  StoredJob job;
  std::optional<Result> result;
};

/// Bytes of the longest text of each column, in ASCII with escapes, as the FITS table needs them.
struct TextWidths {
  std::size_t source = 1;
  std::size_t species = 1;
  std::size_t method = 1;
  std::size_t verdict = 1;
  std::size_t message = 1;
  std::size_t table_file = 1;
};

/// A text as every format of the table has it: on one line, without characters that reorder or end it, and
/// without white space at its ends, which some readers drop.
[[nodiscard]] std::string table_text(const std::string& text);

[[nodiscard]] std::vector<TableColumn> result_columns(const TextWidths& widths);

/// The cells of a job, one for each of result_columns().
[[nodiscard]] std::vector<Cell> result_cells(const GatheredJob& gathered);

}  // namespace trotline
