#include <trotline/species/species_file.hpp>

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/physics/constants.hpp>

namespace trotline {
namespace {

using testing::ElementsAre;
using testing::HasSubstr;
using testing::IsEmpty;

// Invented species, for the format alone.
const std::string kLinear = R"(name: XY
formula: X–Y
kind: linear
note: made for a test
constants: {B: 10 GHz, D: 10 kHz, from: made up}
dipole: {mu0: 1.5 D, from: made up too}
vibration:
  modes:
    - {energy: 500 cm-1, degeneracy: 2}
    - {energy: 900 K}
  from: guessed
holds: {largest_j: 12, highest_temperature: 300 K}
)";

const std::string kLevels = R"(name: Z
kind: levels
levels:
  complete_to: all
  list:
    - {label: "1", energy: 0.69502 cm-1, degeneracy: 3}
    - {label: "0", energy: 0 K, degeneracy: 1, spin: para}
    - {label: "2", energy: 62.5 GHz, degeneracy: 5}
  from: made up
transitions:
  list:
    - {upper: "2", lower: "1", frequency: 41.664 GHz, uncertainty: 2 kHz, einstein_a: 2e-7 s-1}
    - {upper: J=1, lower: "0", frequency: 20.8365 GHz, einstein_a: 1e-8 s-1}
  from: made up
)";

TEST(SpeciesFile, LinearRotorBecomesLevelsLinesAndQ) {
  const Species species = parse_species(kLinear, "some/folder/XY.yaml");
  EXPECT_EQ(species.name, "XY");
  EXPECT_EQ(species.formula, "X–Y");
  EXPECT_EQ(species.kind, SpeciesKind::linear);
  EXPECT_EQ(species.note, "made for a test");
  EXPECT_EQ(species.file, "some/folder/XY.yaml");
  EXPECT_EQ(species.file_fingerprint, fingerprint(kLinear));
  EXPECT_THAT(species.warnings, IsEmpty());
  ASSERT_EQ(species.transitions.size(), 12u);  // to largest_j; Q has more levels
  EXPECT_GT(species.levels.size(), 100u);
  EXPECT_EQ(transition_label(species, species.transitions[4]), "5-4");
  EXPECT_NEAR(species.transitions[0].frequency_hz, 20e9 - 4e4, 1e-4);  // 2B - 4D
  const Level& level = species.levels[3];
  EXPECT_EQ(level.label, "3");
  EXPECT_EQ(level.degeneracy, 7.0);
  EXPECT_NEAR(level.energy_k, (12 * 10e9 - 144 * 1e4) * constants::kKelvinPerHz, 1e-12);
}

TEST(SpeciesFile, CitesEveryGroupOfNumbers) {
  std::vector<std::string> sources;
  for (const Citation& citation : parse_species(kLinear, "XY.yaml").citations)
    sources.push_back(citation.from);
  EXPECT_THAT(sources, ElementsAre("made up", "made up too", "guessed"));
}

TEST(SpeciesFile, VibrationMultipliesQAndHoldsLimitsIt) {
  const Species species = parse_species(kLinear, "XY.yaml");
  const double rotation = partition_function_from_levels(species.levels)->at(200.0).q;
  const double bend = 1.0 - std::exp(-500.0 * constants::kKelvinPerWavenumberCm / 200.0);
  const double stretch = 1.0 - std::exp(-900.0 / 200.0);
  EXPECT_NEAR(species.partition->at(200.0).q / rotation, 1.0 / (bend * bend * stretch), 1e-12);
  EXPECT_EQ(species.partition->highest_k(), 300.0);
  EXPECT_LT(species.partition->at(300.0).relative_error, 1e-8);
  EXPECT_THROW((void)species.partition->at(301.0), DomainError);
}

TEST(SpeciesFile, SpinRulesGiveWeightsAndIsomers) {
  const Species species =
      parse_species(kLinear + "spin: {rule: dinfh, spins: [1/2], from: two protons}\n", "XY.yaml");
  EXPECT_EQ(species.levels[0].degeneracy, 1.0);
  EXPECT_EQ(species.levels[1].degeneracy, 9.0);
  EXPECT_EQ(species.levels[0].spin, "para");
  EXPECT_EQ(species.levels[1].spin, "ortho");
}

