// Frequencies of the library against measured lines, and A coefficients against published values.

#include <fmt/format.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <map>

#include <trotline/base/files.hpp>
#include <trotline/physics/constants.hpp>
#include <trotline/species/line_list.hpp>
#include <trotline/species/line_list_intensity.hpp>

#include "reference_files.hpp"
#include "species/directories.hpp"

namespace trotline {
namespace {

/// What an observer may expect: 0.2 MHz of rotors with an axis, 1 MHz of asymmetric ones.
double tolerance_mhz(const Species& species) {
  if (species.name == "H2O") return 5.0;  // as its file says
  return species.kind == SpeciesKind::asymmetric ? 1.0 : 0.2;
}

const Transition& line_of(const Species& species, const std::string& label) {
  const auto found = transitions_labelled(species, label);
  if (found.size() != 1) throw std::runtime_error(species.name + " has no one line " + label);
  return species.transitions[found.front()];
}

struct MeasuredLine {
  std::string label;
  double frequency_mhz;
  bool independent;  ///< no constant of the file was adjusted to it
};

std::map<std::string, std::vector<MeasuredLine>> measured_lines() {
  std::map<std::string, std::vector<MeasuredLine>> lines;
  for (const auto& group : test::reference_yaml("measured_lines.yaml")) {
    const bool independent = group["role"].as<std::string>() == "independent";
    for (const auto& line : group["lines"]) {
      lines[group["species"].as<std::string>()].push_back(
          {line.first.as<std::string>(), line.second.as<double>(), independent});
    }
  }
  return lines;
}

TEST(MeasuredLines, AreMet) {
  for (const auto& [name, lines] : measured_lines()) {
    const Species species = read_species_file(test::library_file(name));
    for (const MeasuredLine& line : lines) {
      EXPECT_NEAR(line_of(species, line.label).frequency_hz * 1e-6, line.frequency_mhz,
                  tolerance_mhz(species))
          << name << ' ' << line.label;
    }
  }
}

TEST(MeasuredLines, AreEightOrMoreOfTenSpeciesOrMore) {
  int species = 0;
  int species_independent = 0;
  for (const auto& [name, lines] : measured_lines()) {
    const auto independent =
        std::count_if(lines.begin(), lines.end(), [](const auto& l) { return l.independent; });
    species += lines.size() >= 8;
    species_independent += independent >= 8;
  }
  EXPECT_GE(species, 15);
  EXPECT_GE(species_independent, 8);  // constants that owe nothing to these lines
}

// ---- A coefficients

TEST(EinsteinA, AgreesWithPublishedListsWithin1Percent) {
  int compared = 0;
  for (const auto& group : test::reference_yaml("einstein_a.yaml")) {
    const Species species = read_species_file(test::library_file(group["species"].as<std::string>()));
    for (const auto& line : group["lines"]) {
      const double ours = line_of(species, line.first.as<std::string>()).einstein_a_per_s;
      EXPECT_NEAR(ours / line.second.as<double>(), 1.0, 0.01)
          << species.name << ' ' << line.first.as<std::string>();
      ++compared;
    }
  }
  EXPECT_GE(compared, 30);
}

/// A published list to compare with: its own Q(300 K), and how its quantum numbers make a label.
struct PublishedList {
  const char* file;
  const char* species;
  double q_300k;  ///< of the list's own intensity file
  int highest_j;
  std::string (*label)(const std::array<std::int16_t, LineListRow::kMostQuanta>& quanta);
};

const PublishedList kLists[] = {
    {"co_tag028503_v2008.cat", "CO", 108.8651, 12, [](const auto& q) { return fmt::format("{}", q[0]); }},
    {"ch3cn_tag041505_v2008.cat", "CH3CN", 14683.6324, 20,
     [](const auto& q) { return fmt::format("{}({})", q[0], std::abs(q[1])); }},
    {"h2s_tag034002_v2008.cat", "H2S", 514.447, 6,
     [](const auto& q) { return fmt::format("{}({},{})", q[0], q[1], q[2]); }},
};

class ListedEinsteinA : public testing::TestWithParam<PublishedList> {};

TEST_P(ListedEinsteinA, FollowsFromIntensitiesWithin1PercentAndFaintLinesWithin3) {
  const PublishedList& published = GetParam();
  const auto path = test::reference_file(std::string("line_lists/") + published.file);
  if (path.empty()) GTEST_SKIP() << "no " << published.file << " here";
  const Species species = read_species_file(test::library_file(published.species));
  int compared = 0;
  for (const LineListRow& row : parse_line_list(read_file(path.string()), path.string()).rows) {
    if (row.upper[0] > published.highest_j || row.log10_intensity < -8.0) continue;
    const auto found =
        transitions_labelled(species, published.label(row.upper) + "-" + published.label(row.lower));
    if (found.size() != 1) continue;  // beyond what the species file holds for
    const double listed =
        einstein_a_from_intensity_per_s({std::pow(10.0, row.log10_intensity), row.frequency_mhz * 1e6,
                                         row.lower_energy_per_cm * constants::kKelvinPerWavenumberCm,
                                         static_cast<double>(row.upper_degeneracy), published.q_300k, 300.0});
    // Lines that change Ka or Kc by 3 live on the asymmetry alone, and feel which distortion constants were
    // used.
    const bool faint =
        species.kind == SpeciesKind::asymmetric &&
        (std::abs(row.upper[1] - row.lower[1]) > 1 || std::abs(row.upper[2] - row.lower[2]) > 1);
    EXPECT_NEAR(species.transitions[found[0]].einstein_a_per_s / listed, 1.0, faint ? 0.03 : 0.01)
        << published.label(row.upper) << '-' << published.label(row.lower);
    ++compared;
  }
  EXPECT_GE(compared, 12);
}

INSTANTIATE_TEST_SUITE_P(Lists, ListedEinsteinA, testing::ValuesIn(kLists),
                         [](const auto& test) { return std::string(test.param.species); });

}  // namespace
}  // namespace trotline
