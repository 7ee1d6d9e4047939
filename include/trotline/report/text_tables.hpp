#pragma once

#include <filesystem>
#include <memory>
#include <string>
#include <utility>
#include <vector>

#include <trotline/base/table.hpp>

namespace trotline {

/// What stands above a table: names and texts, in this order.
using TableMeta = std::vector<std::pair<std::string, std::string>>;

/// Writers of tables as text, row by row into a file that must not exist yet. Numbers have the fewest digits
/// that read back to the same double; what is not known is an empty cell (in VOTable NaN, or an empty one).
/// Texts pass display_text().
/// @throws SystemError when the file cannot be written
/// @{

/// ECSV 1.0 (Aldcroft 2013, astropy proposal for enhancement 6), comma-separated.
[[nodiscard]] std::unique_ptr<TableWriter> ecsv_writer(const std::filesystem::path& path,
                                                       const std::vector<TableColumn>& columns,
                                                       const TableMeta& meta);

/// CSV after RFC 4180, with units in the header as in "temperature [K]" and no comments.
[[nodiscard]] std::unique_ptr<TableWriter> csv_writer(const std::filesystem::path& path,
                                                      const std::vector<TableColumn>& columns);

/// VOTable 1.4 (Ochsenbein et al. 2019, IVOA Recommendation), rows as TABLEDATA, units as VOUnits 1.0.
[[nodiscard]] std::unique_ptr<TableWriter> votable_writer(const std::filesystem::path& path,
                                                          const std::vector<TableColumn>& columns,
                                                          const TableMeta& meta);
/// @}

/// `text` for LaTeX's text mode with its standard fonts: special characters escaped, Greek letters in math
/// mode, and what the fonts lack as "[U+1F31F]".
[[nodiscard]] std::string latex_text(std::string_view text);

/// A number as rounding.hpp writes it with Glyphs::ascii, for LaTeX's math mode, dollar signs included.
[[nodiscard]] std::string latex_number(const std::string& ascii);

}  // namespace trotline