TEST(SpeciesFile, LevelsAreSortedAndLinesFindThem) {
  const Species species = parse_species(kLevels, "Z.yaml");
  ASSERT_EQ(species.levels.size(), 3u);
  EXPECT_EQ(species.levels[0].label, "0");
  EXPECT_EQ(species.levels[0].spin, "para");
  EXPECT_NEAR(species.levels[1].energy_k, 1.0, 1e-4);  // 0.69502 cm-1 = 1 K (hc/k = 1.438777 K cm)
  EXPECT_NEAR(species.levels[2].energy_k, 62.5e9 * constants::kKelvinPerHz, 1e-12);
  ASSERT_EQ(species.transitions.size(), 2u);
  EXPECT_EQ(transition_label(species, species.transitions[0]), "1-0");
  EXPECT_EQ(species.transitions[1].frequency_hz, 41.664e9);
  EXPECT_EQ(species.transitions[1].frequency_sigma_hz, 2e3);
  EXPECT_EQ(species.transitions[1].einstein_a_per_s, 2e-7);
  EXPECT_NEAR(species.partition->at(1e4).q, 9.0, 1e-2);  // complete: no limit of temperature
}

TEST(SpeciesFile, LevelsThatMayBeFewLimitTheTemperature) {
  std::string text = kLevels;
  text.erase(text.find("  complete_to: all\n"), 19);
  EXPECT_LT(parse_species(text, "Z.yaml").partition->highest_k(), 1.0);  // 3 K, and surely more levels above
}

// ---- Q as a table

/// kLevels with a table of its own Q times a factor.
std::string with_table(double factor, const std::string& more = "") {
  std::string rows;
  for (const double t : {1.0, 2.0, 5.0, 10.0, 50.0, 100.0}) {
    const double q = 1.0 + 3.0 * std::exp(-0.99998 / t) + 5.0 * std::exp(-2.99953 / t);
    rows += fmt::format("    - [{} K, {:.5f}]\n", t, factor * q);
  }
  return kLevels + "partition:\n  table:\n" + rows + "  from: made up\n" + more;
}

TEST(SpeciesFile, ATableThatAgreesWithTheLevelsIsPassedOver) {
  const Species species = parse_species(with_table(1.0), "Z.yaml");
  EXPECT_THAT(species.warnings, IsEmpty());
  EXPECT_THAT(species.partition->description(), HasSubstr("sum over 3 levels"));
}

TEST(SpeciesFile, ATableOfAnotherSpinConventionIsDividedAndReported) {
  const Species species = parse_species(with_table(6.0), "Z.yaml");
  ASSERT_EQ(species.warnings.size(), 1u);
  EXPECT_THAT(species.warnings[0], HasSubstr("counts spins otherwise"));
  EXPECT_THAT(species.warnings[0], HasSubstr("divided by 6"));
  EXPECT_NEAR(species.partition->at(100.0).q, 1.0 + 3.0 * std::exp(-0.01) + 5.0 * std::exp(-0.03), 1e-3);
}

TEST(SpeciesFile, ATableThatDiffersOtherwiseIsUsedAndReported) {
  const Species species = parse_species(with_table(1.3), "Z.yaml");
  ASSERT_EQ(species.warnings.size(), 1u);
  EXPECT_THAT(species.warnings[0], HasSubstr("1.300 (at"));
  EXPECT_THAT(species.warnings[0], HasSubstr("the table is used"));
  EXPECT_THAT(species.partition->description(), HasSubstr("table of 6 temperatures"));
  EXPECT_THAT(parse_species(with_table(1.3, "  use: levels\n"), "Z.yaml").partition->description(),
              HasSubstr("sum over 3 levels"));
}

TEST(SpeciesFile, AStatedQ300IsComparedWithTheSum) {
  const std::string good = kLevels + "partition: {q_300: 8.95, from: made up}\n";
  EXPECT_THAT(parse_species(good, "Z.yaml").warnings, IsEmpty());
  const std::string bad = kLevels + "partition: {q_300: 12, from: made up}\n";
  ASSERT_EQ(parse_species(bad, "Z.yaml").warnings.size(), 1u);
  EXPECT_THAT(parse_species(bad, "Z.yaml").warnings[0], HasSubstr("Q(300 K) = 12 is 1.34"));
}

