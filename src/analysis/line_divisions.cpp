#include "line_divisions.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <functional>
#include <numeric>
#include <set>

namespace trotline {
namespace {

constexpr double kGap = 1.3;  // neighbours that differ by more are of two bands

/// The number after the first bracket: K of "12(3)", Ka of "3(1,2)"; empty where there is none.
std::string ladder_of(const std::string& label) {
  const std::size_t open = label.find('(');
  if (open == std::string::npos) return {};
  const std::size_t close = label.find_first_of(",)", open);
  return close == std::string::npos ? std::string{} : label.substr(open + 1, close - open - 1);
}

using NameOf = std::function<std::string(const PreparedLine&)>;

LineDivision by_name(const std::string& name, const std::vector<PreparedLine>& lines,
                     const std::vector<std::size_t>& rows, const NameOf& name_of_group) {
  LineDivision division{name, {}, {}};
  std::set<std::string> names;
  for (const std::size_t row : rows) names.insert(name_of_group(lines[row]));
  names.erase("");
  division.groups.assign(names.begin(), names.end());
  for (const std::size_t row : rows) {
    const auto found = names.find(name_of_group(lines[row]));
    division.group.push_back(found == names.end() ? -1
                                                  : static_cast<int>(std::distance(names.begin(), found)));
  }
  return division;
}

using ValueOf = std::function<double(const PreparedLine&)>;

/// Groups of values with gaps between them, named by their ends.
LineDivision by_gaps(const std::string& name, const char* unit, const std::vector<PreparedLine>& lines,
                     const std::vector<std::size_t>& rows, const ValueOf& value_of) {
  LineDivision division{name, {}, std::vector<int>(rows.size(), -1)};
  std::vector<std::size_t> order(rows.size());
  std::iota(order.begin(), order.end(), 0U);
  std::erase_if(order, [&](std::size_t i) { return !(value_of(lines[rows[i]]) > 0.0); });
  std::stable_sort(order.begin(), order.end(), [&](std::size_t a, std::size_t b) {
    return value_of(lines[rows[a]]) < value_of(lines[rows[b]]);
  });
  double low = 0.0;
  double last = 0.0;
  for (const std::size_t i : order) {
    const double value = value_of(lines[rows[i]]);
    if (division.groups.empty() || value > kGap * last) {
      division.groups.emplace_back();
      low = value;
    }
    last = value;
    division.groups.back() = low == last ? fmt::format("{:.3g} {}", low, unit)
                                         : fmt::format("{:.3g} to {:.3g} {}", low, last, unit);
    division.group[i] = static_cast<int>(division.groups.size()) - 1;
  }
  return division;
}

/// The same parts, whatever their numbers.
bool parts_alike(const LineDivision& a, const LineDivision& b) {
  for (std::size_t i = 0; i < a.group.size(); ++i) {
    for (std::size_t j = 0; j < i; ++j) {
      if ((a.group[i] == a.group[j]) != (b.group[i] == b.group[j])) return false;
    }
  }
  return true;
}

}  // namespace

std::vector<LineDivision> line_divisions(const std::vector<PreparedLine>& lines,
                                         const std::vector<std::size_t>& rows) {
  const LineDivision all[] = {
      by_name("spin isomer", lines, rows, [](const PreparedLine& line) { return line.spin; }),
      by_name("K-ladder", lines, rows,
              [](const PreparedLine& line) {
                const std::string k = ladder_of(line.upper_label);
                return k.empty() ? k : "K = " + k;
              }),
      by_gaps("band", "GHz", lines, rows,
              [](const PreparedLine& line) { return line.result.frequency_mhz / 1e3; }),
      by_gaps("beam", "arcsec", lines, rows,
              [](const PreparedLine& line) { return line.result.beam_fwhm_arcsec; })};
  std::vector<LineDivision> divisions;
  for (const LineDivision& division : all) {
    const bool known = std::any_of(divisions.begin(), divisions.end(),
                                   [&](const LineDivision& other) { return parts_alike(division, other); });
    if (division.groups.size() > 1 && !known) divisions.push_back(division);
  }
  return divisions;
}

}  // namespace trotline
