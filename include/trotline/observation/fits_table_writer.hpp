#pragma once

#include <filesystem>
#include <memory>
#include <string>
#include <vector>

#include <trotline/base/table.hpp>

namespace trotline {

/// Writes a table as the first extension of a FITS file (FITS standard 4.0, section 7.3), with TTYPE, TUNIT
/// and the description as TCOMM. What is not known is NaN, a null whole number, an undefined flag or an empty
/// text. FITS knows ASCII only: other characters of a text become "\u{1F31F}" and the like, so the widths of
/// texts are those of ascii_text().
/// @param path  must not exist  @param extension  EXTNAME
/// @throws SystemError when it cannot be written
[[nodiscard]] std::unique_ptr<TableWriter> fits_table_writer(const std::filesystem::path& path,
                                                             const std::string& extension,
                                                             const std::vector<TableColumn>& columns);

/// `text` in printable ASCII: other characters as "\u{1F31F}", bytes that are no UTF-8 as "\u{FFFD}".
[[nodiscard]] std::string ascii_text(std::string_view text);

}  // namespace trotline
