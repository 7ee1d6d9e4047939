#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <filesystem>
#include <optional>
#include <sstream>

#include <trotline/base/files.hpp>
#include <trotline/base/text.hpp>

#include "species_kinds.hpp"

namespace trotline {
namespace {

using Points = std::vector<std::pair<double, double>>;

constexpr double kListTemperatureK = 300.0;  // at which line lists state intensities and Q

/// Q and the sum count as equal when they agree within this: the rounding of log10 Q to four digits and the
/// inaccuracy of published tables stay below it, a vibration that matters does not.
constexpr double kSameValue = 0.005;

Points read_inline_table(const FileMap& map) {
  Points points;
  for (const auto& row : map.table("table")) {
    if (row.size() != 2) {
      map.refuse("table", {fmt::format("a row of the table has {} values", row.size()),
                           "two, e.g. '[300 K, 108.87]'"});
    }
    try {
      points.emplace_back(parse_quantity(row[0], Dimension::temperature), 0.0);
    } catch (const InputError& error) {
      map.refuse("table", error.complaint());
    }
    const auto q = parse_number(row[1]);
    if (!q)
      map.refuse("table",
                 {fmt::format("'{}' is no number", printable(row[1])), "Q as the second value of a row"});
    points.back().second = *q;
  }
  return points;
}

/// A text file of two or more columns: T, Q, and what else may follow. '#' begins a comment.
Points read_table_file(const std::string& path, double kelvin_per_unit) {
  Points points;
  std::istringstream text(read_file(path));
  std::size_t number = 0;
  for (std::string line; std::getline(text, line);) {
    ++number;
    std::istringstream fields(line.substr(0, line.find('#')));
    std::string t_text;
    std::string q_text;
    if (!(fields >> t_text)) continue;
    fields >> q_text;
    const auto t = parse_number(t_text);
    const auto q = parse_number(q_text);
    if (!t || !q || !std::isfinite(*t) || !std::isfinite(*q)) {
      throw InputError({path, number}, {fmt::format("the row is '{}'", printable(trimmed(line))),
                                        "a temperature and Q, separated by blanks"});
    }
    points.emplace_back(*t * kelvin_per_unit, *q);
  }
  return points;
}

std::string beside(const std::string& file, const std::string& relative) {
  return (std::filesystem::path(file).parent_path() / relative).string();
}

Points read_points(const FileMap& map) {
  if (map.has("table")) return read_inline_table(map);
  const double kelvin = [&] {
    try {
      return unit_scale(map.text("temperature_unit"), Dimension::temperature);
    } catch (const InputError& error) {
      map.refuse("temperature_unit", error.complaint());
    }
  }();
  return read_table_file(beside(map.file(), map.text("file")), kelvin);
}

/// Rising T; Q for what may be log10 Q in the file; checked as a table of Q.
Points finished_points(const FileMap& map, const std::string& key, Points points) {
  const std::string gives = map.optional_text("gives", "q");
  if (gives != "q" && gives != "log10_q") {
    map.refuse("gives", {fmt::format("'gives' is '{}'", printable(gives)), "q or log10_q"});
  }
  if (gives == "log10_q") {
    for (auto& point : points) point.second = std::pow(10.0, point.second);
  }
  std::sort(points.begin(), points.end());
  try {
    (void)partition_function_from_table(points);
  } catch (const DomainError& error) {
    map.refuse(key, {std::string("this is no table of Q: ") + error.what(),
                     "at least 5 temperatures, and Q rising with T"});
  }
  return points;
}

StatedPartition read_stated(const FileMap& map, Species& species) {
  StatedPartition stated;
  if (map.has("table") && map.has("file")) {
    map.refuse("file", {"both 'table' and 'file' are given", "one of the two"});
  }
  for (const char* key : {"table", "file"}) {
    if (map.has(key)) stated.table = finished_points(map, key, read_points(map));
  }
  if (map.has("q_300")) stated.q_300k = map.number("q_300");
  if (map.has("q_300") && !(stated.q_300k > 0.0))
    map.refuse("q_300", {"Q(300 K) is not above 0", "e.g. 108.87"});
  if (stated.table.empty() && stated.q_300k == 0.0) {
    map.refuse("table",
               {"'partition' states no Q", "one of table, file, q_300, or 'partition: from_levels'"});
  }
  const std::string use = map.optional_text("use", "table");
  if (use != "table" && use != "levels")
    map.refuse("use", {fmt::format("'use' is '{}'", printable(use)), "table or levels"});
  stated.prefer_levels = use == "levels";
  cite(map, "partition function", species);
  map.finish();
  return stated;
}

std::vector<double> temperatures_of(const Points& points) {
  std::vector<double> temperatures;
  for (const auto& point : points) temperatures.push_back(point.first);
  return temperatures;
}

/// 3 for 3.004, 1/4 for 0.2501; nothing for other numbers, which no way of counting spins explains.
std::optional<double> ratio_of_weights(double factor) {
  const double whole = factor >= 1.0 ? std::round(factor) : 1.0 / std::round(1.0 / factor);
  return std::abs(factor / whole - 1.0) <= kSameConvention ? std::optional(whole) : std::nullopt;
}

std::string range_of_ratios(const PartitionComparison& comparison) {
  const auto [low, high] =
      std::minmax_element(comparison.ratios.begin(), comparison.ratios.end(),
                          [](const auto& a, const auto& b) { return a.second < b.second; });
  return fmt::format("{:.3f} (at {:g} K) to {:.3f} (at {:g} K)", low->second, low->first, high->second,
                     high->first);
}

bool agrees(const PartitionComparison& comparison) {
  return !comparison.ratios.empty() &&
         std::all_of(comparison.ratios.begin(), comparison.ratios.end(),
                     [](const auto& point) { return std::abs(point.second - 1.0) <= kSameValue; });
}

/// Divides the table by a factor that only counts spins otherwise than the levels do.
void adopt_convention(double factor, StatedPartition& stated, PartitionComparison& comparison,
                      Species& species) {
  species.warnings.push_back(fmt::format(
      "the table of Q is {:.3g} times the sum over the levels at every temperature (within {:.1f} %): it "
      "counts spins otherwise than the degeneracies of the lines do, and has been divided by {:.3g}",
      comparison.constant_factor, 100.0 * comparison.spread, factor));
  for (auto& point : stated.table) point.second /= factor;
  for (auto& ratio : comparison.ratios) ratio.second /= factor;
}

void settle_table(StatedPartition& stated, const PartitionFunction& sum, Species& species) {
  const auto table = partition_function_from_table(stated.table);
  auto comparison = compare(*table, sum, temperatures_of(stated.table));
  if (comparison.ratios.empty()) {
    species.warnings.push_back(
        "the levels reach no temperature of the table of Q: the two could not be compared");
    species.partition = table;
    return;
  }
  const auto factor = ratio_of_weights(comparison.constant_factor);
  if (comparison.is_difference_of_convention && factor)
    adopt_convention(*factor, stated, comparison, species);
  const bool same = agrees(comparison) && comparison.ratios.size() == stated.table.size();
  if (!agrees(comparison)) {
    species.warnings.push_back(fmt::format("the table of Q is {} of the sum over the levels; the {} is used",
                                           range_of_ratios(comparison),
                                           stated.prefer_levels ? "sum" : "table"));
  }
  if (!same && !stated.prefer_levels) species.partition = partition_function_from_table(stated.table);
}

void check_q_300(const StatedPartition& stated, const PartitionFunction& sum, Species& species) {
  if (stated.q_300k == 0.0) return;
  if (sum.highest_k() < kListTemperatureK) {
    species.warnings.push_back(fmt::format(
        "the levels give Q only up to {:.0f} K: the stated Q(300 K) could not be compared with them",
        sum.highest_k()));
    return;
  }
  const double ratio = stated.q_300k / sum.at(kListTemperatureK).q;
  if (std::abs(ratio - 1.0) <= kSameValue) return;
  species.warnings.push_back(
      fmt::format("the stated Q(300 K) = {:.6g} is {:.4f} of the sum over the levels: levels are missing, "
                  "vibration is counted in "
                  "one of them, or spins are counted otherwise",
                  stated.q_300k, ratio));
}

}  // namespace

StatedPartition read_partition(const FileMap& file, Species& species) {
  if (!file.has("partition")) return {};
  if (file.holds_map("partition")) return read_stated(file.map("partition"), species);
  const std::string written = file.text("partition");
  if (written != "from_levels") {
    file.refuse("partition", {fmt::format("'partition' is '{}'", printable(written)),
                              "from_levels, or a mapping with table, file or q_300"});
  }
  return {};
}

void settle_partition(StatedPartition& stated, const LevelSumOptions& options, Species& species) {
  species.partition = partition_function_from_levels(species.levels, options);
  const auto sum = species.partition;
  check_q_300(stated, *sum, species);
  if (!stated.table.empty()) settle_table(stated, *sum, species);
}

}  // namespace trotline
