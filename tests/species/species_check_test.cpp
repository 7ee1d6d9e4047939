// What --check finds, on files that are right and on files that are wrong; and two files side by side.

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>

#include <trotline/species/library.hpp>
#include <trotline/species/species_check.hpp>
#include <trotline/species/species_comparison.hpp>

#include "species/directories.hpp"

namespace trotline {
namespace {

Verdict verdict_on(const Species& species, const std::string& name) {
  for (const SpeciesCheck& check : check_species(species)) {
    if (check.name == name) return check.verdict;
  }
  throw std::runtime_error("no check " + name);
}

TEST(SpeciesCheck, FindsNothingWrongInTheLibrary) {
  const SpeciesLibrary library({std::string(TROTLINE_SOURCE_DIR) + "/configs/species"});
  for (const std::string& name : library.names()) {
    const Species species = library.find(name);
    for (const SpeciesCheck& check : check_species(species)) {
      EXPECT_NE(check.verdict, Verdict::wrong) << name << ", " << check.name << ": " << check.figure;
    }
    EXPECT_EQ(verdict_on(species, "frequencies and energies"), Verdict::in_order) << name;
    EXPECT_EQ(verdict_on(species, "slope of Q"), Verdict::in_order) << name;
    EXPECT_EQ(verdict_on(species, "growth of Q"), Verdict::in_order) << name;
    EXPECT_EQ(verdict_on(species, "dipole moment"), Verdict::in_order) << name;
  }
}

Species formaldehyde() { return read_species_file(test::library_file("H2CO")); }

TEST(SpeciesCheck, FindsLinesBetweenSpinIsomers) {
  Species species = formaldehyde();
  Transition& line = species.transitions.front();
  for (std::uint32_t i = 0; i < species.levels.size(); ++i) {
    if (species.levels[i].spin != species.levels[line.upper].spin) line.lower = i;
  }
  EXPECT_EQ(verdict_on(species, "spin isomers"), Verdict::wrong);
}

TEST(SpeciesCheck, FindsAPartitionFunctionThatCountsSpinsOtherwise) {
  Species species = formaldehyde();
  for (Level& level : species.levels) level.degeneracy *= 4.0;
  EXPECT_EQ(verdict_on(species, "Q at low temperature"), Verdict::wrong);
}

TEST(SpeciesCheck, DoubtsAnAThatNoDipoleMakes) {
  Species species = formaldehyde();
  for (Transition& line : species.transitions) line.einstein_a_per_s *= 1e4;
  EXPECT_EQ(verdict_on(species, "dipole moment"), Verdict::doubtful);
}

/// Until 2026-12-01 both sums underflowed to 0 where a list has its own zero, and 0/0 was called wrong.
TEST(SpeciesCheck, FindsNothingWrongWhereTheLowestLevelLiesAboveZero) {
  Species species = formaldehyde();
  for (Level& level : species.levels) level.energy_k += 15.0;
  species.partition = partition_function_from_levels(species.levels);
  EXPECT_EQ(verdict_on(species, "Q at low temperature"), Verdict::in_order);
}

TEST(SpeciesCheck, DoubtsLevelsThatStopShort) {
  Species species = formaldehyde();
  std::erase_if(species.transitions,
                [](const Transition& line) { return line.upper > 40 || line.lower > 40; });
  species.levels.resize(41);
  species.partition = partition_function_from_levels(species.levels);
  EXPECT_EQ(verdict_on(species, "completeness"), Verdict::doubtful);
}

TEST(SpeciesComparison, OfAFileWithItselfFindsNoDifference) {
  const SpeciesComparison comparison = compare(formaldehyde(), formaldehyde());
  EXPECT_EQ(comparison.partition.constant_factor, 1.0);
  EXPECT_EQ(comparison.partition.spread, 0.0);
  EXPECT_EQ(comparison.common_lines, formaldehyde().transitions.size());
  EXPECT_EQ(comparison.only_in_first + comparison.only_in_second, 0u);
  EXPECT_EQ(comparison.largest_frequency_step_hz, 0.0);
  EXPECT_EQ(comparison.a_factor, 1.0);
}

TEST(SpeciesComparison, FindsWhatWasChanged) {
  Species changed = formaldehyde();
  for (Transition& line : changed.transitions) line.einstein_a_per_s *= 2.0;
  changed.transitions[7].frequency_hz += 3e3;
  const std::string label = transition_label(changed, changed.transitions[7]);
  const SpeciesComparison comparison = compare(formaldehyde(), changed);
  EXPECT_DOUBLE_EQ(comparison.a_factor, 0.5);
  EXPECT_NEAR(comparison.a_spread, 0.0, 1e-12);
  EXPECT_NEAR(comparison.largest_frequency_step_hz, 3e3,
              1e-3);  // rounding of frequencies near 1e9 Hz and above
  EXPECT_EQ(comparison.largest_frequency_label, label);
}

TEST(SpeciesComparison, OfFilesWithoutCommonLinesSaysThatThereIsNoRatio) {
  const SpeciesComparison comparison = compare(formaldehyde(), read_species_file(test::library_file("CO")));
  EXPECT_EQ(comparison.common_lines, 0u);
  EXPECT_TRUE(std::isnan(comparison.a_factor));
}

}  // namespace
}  // namespace trotline
