#pragma once

#include <cstddef>
#include <string>
#include <vector>

#include <trotline/observation/intensity_table.hpp>
#include <trotline/species/species.hpp>

namespace trotline {

/// A row of the table with the transition that it measures.
struct MatchedRow {
  IntensityRow row;
  std::size_t transition = 0;  ///< index into Species::transitions
};

/// Rows of one source and one species, each matched to its transition.
struct MatchedTable {
  std::string source;  ///< as the table has it; empty where it names none
  std::vector<MatchedRow> rows;
  std::vector<std::string> warnings;
};

/// The covariance of a source's lines is a full matrix: more rows than this are no list of lines of one source.
inline constexpr std::size_t kMostRowsOfASource = 1000;

/// Picks the rows of one source and species and finds the transition of each: by label where the row has one
/// (a frequency beside it must then agree), by frequency otherwise.
///
/// Rows of other species are passed over and counted in the warnings.
/// @param wanted_source  which source; nothing: the table must hold one only
/// @throws InputError with the table's line: no or several transitions (candidates are listed), label and
///         frequency that disagree, several sources and none chosen (they are listed), no row left, more
///         than kMostRowsOfASource
[[nodiscard]] MatchedTable match_rows(const IntensityTable& table, const Species& species,
                                      double frequency_tolerance_hz,
                                      const std::optional<std::string>& wanted_source);

}  // namespace trotline
