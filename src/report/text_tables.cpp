#include <fmt/format.h>

#include <array>
#include <charconv>
#include <cmath>
#include <cstdio>
#include <cstring>

#include <trotline/base/errors.hpp>
#include <trotline/base/version.hpp>
#include <trotline/report/display_text.hpp>
#include <trotline/report/text_tables.hpp>

#include "json_document.hpp"

namespace trotline {
namespace {

/// A file that is written to its end or complains.
class TextFile {
 public:
  explicit TextFile(const std::filesystem::path& path)
      : path_(path.string()), file_(std::fopen(path_.c_str(), "wb")) {
    if (file_ == nullptr) refuse();
  }
  TextFile(const TextFile&) = delete;
  TextFile& operator=(const TextFile&) = delete;
  ~TextFile() {
    if (file_ != nullptr) std::fclose(file_);
  }

  void write(const std::string& text) {
    if (std::fwrite(text.data(), 1, text.size(), file_) != text.size()) refuse();
  }

  void close() {
    std::FILE* file = std::exchange(file_, nullptr);
    if (std::fclose(file) != 0) refuse();
  }

 private:
  [[noreturn]] void refuse() const {
    throw SystemError(fmt::format("the table {} cannot be written: {}", path_, std::strerror(errno)));
  }

  std::string path_;
  std::FILE* file_;
};

/// The fewest digits that read back, with the point that YAML 1.1 wants before an exponent. Large whole numbers
/// have an exponent too: trailing zeros would pass for digits.
std::string number_text(double number) {
  constexpr double kPlainBelow = 1e7;
  std::string text = fmt::format("{}", number);
  if (std::abs(number) >= kPlainBelow && text.find_first_of(".e") == std::string::npos) {
    std::array<char, 32> shortest{};
    const auto end = std::to_chars(shortest.begin(), shortest.end(), number, std::chars_format::scientific);
    text.assign(shortest.begin(), end.ptr);
  }
  const std::size_t power = text.find('e');
  if (power != std::string::npos && text.find('.') == std::string::npos) text.insert(power, ".0");
  return text;
}

bool is_known(const Cell& cell) {
  if (std::holds_alternative<std::monostate>(cell)) return false;
  const double* number = std::get_if<double>(&cell);
  return number == nullptr || std::isfinite(*number);
}

/// A cell that is known, without quotes.
std::string plain_text(const Cell& cell, const char* yes, const char* no) {
  if (const auto* text = std::get_if<std::string>(&cell)) return display_text(*text);
  if (const auto* number = std::get_if<double>(&cell)) return number_text(*number);
  if (const auto* flag = std::get_if<bool>(&cell)) return *flag ? yes : no;
  return fmt::format("{}", std::get<std::int64_t>(cell));
}

std::string quoted(const std::string& text) {
  std::string result = "\"";
  for (const char c : text) result += c == '"' ? std::string("\"\"") : std::string(1, c);
  return result + "\"";
}

/// A cell of CSV or ECSV. A text is quoted where it could be taken for something else, and when it is empty,
/// which tells it from one that is not known.
std::string csv_cell(const Cell& cell, const char* yes, const char* no) {
  if (!is_known(cell)) return "";
  const std::string text = plain_text(cell, yes, no);
  if (!std::holds_alternative<std::string>(cell)) return text;
  const bool bare = !text.empty() && text.find_first_of(" ,\"#'") == std::string::npos;
  return bare ? text : quoted(text);
}

/// YAML in double quotes: JSON's quoting is YAML's, once controls are gone.
std::string yaml_text(const std::string& text) {
  return Json(display_text(text)).dump(-1, ' ', false, Json::error_handler_t::replace);
}

class DelimitedWriter : public TableWriter {
 public:
  DelimitedWriter(const std::filesystem::path& path, const std::vector<TableColumn>& columns, const char* yes,
                  const char* no)
      : file_(path), columns_(columns), yes_(yes), no_(no) {}

  void write(const std::string& text) { file_.write(text); }

  void add(const std::vector<Cell>& cells) override {
    std::string row;
    for (std::size_t i = 0; i < columns_.size(); ++i)
      row += (i > 0 ? "," : "") + csv_cell(cells.at(i), yes_, no_);
    file_.write(row + "\n");
  }

  void finish() override { file_.close(); }

