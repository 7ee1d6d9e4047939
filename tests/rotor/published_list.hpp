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

inline std::string label_without_kc_at(const std::string& row, std::size_t column) {
  return fmt::format("{}({})", std::stoi(row.substr(column, 2)),
                     std::abs(std::stoi(row.substr(column + 2, 2))));
}

/// Empty where the list is not at hand. Only rows with plain numbers are taken.
/// @param label  reads a state's label at a column
inline std::vector<ListedLine> read_list_with(const std::string& name,
                                              std::string (*label)(const std::string&, std::size_t)) {
  const char* elsewhere = std::getenv("TROTLINE_SHARED");
  const std::string folder = elsewhere != nullptr ? elsewhere : TROTLINE_SOURCE_DIR "/../shared";
  std::ifstream stream(folder + "/reference/line_lists/" + name);
  std::vector<ListedLine> lines;
  for (std::string row; std::getline(stream, row);) {
    const auto is_plain = [&](std::size_t column, std::size_t width) {
      return row.substr(column, width).find_first_not_of(" -0123456789") == std::string::npos;
    };
    if (row.size() < 74 || !is_plain(41, 3) || !is_plain(55, 6) || !is_plain(67, 6)) continue;
    lines.push_back({std::stod(row.substr(0, 13)), std::stod(row.substr(21, 8)),
                     std::stod(row.substr(31, 10)), std::stod(row.substr(41, 3)), label(row, 55),
                     label(row, 67)});
  }
  return lines;
}

/// Labels J(Ka,Kc).
inline std::vector<ListedLine> read_list(const std::string& name) { return read_list_with(name, label_at); }

/// Labels J(K), rows for +K and -K alike.
inline std::vector<ListedLine> read_symmetric_list(const std::string& name) {
  return read_list_with(name, label_without_kc_at);
}

/// S mu^2 [C2 m2] of a listed line, from its intensity at 300 K (Pickett et al. 1998, JQSRT 60, 883, eq.
/// 1-9).
inline double listed_line_strength(const ListedLine& line, double q300, int upper_j) {
  const double kt_cm = 300.0 / constants::kKelvinPerWavenumberCm;
  const double upper_energy_cm =
      line.lower_energy_cm + line.frequency_mhz * 1e6 / (100.0 * constants::kLightMPerS);
  const double a_per_s = std::pow(10.0, line.lg_intensity) * line.frequency_mhz * line.frequency_mhz * q300 /
                         line.upper_degeneracy * 2.7964e-16 /
                         (std::exp(-line.lower_energy_cm / kt_cm) - std::exp(-upper_energy_cm / kt_cm));
  return a_per_s / einstein_a_per_s(line.frequency_mhz * 1e6, 1.0, 2.0 * upper_j + 1.0);
}

}  // namespace trotline
