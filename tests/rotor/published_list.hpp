#pragma once

#include <fmt/format.h>

#include <cmath>
#include <cstdlib>
#include <fstream>
#include <string>
#include <vector>

#include <trotline/physics/constants.hpp>
#include <trotline/rotor/line_strength.hpp>

/// Published line lists in the 80-column format, where they are at hand.
namespace trotline {

/// Rows of an 80-column line list: frequency [MHz], lg intensity, lower energy [1/cm], g_u, tag and quanta.
struct ListedLine {
  double frequency_mhz, lg_intensity, lower_energy_cm, upper_degeneracy;
  std::string upper, lower;
};

inline std::string label_at(const std::string& row, std::size_t column) {
  const auto number = [&](std::size_t at) { return std::stoi(row.substr(at, 2)); };
  return fmt::format("{}({},{})", number(column), number(column + 2), number(column + 4));
}

/// Empty where the list is not at hand. Only rows with plain numbers are taken.
inline std::vector<ListedLine> read_list(const std::string& name) {
  const char* elsewhere = std::getenv("TROTLINE_SHARED");
  const std::string folder = elsewhere != nullptr ? elsewhere : TROTLINE_SOURCE_DIR "/../shared";
  std::ifstream stream(folder + "/reference/line_lists/" + name);
  std::vector<ListedLine> lines;
  for (std::string row; std::getline(stream, row);) {
    if (row.size() < 74 || row.substr(41, 3).find_first_not_of(" 0123456789") != std::string::npos) continue;
    if (row.substr(55, 6).find_first_not_of(" 0123456789") != std::string::npos) continue;
    lines.push_back({std::stod(row.substr(0, 13)), std::stod(row.substr(21, 8)),
                     std::stod(row.substr(31, 10)), std::stod(row.substr(41, 3)), label_at(row, 55),
                     label_at(row, 67)});
  }
  return lines;
}

/// S mu^2 [C2 m2] of a listed line, from its intensity at 300 K (Pickett et al. 1998, JQSRT 60, 883, eq.
/// 1-9).
inline double listed_line_strength(const ListedLine& line, double q300, int upper_j) {
  const double kt_cm = 300.0 / constants::kKelvinPerWavenumberCm;
  const double upper_energy_cm =
      line.lower_energy_cm + line.frequency_mhz * kMega / (100.0 * constants::kLightMPerS);
  const double a_per_s = std::pow(10.0, line.lg_intensity) * line.frequency_mhz * line.frequency_mhz * q300 /
                         line.upper_degeneracy * 2.7964e-16 /
                         (std::exp(-line.lower_energy_cm / kt_cm) - std::exp(-upper_energy_cm / kt_cm));
  return a_per_s / einstein_a_per_s(line.frequency_mhz * kMega, 1.0, 2.0 * upper_j + 1.0);
}

}  // namespace trotline
