#include <trotline/base/files.hpp>
#include <trotline/base/text.hpp>
#include <trotline/observation/intensity_table.hpp>

#include "raw_table.hpp"

namespace trotline {
namespace {

constexpr std::size_t kLargestTable = std::size_t{256} << 20;

std::string_view first_line_of_content(std::string_view text) {
  raw::RecordReader reader(text, {}, 1, raw::Separator::comma);
  const auto line = reader.next_line();
  return line ? line->text : std::string_view{};
}

raw::Table parse_as(TableFormat format, std::string_view bytes, const std::string& name) {
  if (format == TableFormat::fits) return raw::parse_fits(bytes, name);
  return raw::parse_text(format, raw::checked_text(bytes, name), name);
}

}  // namespace

namespace raw {

TableFormat recognised(std::string_view bytes) {
  if (bytes.starts_with("SIMPLE  =")) return TableFormat::fits;
  if (bytes.starts_with("\xEF\xBB\xBF")) bytes.remove_prefix(3);
  if (bytes.starts_with("# %ECSV")) return TableFormat::ecsv;
  return first_line_of_content(bytes).find(',') == std::string_view::npos ? TableFormat::text
                                                                          : TableFormat::csv;
}

void refuse_other_formats(std::string_view bytes, const std::string& name) {
  const auto refuse = [&](const char* what, const char* advice) {
    throw InputError(Place{name},
                     {fmt::format("this is {}", what), "a table as ECSV, CSV, text or FITS", advice});
  };
  if (bytes.starts_with("\x1F\x8B")) refuse("a gzip file", "unpack it first");
  if (bytes.starts_with("PK\x03\x04")) refuse("a zip file or a spreadsheet", "save the sheet as CSV");
  if (trimmed(bytes.substr(0, 256)).starts_with("<?xml"))
    refuse("an XML file", "VOTable is not read; save it as ECSV");
}

Table parse_text(TableFormat format, std::string_view text, const std::string& file) {
  if (format == TableFormat::ecsv) return parse_ecsv(text, file);
  return format == TableFormat::csv ? parse_csv(text, file) : parse_words(text, file);
}

}  // namespace raw

IntensityTable parse_intensity_table(std::string_view bytes, const std::string& name, TableFormat format) {
  if (bytes.size() > kLargestTable) {
    throw InputError(Place{name}, {fmt::format("holds {} bytes", bytes.size()),
                                   fmt::format("a table of at most {} bytes", kLargestTable)});
  }
  raw::refuse_other_formats(bytes, name);
  if (format == TableFormat::automatic) format = raw::recognised(bytes);
  return raw::interpret(parse_as(format, bytes, name));
}

IntensityTable read_intensity_table(const std::string& path, TableFormat format) {
  const std::string bytes = read_file(path, kLargestTable);
  return parse_intensity_table(bytes, path == "-" ? "standard input" : path, format);
}

}  // namespace trotline
