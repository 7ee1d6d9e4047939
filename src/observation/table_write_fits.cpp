#include <fitsio.h>

#include <array>
#include <cstdlib>

#include <trotline/base/text.hpp>
#include <trotline/observation/intensity_table.hpp>

#include "out_columns.hpp"

namespace trotline {
namespace {

constexpr std::size_t kFitsBlock = 2880;

/// FITS allows printable ASCII only.
std::string ascii(const std::string& text) {
  std::string result;
  for (const char c : printable(text)) {
    const auto byte = static_cast<unsigned char>(c);
    if ((byte & 0xC0U) == 0x80U) continue;  // the rest of a character that has its '?' already
    result += byte >= 0x20U && byte < 0x7FU ? c : '?';
  }
  return result;
}

/// A FITS file in memory that CFITSIO writes.
class MemoryFile {
 public:
  MemoryFile() {
    call(fits_create_memfile(&file_, &buffer_, &size_, kFitsBlock, std::realloc, &status_));
  }
  ~MemoryFile() {
    int ignored = 0;
    if (file_ != nullptr) fits_close_file(file_, &ignored);
    std::free(buffer_);
  }
  MemoryFile(const MemoryFile&) = delete;
  MemoryFile& operator=(const MemoryFile&) = delete;

  void make_table(const std::vector<OutColumn>& columns, std::size_t rows) {
    std::vector<std::string> texts;
    for (const OutColumn& column : columns) {
      texts.push_back(column.name);
      texts.push_back(type_of(column));
      texts.push_back(column.unit);
    }
    std::vector<std::vector<char*>> pointers(3);
    for (std::size_t i = 0; i < texts.size(); ++i) pointers[i % 3].push_back(texts[i].data());
    call(fits_create_tbl(file_, BINARY_TBL, static_cast<LONGLONG>(rows), static_cast<int>(columns.size()),
                         pointers[0].data(), pointers[1].data(), pointers[2].data(), "LINES", &status_));
  }

  void history(const std::string& text) { call(fits_write_history(file_, ascii(text).c_str(), &status_)); }

  void fill(const OutColumn& column, int number) {
    for (std::size_t i = 0; i < column.cells.size(); ++i) {
      write_cell(column, number, static_cast<LONGLONG>(i) + 1, column.cells[i]);
    }
  }

  [[nodiscard]] std::string bytes() {
    long long start = 0;
    long long data = 0;
    long long end = 0;
    call(fits_flush_file(file_, &status_));
    call(fits_get_hduaddrll(file_, &start, &data, &end, &status_));
    return std::string(static_cast<const char*>(buffer_), static_cast<std::size_t>(end));
  }

 private:
  static std::string type_of(const OutColumn& column) {
    if (column.datatype == "float64") return "1D";
    if (column.datatype == "bool") return "1L";
    std::size_t width = 1;
    for (const std::string& cell : column.cells) width = std::max(width, ascii(cell).size());
    return fmt::format("{}A", width);
  }

  void write_cell(const OutColumn& column, int number, LONGLONG row, const std::string& cell) {
    if (column.datatype == "float64") {
      double value = parse_number(cell).value_or(std::numeric_limits<double>::quiet_NaN());
      call(fits_write_col(file_, TDOUBLE, number, row, 1, 1, &value, &status_));
    } else if (column.datatype == "bool") {
      char value = cell == "True" ? 1 : 0;
      call(fits_write_col(file_, TLOGICAL, number, row, 1, 1, &value, &status_));
    } else {
      std::string text = ascii(cell);
      char* pointer = text.data();
      call(fits_write_col(file_, TSTRING, number, row, 1, 1, &pointer, &status_));
    }
  }

  static void call(int status) {
    if (status == 0) return;
    std::array<char, FLEN_ERRMSG> text{};
    fits_get_errstatus(status, text.data());
    fits_clear_errmsg();
    throw SystemError(fmt::format("a FITS table cannot be made: {}", text.data()));
  }

  fitsfile* file_ = nullptr;
  void* buffer_ = nullptr;
  std::size_t size_ = 0;
  int status_ = 0;
};

}  // namespace

std::string to_fits(const IntensityTable& table) {
  const std::vector<OutColumn> columns = out_columns(table);
  MemoryFile file;
  file.make_table(columns, table.rows.size());
  for (const auto& [name, value] : table.provenance) file.history(name + ": " + value);
  for (std::size_t i = 0; i < columns.size(); ++i) file.fill(columns[i], static_cast<int>(i) + 1);
  return file.bytes();
}

}  // namespace trotline
