#pragma once

#include <cstdint>
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include <trotline/observation/intensity_table.hpp>

namespace trotline {

/// The rows of one source and one species in a table that holds many.
struct TablePart {
  std::optional<std::string> source;   ///< as its rows name it
  std::optional<std::string> species;  ///< likewise
  std::size_t first_line = 0;          ///< line or row of its first row
  std::size_t last_line = 0;           ///< likewise
  std::string gaps;                    ///< fingerprint of where its rows are not one after the other
  std::size_t rows = 0;
  std::string fingerprint;  ///< of the columns (names, units) and of these rows; not of where they stand
};

/// A table of intensities cut by source and species, so that each part can be read alone.
///
/// The file is gone through once, in pieces: kept are only the places of the rows, about 24 bytes for every
/// run of rows of one part, whatever the file's size. What is wrong in a row of text is said when its part is
/// read, and costs the other parts nothing. (A FITS table is held in memory while it is gone through and
/// while its parts are read; its cells are not.)
class DividedTable {
 public:
  /// @throws InputError  as read_intensity_table for what concerns the whole table: its format, header,
  ///         bytes that are no text, a quotation mark that is never closed, no row at all
  explicit DividedTable(std::string path);
  ~DividedTable();
  DividedTable(DividedTable&&) noexcept;
  DividedTable& operator=(DividedTable&&) noexcept;

  [[nodiscard]] const std::string& path() const;

  /// In the order in which their first rows stand in the table.
  [[nodiscard]] const std::vector<TablePart>& parts() const;

  /// The rows of a part, as read_intensity_table gives them. Safe from several threads.
  /// @throws InputError  as read_intensity_table for these rows, and when the file is no longer what it was
  [[nodiscard]] IntensityTable read(std::size_t part) const;

  class Form;  ///< how a format is gone through

 private:
  std::unique_ptr<Form> form_;
};

}  // namespace trotline
