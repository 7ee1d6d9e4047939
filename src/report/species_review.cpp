// What --check and --compare say of species.
#include <fmt/format.h>
#include <nlohmann/json.hpp>

#include <algorithm>
#include <array>
#include <cmath>

#include <trotline/report/display_text.hpp>
#include <trotline/report/species_report.hpp>

namespace trotline {
namespace {

using Json = nlohmann::ordered_json;

constexpr std::size_t kWidth = 78;

std::size_t count(const std::vector<SpeciesCheck>& checks, Verdict verdict) {
  return static_cast<std::size_t>(std::count_if(checks.begin(), checks.end(),
                                                [&](const auto& check) { return check.verdict == verdict; }));
}

Verdict worst_of(const std::vector<SpeciesCheck>& checks) {
  if (count(checks, Verdict::wrong) > 0) return Verdict::wrong;
  return count(checks, Verdict::doubtful) > 0 ? Verdict::doubtful : Verdict::in_order;
}

const char* opinion(Verdict verdict) {
  switch (verdict) {
    case Verdict::wrong:
      return "This file contradicts itself. Column densities made with it would be wrong.";
    case Verdict::doubtful:
      return "This file can be used, with the reservations below.";
    case Verdict::in_order:
      break;
  }
  return "Nothing in this file contradicts anything else in it.";
}

/// "name     what was found" and under it, further in, what it means.
std::string paragraph(const SpeciesCheck& check) {
  constexpr std::size_t kIndent = 4;
  std::string result;
  for (const std::string& line : wrapped(display_text(fmt::format("{}: {}", check.name, check.figure)), kWidth - kIndent))
    result += fmt::format("    {}\n", line);
  for (const std::string& line : wrapped(check.meaning, kWidth - 2 * kIndent)) {
    result += fmt::format("        {}\n", line);
  }
  return result;
}

std::string section(const std::vector<SpeciesCheck>& checks, Verdict verdict) {
  std::string text;
  for (const SpeciesCheck& check : checks) {
    if (check.verdict == verdict) text += paragraph(check);
  }
  return text.empty() ? "" : fmt::format("\n{}\n{}", name_of(verdict), text);
}

Json number_or_null(double value) { return std::isfinite(value) ? Json(value) : Json(nullptr); }

/// Whether a factor is a whole number or one over it, as counting spins otherwise makes it.
bool is_ratio_of_weights(double factor) {
  const double larger = factor >= 1.0 ? factor : 1.0 / factor;
  return larger > 1.5 && std::abs(larger / std::round(larger) - 1.0) <= kSameConvention;
}

const char* meaning_of(const PartitionComparison& partition) {
  if (std::abs(partition.constant_factor - 1.0) <= kSameConvention) {
    return partition.spread <= kSameConvention ? "of one convention" : "they part at some temperatures";
  }
  if (partition.spread > kSameConvention) return "they differ by more than a convention";
  return is_ratio_of_weights(partition.constant_factor) ? "spins are counted otherwise"
                                                        : "no way of counting spins gives this factor";
}

std::string partition_lines(const PartitionComparison& partition) {
  if (partition.ratios.empty()) return "Q           at no temperature do both give Q\n";
  std::string text = fmt::format("Q           first / second = {:.6g}, constant within {:.2g} %: {}\n",
                                 partition.constant_factor, 100.0 * partition.spread, meaning_of(partition));
  text += fmt::format("{:>16}{:>18}\n", "T [K]", "Q first/second");
  for (const auto& [temperature, ratio] : partition.ratios) {
    text += fmt::format("{:>16g}{:>18.5f}\n", temperature, ratio);
  }
  return text;
}

}  // namespace

std::string check_text(const Species& species, const std::vector<SpeciesCheck>& checks) {
  std::string text = fmt::format("{}   {}\n{}\n", species.name, display_text(species.file), opinion(worst_of(checks)));
  text += fmt::format("{} tests: {} wrong, {} doubtful, {} in order\n", checks.size(),
                      count(checks, Verdict::wrong), count(checks, Verdict::doubtful),
                      count(checks, Verdict::in_order));
  for (const Verdict verdict : {Verdict::wrong, Verdict::doubtful, Verdict::in_order})
    text += section(checks, verdict);
  return text +
         "\nThese tests ask whether the file agrees with itself. Whether it agrees with nature only another\n"
         "source can tell: see --compare.\n";
}

std::string check_json(const Species& species, const std::vector<SpeciesCheck>& checks) {
  Json list = Json::array();
  for (const SpeciesCheck& check : checks) {
    list.push_back({{"name", check.name},
                    {"figure", check.figure},
                    {"outcome", name_of(check.verdict)},
                    {"meaning", check.meaning}});
  }
  const Json document = {{"name", species.name},
                         {"file", species.file},
                         {"outcome", name_of(worst_of(checks))},
                         {"checks", list}};
  return quiet_json(document.dump(2)) + "\n";
}

std::string comparison_text(const Species& first, const Species& second) {
  const SpeciesComparison found = compare(first, second);
  std::string text = fmt::format("first       {}   {}\nsecond      {}   {}\n", first.name, first.file,
                                 second.name, second.file);
  text += partition_lines(found.partition);
  text += fmt::format(
      "lines       {} in both by label; {} only in the first and {} only in the second, where both "
      "have lines\n",
      found.common_lines, found.only_in_first, found.only_in_second);
  if (found.common_lines == 0) return text;
  text += fmt::format("frequency   differs by {:.4g} MHz at most ({})\n",
                      found.largest_frequency_step_hz * 1e-6, found.largest_frequency_label);
  text += fmt::format("E_u/k       differs by {:.3g} K at most\n", found.largest_energy_step_k);
  text += fmt::format("A           first / second = {:.5g} (median), others within {:.2g} % of it\n",
                      found.a_factor, 100.0 * found.a_spread);
  return text;
}

std::string comparison_json(const Species& first, const Species& second) {
  const SpeciesComparison found = compare(first, second);
  Json ratios = Json::array();
  for (const auto& [temperature, ratio] : found.partition.ratios) {
    ratios.push_back({{"temperature_k", temperature}, {"q_ratio", ratio}});
  }
  const Json document = {{"first", first.file},
                         {"second", second.file},
                         {"partition",
                          {{"constant_factor", number_or_null(found.partition.constant_factor)},
                           {"spread", number_or_null(found.partition.spread)},
                           {"is_difference_of_convention", found.partition.is_difference_of_convention},
                           {"ratios", ratios}}},
                         {"common_lines", found.common_lines},
                         {"only_in_first", found.only_in_first},
                         {"only_in_second", found.only_in_second},
                         {"largest_frequency_difference_mhz", found.largest_frequency_step_hz * 1e-6},
                         {"largest_frequency_difference_of", found.largest_frequency_label},
                         {"largest_energy_difference_k", found.largest_energy_step_k},
                         {"einstein_a_factor", number_or_null(found.a_factor)},
                         {"einstein_a_spread", found.a_spread}};
  return quiet_json(document.dump(2)) + "\n";
}

}  // namespace trotline
