#include <array>

#include <trotline/base/text.hpp>

#include "fits_rows.hpp"

namespace trotline::raw {
namespace {

FitsColumnType type_of(const FitsFile& file, int column) {
  FitsColumnType type;
  int status = 0;
  fits_get_eqcoltype(file.handle(), column, &type.code, &type.repeat, &type.width, &status);
  file.check(status, fmt::format("column {} of the table has no readable type", column));
  return type;
}

bool is_whole(int code) {
  return code == TBYTE || code == TSBYTE || code == TSHORT || code == TUSHORT || code == TINT ||
         code == TLONG || code == TULONG || code == TLONGLONG;
}

/// Why a column cannot give one value a row; empty when it can.
std::string trouble_of(const FitsColumnType& type) {
  if (type.code < 0) return "holds arrays of variable length";
  if (type.code == TCOMPLEX || type.code == TDBLCOMPLEX) return "holds complex numbers";
  if (type.code == TBIT) return "holds bits";
  const long values = type.code == TSTRING ? (type.width > 0 ? type.repeat / type.width : 0) : type.repeat;
  return values == 1 ? "" : fmt::format("holds {} values a row", values);
}

std::string keyword(const FitsFile& file, const std::string& name) {
  int status = 0;
  std::array<char, FLEN_VALUE> value{};
  fits_read_key(file.handle(), TSTRING, name.c_str(), value.data(), nullptr, &status);
  fits_clear_errmsg();
  return status == 0 ? std::string(trimmed(value.data())) : std::string{};
}

/// One column of `Value`, with CFITSIO's flags for undefined elements, as text.
template <class Value, class ToText>
void read_values(const FitsFile& file, int column, int code, std::span<Row> rows, const ToText& to_text) {
  const auto values = std::make_unique<Value[]>(rows.size());
  std::vector<char> undefined(rows.size());
  int status = 0;
  int any = 0;
  fits_read_colnull(file.handle(), code, column, static_cast<LONGLONG>(rows.front().line), 1,
                    static_cast<LONGLONG>(rows.size()), values.get(), undefined.data(), &any, &status);
  file.check(status, fmt::format("column {} of the table cannot be read", column));
  for (std::size_t i = 0; i < rows.size(); ++i) {
    if (!undefined[i]) rows[i].cells[static_cast<std::size_t>(column) - 1] = to_text(values[i]);
  }
}

void read_strings(const FitsFile& file, int column, long width, std::span<Row> rows) {
  std::string buffer(static_cast<std::size_t>(width) + 1, '\0');
  for (Row& row : rows) {
    char* text = buffer.data();
    int status = 0;
    int any = 0;
    std::string no_replacement(1, '\0');
    fits_read_col(file.handle(), TSTRING, column, static_cast<LONGLONG>(row.line), 1, 1,
                  no_replacement.data(), &text, &any, &status);
    file.check(status, fmt::format("column {} of the table cannot be read", column));
    const std::string cell = buffer.c_str();
    if (!is_utf8(cell)) {
      throw InputError(
          Place{file.name(), row.line},
          {fmt::format("column {} holds bytes that are not text", column), "text in ASCII or UTF-8"});
    }
    row.cells[static_cast<std::size_t>(column) - 1] = trimmed(cell);
  }
}

void read_column(const FitsFile& file, int column, const FitsColumnType& type, std::span<Row> rows) {
  if (type.code == TSTRING) {
    read_strings(file, column, type.width, rows);
  } else if (type.code == TLOGICAL) {
    read_values<char>(file, column, TLOGICAL, rows, [](char v) { return v ? "true" : "false"; });
  } else if (is_whole(type.code)) {
    read_values<LONGLONG>(file, column, TLONGLONG, rows, [](LONGLONG v) { return std::to_string(v); });
  } else {
    read_values<double>(file, column, TDOUBLE, rows, [](double v) { return fmt::format("{}", v); });
  }
}

/// Moves to the first table that has a column `intensity`, or else to the first table.
void go_to_table(const FitsFile& file) {
  int first = 0;
  for (int unit = 1; unit <= file.units(); ++unit) {
    if (file.go_to(unit) == IMAGE_HDU) continue;
    if (first == 0) first = unit;
    int status = 0;
    int column = 0;
    std::string name = "intensity";
    fits_get_colnum(file.handle(), CASEINSEN, name.data(), &column, &status);
    fits_clear_errmsg();
    if (status == 0) return;
  }
  if (first == 0) {
    throw InputError(Place{file.name()}, {"the FITS file holds no table",
                                          "a binary table with the columns of an "
                                          "intensity table"});
  }
  file.go_to(first);
}

std::size_t count_rows(const FitsFile& file) {
  constexpr LONGLONG kMostRows = 50'000'000;
  int status = 0;
  LONGLONG rows = 0;
  LONGLONG width = 0;
  fits_get_num_rowsll(file.handle(), &rows, &status);
  fits_read_key(file.handle(), TLONGLONG, "NAXIS1", &width, nullptr, &status);
  file.check(status, "the size of the table cannot be read");
  if (rows < 0 || rows > kMostRows || (width <= 0 && rows > 0)) {
    throw InputError(Place{file.name()}, {fmt::format("the table claims {} rows of {} bytes", rows, width),
                                          fmt::format("at most {} rows", kMostRows)});
  }
  return static_cast<std::size_t>(rows);
}

int count_columns(const FitsFile& file) {
  int status = 0;
  int columns = 0;
  fits_get_num_cols(file.handle(), &columns, &status);
  file.check(status, "the columns of the table cannot be counted");
  return columns;
}

}  // namespace

FitsRows::FitsRows(std::string_view bytes, const std::string& name) : file_(bytes, name) {
  go_to_table(file_);
  header_ = {.file = name,
             .header_line = 0,
             .columns = {},
             .rows = {},
             .unit_place = "written in the keyword TUNITn of the column"};
  const int columns = count_columns(file_);
  count_ = count_rows(file_);
  for (int i = 1; i <= columns; ++i) {
    types_.push_back(type_of(file_, i));
    Column column{keyword(file_, fmt::format("TTYPE{}", i)), std::nullopt, trouble_of(types_.back())};
    if (const std::string unit = keyword(file_, fmt::format("TUNIT{}", i)); !unit.empty()) column.unit = unit;
    header_.columns.push_back(std::move(column));
  }
}

std::vector<Row> FitsRows::read(std::size_t first, std::size_t count) const {
  std::vector<Row> rows(count);
  for (std::size_t i = 0; i < count; ++i) {
    rows[i] = {.line = first + i + 1, .cells = std::vector<std::string>(header_.columns.size())};
  }
  for (std::size_t i = 0; i < types_.size() && count > 0; ++i) {
    if (header_.columns[i].trouble.empty()) read_column(file_, static_cast<int>(i) + 1, types_[i], rows);
  }
  return rows;
}

Table parse_fits(std::string_view bytes, const std::string& name) {
  const FitsRows reader(bytes, name);
  Table table = reader.header();
  table.rows = reader.read(0, reader.count());
  return table;
}

}  // namespace trotline::raw
