// A table of text cells: what every format of an intensity table is turned into before its columns get a
// meaning.
#pragma once

#include <cstddef>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include <trotline/observation/intensity_table.hpp>

namespace trotline::raw {

enum class Separator { comma, white_space };

struct Column {
  std::string name;
  std::optional<std::string> unit;
  std::string trouble =
      {};  ///< why no cell can hold one value (e.g. a vector column); matters where it is used
  std::string datatype = {};  ///< as ECSV names it; empty in formats without
};

struct Row {
  std::size_t line = 0;            ///< line of the text or row of the binary table, from 1
  std::vector<std::string> cells;  ///< one a column; empty: not given
};

struct Table {
  std::string file;
  std::size_t header_line = 0;
  std::vector<Column> columns;
  std::vector<Row> rows;
  std::string unit_place;                  ///< where a unit is written in this format, for advice in messages
  Separator separator = Separator::comma;  ///< between the cells of a row of text
};

/// One field of a line of text.
struct Field {
  std::string text;
  bool quoted = false;
};

struct Record {
  std::size_t line = 0;  ///< where it starts
  std::vector<Field> fields;
};

/// A line of text with its number.
struct Line {
  std::size_t number = 0;
  std::string_view text;
};

/// Cuts a text into records: RFC 4180 quoting (doubled quotation marks, quoted line breaks), lines that
/// end in LF, CRLF or CR, `#` comments and blank lines passed over.
class RecordReader {
 public:
  RecordReader(std::string_view text, std::string file, std::size_t first_line, Separator separator)
      : text_(text), file_(std::move(file)), line_(first_line), separator_(separator) {}

  /// The next record, or nothing at the end. @throws InputError for a quotation mark that is not closed
  [[nodiscard]] std::optional<Record> next();

  /// The next line that is neither blank nor a comment, as it stands; nothing at the end.
  [[nodiscard]] std::optional<Line> next_line();

  /// How many bytes of the text have been read, and the number of the line that comes next.
  [[nodiscard]] std::size_t position() const { return at_; }
  [[nodiscard]] std::size_t line() const { return line_; }

 private:
  [[nodiscard]] bool at_end() const { return at_ >= text_.size(); }
  [[nodiscard]] bool at_line_end() const { return at_end() || text_[at_] == '\n' || text_[at_] == '\r'; }
  [[nodiscard]] bool at_separator() const;
  void skip_blanks();
  void skip_line_end();
  bool skip_to_content();
  Field read_field();
  Field read_quoted();

  std::string_view text_;
  std::string file_;
  std::size_t at_ = 0;
  std::size_t line_;
  Separator separator_;
};

/// All further records as rows with exactly `columns` cells. @throws InputError for a row of another length
std::vector<Row> read_rows(RecordReader& reader, const std::string& file, std::size_t columns);

/// A column of whole numbers (by its datatype) holds whole numbers: a cell that does not is a slip somewhere.
void require_types(const Table& table);

/// The format of a table, by its first bytes.
TableFormat recognised(std::string_view bytes);

/// Refuses files that are no table at all, by their first bytes.
void refuse_other_formats(std::string_view bytes, const std::string& name);

/// Refuses a text that is not UTF-8 or holds NUL bytes, with the line; returns it without byte-order mark.
std::string_view checked_text(std::string_view bytes, const std::string& file);

Table parse_csv(std::string_view text, const std::string& file);
Table parse_words(std::string_view text, const std::string& file);
Table parse_ecsv(std::string_view text, const std::string& file);
/// One of the three above. @param format  not FITS
Table parse_text(TableFormat format, std::string_view text, const std::string& file);
Table parse_fits(std::string_view bytes, const std::string& file);

/// Gives the columns their meaning: names, units, domains.
IntensityTable interpret(const Table& table);

/// Throws what interpret() would throw for columns alone, whatever the rows.
void check_header(const Table& table);

}  // namespace trotline::raw