TEST(SpeciesFile, FromLevelsIsWhatHappensWithoutAPartition) {
  EXPECT_EQ(parse_species(kLevels + "partition: from_levels\n", "Z.yaml").partition->at(5.0).q,
            parse_species(kLevels, "Z.yaml").partition->at(5.0).q);
}

// ---- what is refused, and how

struct BrokenFile {
  const char* name;
  std::string text;
  std::size_t line;
  const char* found;
  const char* expected;
};

std::string changed(std::string text, const std::string& from, const std::string& to) {
  const auto at = text.find(from);
  EXPECT_NE(at, std::string::npos) << from;
  return text.replace(at, from.size(), to);
}

class BrokenSpeciesFile : public testing::TestWithParam<BrokenFile> {};

TEST_P(BrokenSpeciesFile, NamesLineFaultAndCure) {
  const BrokenFile& broken = GetParam();
  try {
    (void)parse_species(broken.text, "broken.yaml");
    FAIL() << "the broken file was accepted";
  } catch (const InputError& error) {
    EXPECT_EQ(error.place().file, "broken.yaml");
    EXPECT_EQ(error.place().line, broken.line) << error.what();
    EXPECT_THAT(error.complaint().found, HasSubstr(broken.found));
    EXPECT_THAT(error.complaint().expected + " " + error.complaint().advice, HasSubstr(broken.expected));
  }
}

