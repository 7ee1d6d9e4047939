#include <fitsio.h>
#include <fmt/format.h>

#include <array>
#include <cmath>
#include <limits>

#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/observation/fits_table_writer.hpp>

namespace trotline {
namespace {

constexpr std::int64_t kNoWholeNumber = std::numeric_limits<std::int64_t>::min();

std::string form_of(const TableColumn& column) {
  switch (column.type) {
    case CellType::text:
      return fmt::format("{}A", std::max<std::size_t>(column.width, 1));
    case CellType::whole:
      return "1K";
    case CellType::flag:
      return "1L";
    case CellType::number:
      break;
  }
  return "1D";
}

/// The code point that begins at `at`, which moves behind it; the text is UTF-8.
char32_t take_code_point(std::string_view text, std::size_t& at) {
  const auto lead = static_cast<unsigned char>(text[at++]);
  const int more = lead >= 0xF0 ? 3 : lead >= 0xE0 ? 2 : lead >= 0xC0 ? 1 : 0;
  char32_t point = more == 0 ? lead : lead & (0x3FU >> more);
  for (int i = 0; i < more; ++i) point = (point << 6) | (static_cast<unsigned char>(text[at++]) & 0x3FU);
  return point;
}

class FitsTableWriter : public TableWriter {
 public:
  FitsTableWriter(const std::filesystem::path& path, const std::string& extension,
                  const std::vector<TableColumn>& columns)
      : path_(path.string()), columns_(columns) {
    int status = 0;
    fits_create_diskfile(&file_, path_.c_str(), &status);
    check(status);
    create(extension);
    for (std::size_t i = 0; i < columns_.size(); ++i) describe(i);
  }

  ~FitsTableWriter() override {
    int ignored = 0;
    if (file_ != nullptr) fits_close_file(file_, &ignored);
    fits_clear_errmsg();
  }

  void add(const std::vector<Cell>& cells) override {
    ++row_;
    for (std::size_t i = 0; i < columns_.size(); ++i)
      write(static_cast<int>(i) + 1, columns_[i], cells.at(i));
  }

  void finish() override {
    int status = 0;
    // No CHECKSUM: the library dates its comment, and the same results must give the same bytes.
    fits_close_file(file_, &status);
    file_ = nullptr;
    check(status);
  }

 private:
  void check(int status) const {
    if (status == 0) return;
    std::array<char, FLEN_ERRMSG> text{};
    fits_get_errstatus(status, text.data());
    fits_clear_errmsg();
    throw SystemError(fmt::format("the FITS table {} cannot be written: {}", path_, text.data()));
  }

  void create(const std::string& extension) {
    std::vector<std::string> texts;
    for (const TableColumn& column : columns_) {
      texts.insert(texts.end(), {column.name, form_of(column), column.unit});
    }
    std::array<std::vector<char*>, 3> pointers;
    for (std::size_t i = 0; i < texts.size(); ++i) pointers.at(i % 3).push_back(texts[i].data());
    int status = 0;
    fits_create_tbl(file_, BINARY_TBL, 0, static_cast<int>(columns_.size()), pointers[0].data(),
                    pointers[1].data(), pointers[2].data(), extension.c_str(), &status);
    check(status);
  }

  void describe(std::size_t index) {
    int status = 0;
    const std::string number = fmt::format("{}", index + 1);
    fits_write_key_longstr(file_, ("TCOMM" + number).c_str(), columns_[index].description.c_str(), nullptr,
                           &status);
    fits_write_key_longwarn(file_, &status);
    if (columns_[index].type == CellType::whole) {
      fits_write_key_lng(file_, ("TNULL" + number).c_str(), kNoWholeNumber, "stands for: not known", &status);
      fits_set_btblnull(file_, static_cast<int>(index) + 1, kNoWholeNumber, &status);
    }
    check(status);
  }

  void write(int column, const TableColumn& type, const Cell& cell) {
    int status = 0;
    if (type.type == CellType::text) {
      std::string text =
          std::holds_alternative<std::string>(cell) ? ascii_text(std::get<std::string>(cell)) : "";
      char* pointer = text.data();
      fits_write_col(file_, TSTRING, column, row_, 1, 1, &pointer, &status);
    } else if (type.type == CellType::whole) {
      LONGLONG number =
          std::holds_alternative<std::int64_t>(cell) ? std::get<std::int64_t>(cell) : kNoWholeNumber;
      fits_write_col(file_, TLONGLONG, column, row_, 1, 1, &number, &status);
    } else if (type.type == CellType::flag) {
      if (std::holds_alternative<bool>(cell)) {
        char flag = std::get<bool>(cell) ? 1 : 0;
        fits_write_col(file_, TLOGICAL, column, row_, 1, 1, &flag, &status);
      } else {
        fits_write_col_null(file_, column, row_, 1, 1, &status);
      }
    } else {
      double number = std::holds_alternative<double>(cell) ? std::get<double>(cell) : std::nan("");
      fits_write_col(file_, TDOUBLE, column, row_, 1, 1, &number, &status);
    }
    check(status);
  }

  std::string path_;
  std::vector<TableColumn> columns_;
  fitsfile* file_ = nullptr;
  LONGLONG row_ = 0;
};

}  // namespace

std::string ascii_text(std::string_view raw) {
  const std::string text = printable(raw);  // valid UTF-8 from here on
  std::string ascii;
  for (std::size_t at = 0; at < text.size();) {
    const char32_t point = take_code_point(text, at);
    if (point < 0x7F)
      ascii += static_cast<char>(point);
    else
      ascii += fmt::format("\\u{{{:X}}}", static_cast<std::uint32_t>(point));
  }
  return ascii;
}

std::unique_ptr<TableWriter> fits_table_writer(const std::filesystem::path& path,
                                               const std::string& extension,
                                               const std::vector<TableColumn>& columns) {
  return std::make_unique<FitsTableWriter>(path, extension, columns);
}

}  // namespace trotline
