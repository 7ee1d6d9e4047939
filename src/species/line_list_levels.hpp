// The levels behind the rows of a line list.
#pragma once

#include <map>
#include <string>
#include <vector>

#include <trotline/species/level.hpp>
#include <trotline/species/line_list.hpp>

namespace trotline {

/// What identical rows mean.
enum class DoubledRows {
  plus_and_minus_k,  ///< +K and -K of a symmetric top; other pairs are refused
  sum,               ///< two lines that coincide: one transition between levels of twice the weight
  once               ///< a slip of the list: one of the two is dropped
};

/// How to read the quantum numbers and degeneracies of a list.
struct LineListReading {
  /// What each quantum number is. Names with a meaning here: "J", "N" and "F" (angular momenta), "K" (of a
  /// symmetric top; rows that differ in its sign alone are one line), "v" (a vibrational state). Empty: by
  /// format.
  std::vector<std::string> quanta = {};
  DoubledRows doubled = DoubledRows::plus_and_minus_k;
  std::map<std::string, double> degeneracies = {};  ///< by label, for levels that are upper in no row
};

/// One transition for each row, or for each pair of doubled rows.
struct ListedTransition {
  Transition transition;  ///< without A
  std::size_t row = 0;    ///< whose intensity and degeneracy belong together; the first of a pair
};

struct ListedLevels {
  std::vector<Level> levels;                  ///< by rising energy, as the list counts it
  std::vector<ListedTransition> transitions;  ///< by rising frequency
  std::vector<std::string> warnings;
};

/// Rebuilds the levels.
///
/// The energy of a level is the one printed where it is the lower state, else E_l + h nu of the first row
/// where it is the upper one. Its degeneracy is that of the rows where it is the upper state. For levels that
/// are never upper it follows from g/(2F+1), the spin weight, which an electric-dipole transition does not
/// change; which quantum number is F is found out, and confirmed over all rows.
///
/// A pair of rows of +K and -K is one transition between levels of twice the weight. Its A is that of either
/// row: the intensities add up and the degeneracy doubles.
/// @param file  the list's, for messages
/// @throws InputError with the line of the row that does not fit: quantum numbers of two formats, one level
///         with two energies or degeneracies, rows printed twice without a reason, no degeneracy to be found
[[nodiscard]] ListedLevels rebuild_levels(const LineList& list, const LineListReading& reading,
                                          const std::string& file);

}  // namespace trotline
