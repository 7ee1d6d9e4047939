// Ways to divide lines into groups that one temperature should describe alike.
#pragma once

#include <string>
#include <vector>

#include "prepared_line.hpp"

namespace trotline {

struct LineDivision {
  std::string name;                 ///< "spin isomer", "K-ladder", "band", "beam"
  std::vector<std::string> groups;  ///< by number
  std::vector<int> group;           ///< of each row that was asked for; below 0: in none
};

/// Spin isomers; K-ladders (K, or Ka, from the label of the upper level); bands and beams (lines whose
/// frequencies, whose beams lie within 30 % of their neighbours). Divisions into fewer than two groups are
/// left out, and so is one that parts the rows as an earlier one does.
/// @param rows  indices into lines
[[nodiscard]] std::vector<LineDivision> line_divisions(const std::vector<PreparedLine>& lines,
                                                       const std::vector<std::size_t>& rows);

}  // namespace trotline
