#include <yaml-cpp/yaml.h>

#include <array>

#include <trotline/base/text.hpp>

#include "raw_table.hpp"

// The format: Aldcroft 2013, "Enhanced Character Separated Values", astropy proposal for enhancement 6
// (APE6); its header is YAML in lines that begin with "# ".
namespace trotline::raw {
namespace {

struct Header {
  std::string yaml;
  std::size_t lines = 0;  ///< lines of the file that it takes, the format line included
  std::string_view rest;  ///< the text after it
};

std::string_view take_line(std::string_view& text) {
  const std::size_t end = text.find('\n');
  std::string_view line = text.substr(0, end);
  text = end == std::string_view::npos ? std::string_view{} : text.substr(end + 1);
  if (line.ends_with('\r')) line.remove_suffix(1);
  return line;
}

Header take_header(std::string_view text, const std::string& file) {
  constexpr std::size_t kLargestHeader = 1 << 20;
  const std::string_view format_line = trimmed(take_line(text));
  if (!format_line.starts_with("# %ECSV 1.")) {
    throw InputError(
        Place{file, 1},
        {fmt::format("the first line is '{}'", printable(format_line.substr(0, 40))), "'# %ECSV 1.0'"});
  }
  Header header{.yaml = {}, .lines = 1, .rest = text};
  while (header.rest.starts_with('#')) {
    std::string_view line = take_line(header.rest);
    line.remove_prefix(line.starts_with("# ") ? 2 : 1);
    header.yaml.append(line).append("\n");
    ++header.lines;
    if (header.yaml.size() > kLargestHeader) {
      throw InputError(Place{file, header.lines}, {"the header is larger than 1 MiB", "an ECSV header"});
    }
  }
  return header;
}

YAML::Node load(const Header& header, const std::string& file) {
  try {
    return YAML::Load(header.yaml);
  } catch (const YAML::Exception& error) {
    const std::size_t line = error.mark.is_null() ? 1 : static_cast<std::size_t>(error.mark.line) + 2;
    throw InputError(Place{file, line}, {"the header is no valid YAML: " + printable(error.msg),
                                         "an ECSV header, each line of it after '# '"});
  }
}

std::string scalar(const YAML::Node& map, const char* key) {
  const YAML::Node node = map[key];
  return node && node.IsScalar() ? node.Scalar() : std::string{};
}

Separator separator_of(const YAML::Node& header, const std::string& file) {
  const YAML::Node node = header["delimiter"];
  if (!node || (node.IsScalar() && node.Scalar() == " ")) return Separator::white_space;
  if (node.IsScalar() && node.Scalar() == ",") return Separator::comma;
  throw InputError(Place{file, 1},
                   {"the header names another delimiter", "delimiter: ',' or delimiter: ' '"});
}

Column column_of(const YAML::Node& node, const Place& place) {
  static constexpr std::array<const char*, 15> kTypes = {
      "bool",   "int8",    "int16",   "int32",   "int64",    "uint8",  "uint16",    "uint32",
      "uint64", "float16", "float32", "float64", "float128", "string", "complex128"};
  if (!node.IsMap() || scalar(node, "name").empty() || scalar(node, "datatype").empty()) {
    throw InputError(place, {"an entry of 'datatype' in the header lacks its name or datatype",
                             "entries such as {name: intensity, unit: K km / s, datatype: float64}"});
  }
  Column column{.name = scalar(node, "name"), .unit = std::nullopt, .datatype = scalar(node, "datatype")};
  if (node["unit"]) column.unit = scalar(node, "unit");
  if (std::find(kTypes.begin(), kTypes.end(), column.datatype) == kTypes.end()) {
    throw InputError(place, {fmt::format("column '{}' has the datatype '{}'", printable(column.name),
                                         printable(column.datatype)),
                             "a datatype of ECSV 1.0, such as float64, int64, bool or string"});
  }
  return column;
}

std::vector<Column> columns_of(const YAML::Node& header, const std::string& file) {
  const YAML::Node list = header.IsMap() ? header["datatype"] : YAML::Node{};
  if (!list || !list.IsSequence() || list.size() == 0) {
    throw InputError(Place{file, 1},
                     {"the header lists no columns", "'datatype:' and one entry for each column"});
  }
  std::vector<Column> columns;
  for (const YAML::Node& node : list) {
    const std::size_t line = node.Mark().is_null() ? 1 : static_cast<std::size_t>(node.Mark().line) + 2;
    columns.push_back(column_of(node, Place{file, line}));
  }
  return columns;
}

void require_same_names(const std::vector<Column>& columns, const Record& names, const std::string& file) {
  const auto refuse = [&](const std::string& found, const std::string& expected) {
    throw InputError(Place{file, names.line}, {found, expected, "the line of names must repeat the header"});
  };
  if (columns.size() != names.fields.size()) {
    refuse(fmt::format("{} names of columns", names.fields.size()), fmt::format("{}", columns.size()));
  }
  for (std::size_t i = 0; i < columns.size(); ++i) {
    if (names.fields[i].text == columns[i].name) continue;
    refuse(fmt::format("column {} is named '{}'", i + 1, printable(names.fields[i].text)),
           fmt::format("'{}'", printable(columns[i].name)));
  }
}

}  // namespace

void require_types(const Table& table) {
  for (std::size_t i = 0; i < table.columns.size(); ++i) {
    const std::string& type = table.columns[i].datatype;
    if (!type.starts_with("int") && !type.starts_with("uint")) continue;
    for (const Row& row : table.rows) {
      if (row.cells[i].empty() || parse_whole_number(row.cells[i])) continue;
      throw InputError(
          Place{table.file, row.line},
          {fmt::format("column '{}' holds '{}'", printable(table.columns[i].name), printable(row.cells[i])),
           fmt::format("a whole number, as its datatype {} says", type)});
    }
  }
}

Table parse_ecsv(std::string_view text, const std::string& file) {
  const Header header = take_header(text, file);
  const YAML::Node yaml = load(header, file);
  std::vector<Column> columns = columns_of(yaml, file);
  RecordReader reader(header.rest, file, header.lines + 1, separator_of(yaml, file));
  const auto names = reader.next();
  if (!names) {
    throw InputError(Place{file, header.lines},
                     {"the file ends after its header", "a line with the column names"});
  }
  require_same_names(columns, *names, file);
  Table table{.file = file,
              .header_line = names->line,
              .columns = std::move(columns),
              .rows = {},
              .unit_place = "written as 'unit:' in the header's entry of the column"};
  table.separator = separator_of(yaml, file);
  table.rows = read_rows(reader, file, table.columns.size());
  require_types(table);
  return table;
}

}  // namespace trotline::raw
