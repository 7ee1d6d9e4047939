// Labels for the levels of a line list.
#pragma once

#include <array>
#include <cstdint>
#include <string>
#include <vector>

#include <trotline/species/line_list.hpp>

namespace trotline {

using Quanta = std::array<std::int16_t, LineListRow::kMostQuanta>;

/// The usual names of the quantum numbers of a format, e.g. {"J", "Ka", "Kc"} for 303; empty where the format
/// is not one of those that are used everywhere alike.
/// Reference: documentation of the published catalogues; Q = 1, 2, 3 linear, symmetric (or linear with l) and
/// asymmetric, 13 and 14 the latter two with a vibrational state; further numbers end in F.
[[nodiscard]] std::vector<std::string> usual_quanta(int quantum_format);

/// How quantum numbers become labels.
struct LabelStyle {
  std::vector<std::string> names;
  std::vector<bool> shown;  ///< false: the same in all rows, or a repetition of the first number
  std::vector<bool> half;   ///< printed rounded up: 2 stands for 3/2
};

/// Which numbers of the list are worth showing.
[[nodiscard]] LabelStyle style_for(const LineList& list, std::vector<std::string> names);

/// "5", "12(3)", "3(1,2)", "3(1,2),7/2", "12(3),v=1"; for names that are not known: "1,2,3".
[[nodiscard]] std::string label_of(const Quanta& quanta, const LabelStyle& style);

}  // namespace trotline