 private:
  TextFile file_;
  std::vector<TableColumn> columns_;
  const char* yes_;
  const char* no_;
};

const char* ecsv_type(CellType type) {
  switch (type) {
    case CellType::text:
      return "string";
    case CellType::whole:
      return "int64";
    case CellType::flag:
      return "bool";
    case CellType::number:
      break;
  }
  return "float64";
}

std::string ecsv_header(const std::vector<TableColumn>& columns, const TableMeta& meta) {
  std::string text = "# %ECSV 1.0\n# ---\n# delimiter: ','\n# datatype:\n";
  for (const TableColumn& column : columns) {
    const std::string unit = column.unit.empty() ? "" : fmt::format("unit: {}, ", yaml_text(column.unit));
    text += fmt::format("# - {{name: {}, {}datatype: {}, description: {}}}\n", column.name, unit,
                        ecsv_type(column.type), yaml_text(column.description));
  }
  if (!meta.empty()) text += "# meta:\n";
  for (const auto& [key, value] : meta) text += fmt::format("#   {}: {}\n", key, yaml_text(value));
  for (std::size_t i = 0; i < columns.size(); ++i) text += (i > 0 ? "," : "") + columns[i].name;
  return text + "\n";
}

std::string xml_text(const std::string& raw) {
  std::string text;
  for (const char c : display_text(raw)) {
    switch (c) {
      case '&':
        text += "&amp;";
        break;
      case '<':
        text += "&lt;";
        break;
      case '>':
        text += "&gt;";
        break;
      case '"':
        text += "&quot;";
        break;
      default:
        text += c;
    }
  }
  return text;
}

const char* votable_type(CellType type) {
  switch (type) {
    case CellType::text:
      return "datatype=\"unicodeChar\" arraysize=\"*\"";
    case CellType::whole:
      return "datatype=\"long\"";
    case CellType::flag:
      return "datatype=\"boolean\"";
    case CellType::number:
      break;
  }
  return "datatype=\"double\"";
}

/// "cm-2" as VOUnits 1.0 spells it: "cm**-2".
std::string vounit(const std::string& unit) {
  std::string text;
  for (std::size_t i = 0; i < unit.size(); ++i) {
    const bool is_power = i > 0 && std::isalpha(static_cast<unsigned char>(unit[i - 1])) &&
                          (unit[i] == '-' || std::isdigit(static_cast<unsigned char>(unit[i])));
    if (is_power) text += "**";
    text += unit[i] == ' ' ? '.' : unit[i];
  }
  return text;
}

class VotableWriter : public TableWriter {
 public:
  VotableWriter(const std::filesystem::path& path, const std::vector<TableColumn>& columns,
                const TableMeta& meta)
      : file_(path), columns_(columns) {
    file_.write(
        "<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n"
        "<VOTABLE version=\"1.4\" xmlns=\"http://www.ivoa.net/xml/VOTable/v1.3\">\n"
        "<RESOURCE type=\"results\">\n<TABLE name=\"results\">\n");
    for (const auto& [key, value] : meta) {
      file_.write(fmt::format("<PARAM name=\"{}\" datatype=\"unicodeChar\" arraysize=\"*\" value=\"{}\"/>\n",
                              xml_text(key), xml_text(value)));
    }
    for (const TableColumn& column : columns_) file_.write(field(column));
    file_.write("<DATA>\n<TABLEDATA>\n");
  }

  void add(const std::vector<Cell>& cells) override {
    std::string row = "<TR>";
    for (std::size_t i = 0; i < columns_.size(); ++i) {
      const bool known = is_known(cells.at(i));
      const std::string nothing = columns_[i].type == CellType::number ? "NaN" : "";
      row += "<TD>" + (known ? xml_text(plain_text(cells[i], "true", "false")) : nothing) + "</TD>";
    }
    file_.write(row + "</TR>\n");
  }

  void finish() override {
    file_.write("</TABLEDATA>\n</DATA>\n</TABLE>\n</RESOURCE>\n</VOTABLE>\n");
    file_.close();
  }

 private:
  static std::string field(const TableColumn& column) {
    const std::string unit =
        column.unit.empty() ? "" : fmt::format(" unit=\"{}\"", xml_text(vounit(column.unit)));
    return fmt::format("<FIELD name=\"{}\" {}{}><DESCRIPTION>{}</DESCRIPTION></FIELD>\n",
                       xml_text(column.name), votable_type(column.type), unit, xml_text(column.description));
  }

  TextFile file_;
  std::vector<TableColumn> columns_;
};

}  // namespace

std::unique_ptr<TableWriter> ecsv_writer(const std::filesystem::path& path,
                                         const std::vector<TableColumn>& columns, const TableMeta& meta) {
  auto writer = std::make_unique<DelimitedWriter>(path, columns, "True", "False");
  writer->write(ecsv_header(columns, meta));
  return writer;
}

std::unique_ptr<TableWriter> csv_writer(const std::filesystem::path& path,
                                        const std::vector<TableColumn>& columns) {
  auto writer = std::make_unique<DelimitedWriter>(path, columns, "true", "false");
  std::string header;
  for (const TableColumn& column : columns) {
    header +=
        (header.empty() ? "" : ",") + column.name + (column.unit.empty() ? "" : " [" + column.unit + "]");
  }
  writer->write(header + "\n");
  return writer;
}

std::unique_ptr<TableWriter> votable_writer(const std::filesystem::path& path,
                                            const std::vector<TableColumn>& columns, const TableMeta& meta) {
  return std::make_unique<VotableWriter>(path, columns, meta);
}

}  // namespace trotline
