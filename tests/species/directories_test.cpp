// Q(T) of every species of the library against the two published directories, and the table of it in docs.
//
// To write the table anew: TROTLINE_WRITE_TABLES=1 species_test --gtest_filter='Directories.*'

#include <gtest/gtest.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <cstdlib>
#include <filesystem>
#include <set>

#include <fmt/format.h>

#include <trotline/base/files.hpp>
#include <trotline/species/library.hpp>

#include "species/directories.hpp"

namespace trotline {
namespace {

using test::DirectoryRow;

const std::vector<DirectoryRow>& rows() {
  static const std::vector<DirectoryRow> all = test::directory_rows();
  return all;
}

constexpr double kAgreement = 0.005;

/// Within what a cell needs no reason: 0.3 % for six plain linear molecules up to 300 K, 0.5 % for the rest.
double agreement(const DirectoryRow& row, double temperature_k) {
  static const std::set<std::string> plain = {"CO", "CS", "SiO", "HC3N", "OCS", "HCO+"};
  return plain.contains(row.species) && temperature_k <= 300.0 ? 0.003 : kAgreement;
}
constexpr std::array kColumns = {9.375, 18.75, 37.5, 75.0, 150.0, 225.0, 300.0, 500.0};

TEST(Directories, EveryDifferenceAboveHalfAPercentHasAReason) {
  std::size_t compared = 0;
  for (const DirectoryRow& row : rows()) {
    for (const auto& [t, ratio] : row.ratios) {
      ++compared;
      if (std::abs(ratio - 1.0) <= agreement(row, t)) continue;
      EXPECT_FALSE(row.reasons.at(t).empty())
          << row.species << ", " << row.directory << ' ' << row.tag << " at " << t << " K: " << ratio;
    }
  }
  EXPECT_GT(compared, 800u);
}

/// The six plain linear molecules, spins and vibrational states as the table says: with one exception, JPL's SiO
/// at 225 and 300 K, they agree within what four digits of log10 Q and the excited states of HCO+ allow.
TEST(Directories, PlainLinearMoleculesAgreeWithin2PerMilleUpTo300K) {
  int compared = 0;
  for (const DirectoryRow& row : rows()) {
    for (const auto& [t, ratio] : row.ratios) {
      if (agreement(row, t) == kAgreement || (row.tag == 44002 && t >= 225.0)) continue;
      EXPECT_NEAR(ratio, 1.0, 0.002) << row.species << ' ' << row.tag << " at " << t << " K";
      ++compared;
    }
  }
  EXPECT_GE(compared, 80);
}

/// Every reason must be needed somewhere: one that explains nothing is a mistake of ours.
TEST(Directories, NoReasonIsGivenWhereNothingDiffers) {
  for (const DirectoryRow& row : rows()) {
    std::set<std::string> idle;
    std::set<std::string> needed;
    for (const auto& [t, reason] : row.reasons) {
      if (reason.empty()) continue;
      (std::abs(row.ratios.at(t) - 1.0) > agreement(row, t) ? needed : idle).insert(reason);
    }
    for (const std::string& reason : idle) {
      EXPECT_TRUE(needed.contains(reason)) << row.species << ' ' << row.tag << ": " << reason;
    }
  }
}

bool agrees_from_9_to_150_k(const DirectoryRow& row) {
  return std::all_of(row.ratios.begin(), row.ratios.end(), [](const auto& entry) {
    return entry.first < 9.0 || entry.first > 150.0 || std::abs(entry.second - 1.0) <= kAgreement;
  });
}

TEST(Directories, ThirtySpeciesAgreeFrom9To150K) {
  std::set<std::string> agreeing;
  for (const DirectoryRow& row : rows()) {
    if (agrees_from_9_to_150_k(row)) agreeing.insert(row.species);
  }
  EXPECT_GE(agreeing.size(), 50u);  // the aim was 30 species within 0.5 %
}

TEST(Directories, EverySpeciesOfTheLibraryIsCompared) {
  std::set<std::string> compared;
  for (const DirectoryRow& row : rows()) compared.insert(row.species);
  const SpeciesLibrary library({std::string(TROTLINE_SOURCE_DIR) + "/configs/species"});
  for (const std::string& name : library.names()) EXPECT_TRUE(compared.contains(name)) << name;
  EXPECT_GE(library.names().size(), 36u);
}

// ---- the table

const char* const kHead = R"(# Partition functions of the library beside two published directories

Q(T) of every species file in `configs/species` against the directories of CDMS (Müller et al. 2001, A&A 370, L49; 2005,
J. Mol. Struct. 742, 215) and JPL (Pickett et al. 1998, JQSRT 60, 883), in the editions that Debian's python3-astroquery
carries. The values are kept in `tests/reference/partition_directories.yaml`, what the entries count in
`partition_conventions.yaml` beside it. This page is written by a test (`Directories.TheTableIsUpToDate`), which fails
when it is out of date.

A cell is **Q(directory) / (factor × Q(ours))** at the temperature above it [K]. The factor is a convention: nuclear
spins that the entry counts and the species file does not, or the other way round. *States* says with what an entry
is compared: `v = 0`, our sum over the levels of the ground vibrational state; `all`, our Q with the vibrational factors of
the species file, because the entry contains vibrational states, whatever its name says. `trotline` itself always uses
the latter. A cell that differs from 1 by more than 0.5 % (CO, CS, SiO, HC3N, OCS and HCO+ up to 300 K: 0.3 %) has the number of its reason, given below. Directories print four
digits of log10 Q, which is 0.012 %.

)";

std::string cell(const DirectoryRow& row, double t, std::vector<std::string>& reasons) {
  const auto found = row.ratios.find(t);
  if (found == row.ratios.end()) return "–";
  std::string text = fmt::format("{:.4f}", found->second);
  if (std::abs(found->second - 1.0) <= agreement(row, t)) return text;
  const std::string& reason = row.reasons.at(t);
  auto place = std::find(reasons.begin(), reasons.end(), reason);
  if (place == reasons.end()) place = reasons.insert(reasons.end(), reason);
  return text + fmt::format(" ({})", place - reasons.begin() + 1);
}

std::string table() {
  std::string text = kHead;
  text += "| species | entry | states | factor |";
  for (const double t : kColumns) text += fmt::format(" {:g} |", t);
  text += "\n|---|---|---|---|";
  for (std::size_t i = 0; i < kColumns.size(); ++i) text += "---|";
  text += "\n";
  std::vector<DirectoryRow> sorted = rows();
  std::stable_sort(sorted.begin(), sorted.end(),
                   [](const DirectoryRow& a, const DirectoryRow& b) { return a.species < b.species; });
  std::vector<std::string> reasons;
  for (const DirectoryRow& row : sorted) {
    text += fmt::format("| {} | {} {} | {} | {} |", row.species, row.directory, row.tag, row.all_states ? "all" : "v = 0",
                        row.counts.empty() ? fmt::format("{:g}", row.factor)
                                           : fmt::format("{:g}: {}", row.factor, row.counts));
    for (const double t : kColumns) text += " " + cell(row, t, reasons) + " |";
    text += "\n";
  }
  text += "\n## Reasons\n\n";
  for (std::size_t i = 0; i < reasons.size(); ++i) text += fmt::format("{}. {}.\n", i + 1, reasons[i]);
  return text;
}

TEST(Directories, TheTableIsUpToDate) {
  const std::string path = std::string(TROTLINE_SOURCE_DIR) + "/docs/partition-functions.md";
  const std::string now = table();
  if (std::getenv("TROTLINE_WRITE_TABLES") != nullptr) write_file(path, now);
  EXPECT_EQ(read_file(path), now) << "write it anew: TROTLINE_WRITE_TABLES=1 species_test --gtest_filter='Directories.*'";
}

}  // namespace
}  // namespace trotline
