#include <trotline/base/text.hpp>

#include "raw_table.hpp"

namespace trotline::raw {
namespace {

constexpr const char* kUnitPlace = "written as in 'intensity [K km/s]' in the header line";

void refuse_numbers_as_header(const Table& table) {
  for (const Column& column : table.columns) {
    if (parse_number(column.name)) {
      throw InputError(
          Place{table.file, table.header_line},
          {fmt::format("the first line holds the number '{}'", printable(column.name)),
           "a header line with the names of the columns", "a header line does not begin with '#'"});
    }
  }
}

/// "intensity [K km/s]" into name and unit.
Column split_name_and_unit(std::string_view text, const Place& place) {
  const std::size_t open = text.find('[');
  if (open == std::string_view::npos) return {std::string(trimmed(text)), std::nullopt};
  const std::string_view rest = trimmed(text.substr(open + 1));
  if (!rest.ends_with(']')) {
    throw InputError(place, {fmt::format("'{}' opens a unit with '[' and does not close it", printable(text)),
                             "a column such as 'intensity [K km/s]'"});
  }
  return {std::string(trimmed(text.substr(0, open))), std::string(trimmed(rest.substr(0, rest.size() - 1)))};
}

/// Takes the first column off a header line of white-space text.
Column take_column(std::string_view& rest, const Place& place) {
  Column column;
  if (rest.front() == '"') {
    const std::size_t close = rest.find('"', 1);
    if (close == std::string_view::npos) {
      throw InputError(place, {"a quotation mark in the header is never closed", "a closing '\"'"});
    }
    column = split_name_and_unit(rest.substr(1, close - 1), place);
    rest = trimmed(rest.substr(close + 1));
    if (column.unit) return column;
  } else {
    const std::size_t end = std::min(rest.find_first_of(" \t["), rest.size());
    column.name = rest.substr(0, end);
    rest = trimmed(rest.substr(end));
  }
  if (!rest.starts_with('[')) return column;
  const std::size_t close = rest.find(']');
  if (close == std::string_view::npos) {
    throw InputError(place, {fmt::format("the unit of column '{}' is not closed", printable(column.name)),
                             "']' after the unit"});
  }
  column.unit = std::string(trimmed(rest.substr(1, close - 1)));
  rest = trimmed(rest.substr(close + 1));
  return column;
}

[[noreturn]] void refuse_empty(const std::string& file) {
  throw InputError(Place{file},
                   {"the table is empty", "a header line with the names of the columns, then rows"});
}

}  // namespace

Table parse_csv(std::string_view text, const std::string& file) {
  RecordReader reader(text, file, 1, Separator::comma);
  const auto header = reader.next();
  if (!header) refuse_empty(file);
  Table table{.file = file, .header_line = header->line, .columns = {}, .rows = {}, .unit_place = kUnitPlace};
  for (const Field& field : header->fields) {
    table.columns.push_back(split_name_and_unit(field.text, Place{file, header->line}));
  }
  refuse_numbers_as_header(table);
  table.rows = read_rows(reader, file, table.columns.size());
  return table;
}

Table parse_words(std::string_view text, const std::string& file) {
  RecordReader reader(text, file, 1, Separator::white_space);
  const auto header = reader.next_line();
  if (!header) refuse_empty(file);
  std::string_view rest = trimmed(header->text);
  const Place place{file, header->number};
  if (rest.find(';') != std::string_view::npos) {
    throw InputError(place,
                     {"the header line is separated by ';'", "columns separated by commas or white space"});
  }
  Table table{.file = file, .header_line = place.line, .columns = {}, .rows = {}, .unit_place = kUnitPlace};
  table.separator = Separator::white_space;
  while (!rest.empty()) table.columns.push_back(take_column(rest, place));
  refuse_numbers_as_header(table);
  table.rows = read_rows(reader, file, table.columns.size());
  return table;
}

}  // namespace trotline::raw
