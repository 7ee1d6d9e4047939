// The rows of a FITS table as cells of text, all or some of them.
#pragma once

#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "fits_file.hpp"
#include "raw_table.hpp"

namespace trotline::raw {

struct FitsColumnType {
  int code = 0;  ///< CFITSIO's type after scaling
  long repeat = 0;
  long width = 0;
};

class FitsRows {
 public:
  /// Goes to the first table that has a column `intensity`, or else to the first table.
  /// @param bytes  a whole file, which must outlive this object
  FitsRows(std::string_view bytes, const std::string& name);

  /// The table without its rows.
  [[nodiscard]] const Table& header() const { return header_; }
  [[nodiscard]] std::size_t count() const { return count_; }

  /// Rows `first` (from 0) and after it. Not safe from several threads.
  [[nodiscard]] std::vector<Row> read(std::size_t first, std::size_t count) const;

 private:
  FitsFile file_;
  Table header_;
  std::vector<FitsColumnType> types_;
  std::size_t count_ = 0;
};

}  // namespace trotline::raw
