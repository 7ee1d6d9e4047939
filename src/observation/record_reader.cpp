#include <trotline/base/text.hpp>

#include "raw_table.hpp"

namespace trotline::raw {
namespace {

bool is_blank(char c) { return c == ' ' || c == '\t' || c == '\v' || c == '\f'; }

std::size_t line_of(std::string_view text, std::size_t at) {
  std::size_t line = 1;
  for (std::size_t i = 0; i < at; ++i) {
    if (text[i] == '\n' || (text[i] == '\r' && (i + 1 == text.size() || text[i + 1] != '\n'))) ++line;
  }
  return line;
}

/// Offset of the first byte of the first line that is not UTF-8.
std::size_t first_bad_byte(std::string_view text) {
  std::size_t start = 0;
  while (start < text.size()) {
    const std::size_t end = std::min(text.find('\n', start), text.size());
    if (!is_utf8(text.substr(start, end - start))) return start;
    start = end + 1;
  }
  return 0;
}

}  // namespace

bool RecordReader::at_separator() const {
  return separator_ == Separator::comma ? text_[at_] == ',' : is_blank(text_[at_]);
}

void RecordReader::skip_blanks() {
  while (!at_end() && is_blank(text_[at_])) ++at_;
}

void RecordReader::skip_line_end() {
  if (at_end()) return;
  if (text_[at_] == '\r' && at_ + 1 < text_.size() && text_[at_ + 1] == '\n') ++at_;
  ++at_;
  ++line_;
}

bool RecordReader::skip_to_content() {
  while (!at_end()) {
    skip_blanks();
    if (!at_end() && text_[at_] == '#') {
      while (!at_line_end()) ++at_;
    }
    if (!at_line_end()) return true;
    skip_line_end();
  }
  return false;
}

Field RecordReader::read_quoted() {
  const std::size_t opened = line_;
  Field field{.text = {}, .quoted = true};
  ++at_;
  while (true) {
    if (at_end()) {
      throw InputError(Place{file_, opened},
                       {"a quotation mark opens here and is never closed", "a closing '\"'"});
    }
    if (text_[at_] == '"') {
      if (at_ + 1 >= text_.size() || text_[at_ + 1] != '"') break;
      ++at_;  // a doubled mark stands for one
    }
    const bool line_ends =
        text_[at_] == '\n' || (text_[at_] == '\r' && (at_ + 1 >= text_.size() || text_[at_ + 1] != '\n'));
    if (line_ends) ++line_;
    field.text += text_[at_++];
  }
  ++at_;
  return field;
}

Field RecordReader::read_field() {
  if (!at_end() && text_[at_] == '"') {
    Field field = read_quoted();
    if (separator_ == Separator::comma) skip_blanks();
    if (!at_line_end() && !at_separator()) {
      throw InputError(Place{file_, line_}, {"text follows a closing quotation mark",
                                             "the end of the cell; write a quotation mark inside as '\"\"'"});
    }
    return field;
  }
  const std::size_t start = at_;
  while (!at_line_end() && !at_separator()) ++at_;
  return {.text = std::string(trimmed(text_.substr(start, at_ - start))), .quoted = false};
}

std::optional<Record> RecordReader::next() {
  if (!skip_to_content()) return std::nullopt;
  Record record{.line = line_, .fields = {}};
  while (true) {
    skip_blanks();
    if (separator_ == Separator::white_space && at_line_end()) break;
    record.fields.push_back(read_field());
    if (at_line_end()) break;
    ++at_;  // over the separator
  }
  skip_line_end();
  return record;
}

std::optional<Line> RecordReader::next_line() {
  if (!skip_to_content()) return std::nullopt;
  const std::size_t start = at_;
  while (!at_line_end()) ++at_;
  const Line line{.number = line_, .text = text_.substr(start, at_ - start)};
  skip_line_end();
  return line;
}

std::vector<Row> read_rows(RecordReader& reader, const std::string& file, std::size_t columns) {
  std::vector<Row> rows;
  while (auto record = reader.next()) {
    if (record->fields.size() != columns) {
      throw InputError(
          Place{file, record->line},
          {fmt::format("{} cells in this row", record->fields.size()),
           fmt::format("{}, one for each column of the header", columns),
           "quote a cell that holds the separator, and write \"\" for a cell that is not given"});
    }
    Row row{.line = record->line, .cells = {}};
    row.cells.reserve(columns);
    for (Field& field : record->fields) row.cells.push_back(std::move(field.text));
    rows.push_back(std::move(row));
  }
  return rows;
}

std::string_view checked_text(std::string_view bytes, const std::string& file) {
  if (bytes.starts_with("\xEF\xBB\xBF")) bytes.remove_prefix(3);
  if (bytes.starts_with("\xFF\xFE") || bytes.starts_with("\xFE\xFF")) {
    throw InputError(Place{file, 1}, {"the file begins like text in UTF-16", "text in UTF-8"});
  }
  if (const std::size_t nul = bytes.find('\0'); nul != std::string_view::npos) {
    throw InputError(Place{file, line_of(bytes, nul)}, {"a NUL byte stands in the text", "text in UTF-8"});
  }
  if (!is_utf8(bytes)) {
    throw InputError(Place{file, line_of(bytes, first_bad_byte(bytes))},
                     {"bytes that are not UTF-8 stand in this line", "text in UTF-8"});
  }
  return bytes;
}

}  // namespace trotline::raw
