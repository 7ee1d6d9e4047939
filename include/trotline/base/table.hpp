#pragma once

#include <cstdint>
#include <memory>
#include <string>
#include <variant>
#include <vector>

namespace trotline {

enum class CellType { text, number, whole, flag };

/// One cell of a table that is written: nothing (not known), a text, a number, a whole number or a flag.
using Cell = std::variant<std::monostate, std::string, double, std::int64_t, bool>;

/// One column of a table that is written.
struct TableColumn {
  std::string name;
  CellType type = CellType::number;
  std::string unit;         ///< as the FITS standard spells it: "K", "cm-2"; empty: none
  std::string description;  ///< one line
  std::size_t width = 1;    ///< for texts: bytes of the longest one, where a format needs it beforehand
};

/// A table that is written row by row, so that its size costs no memory.
class TableWriter {
 public:
  TableWriter() = default;
  TableWriter(const TableWriter&) = delete;
  TableWriter& operator=(const TableWriter&) = delete;
  virtual ~TableWriter() = default;

  /// @param cells  one for each column, each of the column's type or nothing; NaN counts as nothing
  virtual void add(const std::vector<Cell>& cells) = 0;

  /// Ends the table. @throws SystemError when something could not be written
  virtual void finish() = 0;
};

}  // namespace trotline