/// A vector, not testing::Values: the latter takes the compiler a minute.
std::vector<BrokenFile> broken_files() {
  return {
      {"Empty", "", 0, "holds nothing", "YAML"},
      {"NoYaml", "name: [CO\nkind: linear\n", 2, "this is no YAML", "a species file in YAML"},
      {"BytesThatAreNoText", "name: \xff\xfe\n", 0, "not UTF-8", "YAML"},
      {"AList", "- name: CO\n", 1, "the file holds a list", "a mapping"},
      {"TwoDocuments", kLinear + "---\n" + kLinear, 0, "several YAML documents", "one"},
      {"NoName", changed(kLinear, "name: XY\n", ""), 1, "the key 'name' is missing", "species-files.md"},
      {"NameWithABlank", changed(kLinear, "name: XY", "name: X Y"), 1, "the name 'X Y'", "c-C3H2"},
      {"UnknownKind", changed(kLinear, "kind: linear", "kind: liner"), 3, "the kind 'liner'",
       "did you mean 'linear'?"},
      {"UnknownKey", kLinear + "dipoles: {}\n", 13, "the key 'dipoles' is not known",
       "did you mean 'dipole'?"},
      {"MisspeltKey", changed(kLinear, "dipole:", "dipol:"), 1, "the key 'dipole' is missing",
       "is 'dipol' meant to be it?"},
      {"UnknownKeyInside", changed(kLinear, "D: 10 kHz", "Dj: 10 kHz"), 5,
       "the key 'Dj' is not known in 'constants'", "one of B, D, H, L, from"},
      {"KeyTwice", kLinear + "kind: linear\n", 13, "the key 'kind' of the file stands here again",
       "each key once"},
      {"BareNumber", changed(kLinear, "B: 10 GHz", "B: 10"), 5, "'constants.B': '10' has no unit",
       "230.538 GHz"},
      {"UnitOfSomethingElse", changed(kLinear, "B: 10 GHz", "B: 10 Debye"), 5, "'constants.B': unit 'Debye'",
       "a frequency"},
      {"NoNumber", changed(kLinear, "mu0: 1.5 D", "mu0: large"), 6, "'dipole.mu0': 'large'", "0.11 D"},
      {"NegativeB", changed(kLinear, "B: 10 GHz", "B: -10 GHz"), 5, "'constants.B' is not above 0",
       "above 0"},
      {"DOfAnotherUnit", changed(kLinear, "D: 10 kHz", "D: 100 MHz"), 5, "'constants.D' is 0.01 of B",
       "often printed in kHz"},
      {"SpinRuleOfAnotherRotor", kLinear + "spin: {rule: c2v, axis: a, spins: ['1/2'], from: made up}\n", 5, "c2v",
       "spin rule"},
      {"TooManySpins", kLinear + "spin: {rule: dinfh, spins: ['9/2', '9/2', '9/2', '9/2', '9/2'], from: made up}\n",
       13, "5 pairs", "at most 4"},
      {"NoDipole", changed(kLinear, "mu0: 1.5 D", "mu0: 0 D"), 6, "'dipole.mu0' is 0", "dipole moment"},
      {"NoSource", changed(kLinear, ", from: made up}", "}"), 5, "the key 'from' is missing in 'constants'",
       "species-files.md"},
      {"EmptySource", changed(kLinear, "from: made up}", "from: ''}"), 5, "'constants.from' is empty",
       "a text"},
      {"NoValidity", changed(kLinear, "holds:", "# holds:"), 1, "the key 'holds' is missing",
       "species-files.md"},
      {"UnreachableJ", changed(changed(kLinear, "D: 10 kHz", "D: 10 MHz"), "largest_j: 12", "largest_j: 30"),
       12, "the energies stop rising at J = 22", "up to which the constants hold"},
      {"JOfZero", changed(kLinear, "largest_j: 12", "largest_j: 0"), 12, "'holds.largest_j' is '0'",
       "a whole number from 1 to 400"},
      {"NegativeTemperature", changed(kLinear, "300 K", "-300 K"), 12, "not above 0.001 K", "1000 K"},
      {"VibrationWithoutUnit", changed(kLinear, "500 cm-1", "500"), 9, "'500' is no energy", "3.845 cm-1"},
      {"VibrationIsNoList",
       changed(kLinear, "  modes:\n    - {energy: 500 cm-1, degeneracy: 2}\n    - {energy: 900 K}\n",
               "  modes: 500 cm-1\n"),
       8, "'vibration.modes' holds a text", "a list with at least one element"},
      {"UnknownSpinRule", kLinear + "spin: {rule: c2w, spins: [0.5], from: x}\n", 13, "c2w", "c2v"},
      {"SpinThatIsNone", kLinear + "spin: {rule: dinfh, spins: [up], from: x}\n", 13,
       "'up' is no nuclear spin", "1/2"},
      {"LevelTwice", changed(kLevels, "label: \"1\"", "label: \"J = 2\""), 6, "two levels have the label",
       "a label for each"},
      {"NoLevelAtZero", changed(kLevels, "energy: 0 K", "energy: 0.1 K"), 6,
       "the lowest level has the energy 0.1 K", "which has 0 K"},
      {"DegeneracyOfZero", changed(kLevels, "degeneracy: 3", "degeneracy: 0"), 6,
       "the degeneracy is not above 0", "above 0"},
      {"UnknownLevel", changed(kLevels, "lower: \"0\"", "lower: \"9\""), 13, "there is no level '9'",
       "one of 0, 1, 2"},
      {"FrequencyOfAnotherStep", changed(kLevels, "41.664 GHz", "416.64 GHz"), 12, "a step of 20 K",
       "agree within 1 %"},
      {"LineUpsideDown", changed(kLevels, "upper: \"2\", lower: \"1\"", "upper: \"1\", lower: \"2\""), 12,
       "'1' lies -2 K above '2'", "agree within 1 %"},
      {"LineTwice",
       changed(kLevels, "upper: J=1, lower: \"0\", frequency: 20.8365 GHz",
               "upper: \"2\", lower: \"1\", frequency: 41.664 GHz"),
       13, "the transition 2-1 stands in the list twice", "once"},
      {"AWithoutUnit", changed(kLevels, "2e-7 s-1", "2e-7"), 12,
       "'transitions.list[1].einstein_a': '2e-7' has no unit", "7.2e-8 s-1"},
      {"ScalarPartition", kLevels + "partition: from_level\n", 15, "'partition' is 'from_level'",
       "from_levels"},
      {"PartitionWithoutQ", kLevels + "partition: {from: x}\n", 15, "states no Q", "table, file, q_300"},
      {"TableThatFalls", changed(with_table(1.0), "[50 K", "[0.5 K"), 17, "this is no table of Q",
       "Q rising with T"},
      {"TableOfThreeColumns", changed(with_table(1.0), "[50 K,", "[50 K, 1.0,"), 17,
       "a row of the table has 3 values", "[300 K, 108.87]"},
      {"TableWithoutUnit", changed(with_table(1.0), "[50 K", "[50"), 17, "'50' has no unit",
       "a temperature"}};
}

INSTANTIATE_TEST_SUITE_P(Files, BrokenSpeciesFile, testing::ValuesIn(broken_files()),
                         [](const auto& broken) { return std::string(broken.param.name); });

}  // namespace
}  // namespace trotline
