// Kinds of species file that wrap a rotor: what they give, and what they refuse.

#include <gtest/gtest.h>

#include <trotline/base/errors.hpp>
#include <trotline/rotor/asymmetric.hpp>
#include <trotline/species/species_file.hpp>

namespace trotline {
namespace {

const char* const kAsymmetric = R"(name: X
kind: asymmetric
constants: {reduction: A, A: 60 GHz, B: 10 GHz, C: 9 GHz, Delta_J: 6 kHz, delta_J: 1 kHz, from: invented}
dipole: {mu_b: 1.6 D, from: invented}
spin: {rule: c2v, axis: b, spins: [1/2], from: invented}
holds: {largest_j: 10, largest_k: 4, highest_frequency: 500 GHz, highest_temperature: 100 K}
)";

const char* const kSymmetric = R"(name: X
kind: symmetric
constants: {A: 150 GHz, B: 9 GHz, D_J: 4 kHz, D_JK: 170 kHz, from: invented}
dipole: {mu: 3.9 D, from: invented}
spin: {rule: c3v, spins: [1/2], from: invented}
holds: {largest_j: 10, highest_temperature: 100 K}
)";

const char* const kStructure = R"(name: X
kind: structure
structure:
  atoms:
    - {isotope: 12C, z: 0 Angstrom}
    - {isotope: 16O, z: 1.12832 Angstrom}
  from: Huber & Herzberg 1979, r_e of CO; from memory
dipole: {z: 0.11 D, from: invented}
holds: {largest_j: 5, highest_temperature: 100 K}
)";

std::string with(std::string text, const std::string& from, const std::string& to) {
  const auto at = text.find(from);
  if (at == std::string::npos) throw std::runtime_error("no " + from);
  return text.replace(at, from.size(), to);
}

TEST(AsymmetricKind, CountsEnergiesFromTheLowestLevelAndNamesIsomers) {
  const Species species = parse_species(kAsymmetric, "x.yaml");
  EXPECT_EQ(species.kind, SpeciesKind::asymmetric);
  EXPECT_EQ(species.levels.front().label, "0(0,0)");
  EXPECT_EQ(species.levels.front().energy_k, 0.0);
  EXPECT_EQ(species.levels.front().spin, "para");
  EXPECT_EQ(species.levels.at(1).label, "1(0,1)");
  EXPECT_EQ(species.levels.at(1).degeneracy, 9.0);  // (2J+1) times 3
}

TEST(AsymmetricKind, GivesLinesOnlyAsFarAsTheConstantsHold) {
  const Species species = parse_species(kAsymmetric, "x.yaml");
  ASSERT_FALSE(species.transitions.empty());
  for (const Transition& line : species.transitions) {
    const std::string& upper = species.levels[line.upper].label;
    EXPECT_LE(std::stoi(upper), 10) << upper;
    EXPECT_LE(std::stoi(upper.substr(upper.find('(') + 1)), 4) << upper;
    EXPECT_LE(line.frequency_hz, 500e9);
  }
}

TEST(AsymmetricKind, HasAllLevelsThatQNeeds) {
  const Species species = parse_species(kAsymmetric, "x.yaml");
  EXPECT_GE(species.partition->highest_k(), 100.0);
  EXPECT_LT(species.partition->at(100.0).relative_error, 1e-6);
}

TEST(AsymmetricKind, ReadsBothReductions) {
  const Species a = parse_species(kAsymmetric, "x.yaml");
  const Species s =
      parse_species(with(with(with(kAsymmetric, "reduction: A", "reduction: S"), "Delta_J", "D_J"),
                         "delta_J: 1 kHz", "d_1: -1 kHz"),
                    "x.yaml");
  // d_1 of one reduction is -delta_J of the other, and without d_2 and delta_K no other term differs.
  ASSERT_EQ(a.levels.size(), s.levels.size());
  for (std::size_t i = 0; i < a.levels.size(); ++i)
    EXPECT_NEAR(a.levels[i].energy_k, s.levels[i].energy_k, 1e-8);
}

TEST(SymmetricKind, GivesWeightsAndIsomersByK) {
  const Species species = parse_species(kSymmetric, "x.yaml");
  for (const Level& level : species.levels) {
    const int j = std::stoi(level.label);
    const int k = std::stoi(level.label.substr(level.label.find('(') + 1));
    const double expected = (2 * j + 1) * (k == 0 ? 1 : 2) * (k % 3 == 0 ? 2 : 1);
    EXPECT_EQ(level.degeneracy, expected) << level.label;
    EXPECT_EQ(level.spin, k % 3 == 0 ? "A" : "E") << level.label;
  }
}

TEST(StructureKind, GivesTheBOfADiatomicMolecule) {
  const Species species = parse_species(kStructure, "x.yaml");
  // B_e of CO is 1.93128 cm-1 (Huber & Herzberg 1979, from memory); r_e has six digits.
  EXPECT_NEAR(species.transitions.front().frequency_hz / (2 * 1.93128 * 29.9792458e9), 1.0, 1e-4);
  ASSERT_FALSE(species.warnings.empty());
  EXPECT_NE(species.warnings.front().find("must not be used to identify lines"), std::string::npos);
}

TEST(StructureKind, ScalesAParentByTheRatioRuleAndSaysSo) {
  const Species species =
      parse_species(with(with(kStructure, "12C", "13C"),
                         "dipole:", "parent: {isotopes: [12C, 16O], B: 57635.968 MHz, from: CO}\ndipole:"),
                    "x.yaml");
  // B0(13CO) = 55101.01 MHz, Cazzoli, Puzzarini & Lapinov 2004, from memory.
  EXPECT_NEAR(species.transitions.front().frequency_hz * 1e-6, 2 * 55101.01, 2 * 55101.01 * 3e-4);
  EXPECT_NE(species.warnings.at(1).find("expected error"), std::string::npos);
}

struct Broken {
  const char* name;
  std::string text;
  std::string message;  ///< a part of what the error says
};

class BrokenRotor : public testing::TestWithParam<Broken> {};

TEST_P(BrokenRotor, IsRefusedWithFileLineAndReason) {
  try {
    (void)parse_species(GetParam().text, "broken.yaml");
    FAIL() << "was accepted";
  } catch (const InputError& error) {
    const std::string message = error.what();
    EXPECT_EQ(message.find("broken.yaml:"), 0u) << message;
    EXPECT_NE(message.find(GetParam().message), std::string::npos) << message;
  }
}

INSTANTIATE_TEST_SUITE_P(
    Files, BrokenRotor,
    testing::Values(
        Broken{"NegativeConstant", with(kAsymmetric, "B: 10 GHz", "B: -10 GHz"), "B"},
        Broken{"ABelowB", with(kAsymmetric, "A: 60 GHz", "A: 6 GHz"), "A >= B >= C"},
        Broken{"NoUnit", with(kAsymmetric, "A: 60 GHz", "A: 60"), "constants.A"},
        Broken{"DistortionAsLargeAsB", with(kAsymmetric, "Delta_J: 6 kHz", "Delta_J: 60 GHz"), "D_J"},
        Broken{"UnknownReduction", with(kAsymmetric, "reduction: A", "reduction: B"), "A or S"},
        Broken{"ConstantsOfBothReductions", with(kAsymmetric, "delta_J", "d_1"), "d_1"},
        Broken{"NoDipole", with(kAsymmetric, "mu_b: 1.6 D", "mu_b: 0 D"), "mu_a, mu_b, mu_c"},
        Broken{"UnknownSpinRule", with(kAsymmetric, "rule: c2v", "rule: c2w"), "c2v"},
        Broken{"RuleWithoutAxis", with(kAsymmetric, "axis: b, ", ""), "axis"},
        Broken{"UnreachableJ", with(kAsymmetric, "largest_j: 10", "largest_j: 1000"), "largest_j"},
        Broken{"BothAAndC", with(kSymmetric, "B: 9 GHz", "B: 9 GHz, C: 8 GHz"), "both A and C"},
        Broken{"OblateCalledA", with(kSymmetric, "A: 150 GHz", "A: 5 GHz"), "A above B"},
        Broken{"NoMu", with(kSymmetric, "mu: 3.9 D", "mu_a: 3.9 D"), "'mu' is missing in 'dipole'"},
        Broken{"OneAtom", with(kStructure, "    - {isotope: 16O, z: 1.12832 Angstrom}\n", ""),
               "at least two"},
        Broken{"UnknownIsotope", with(kStructure, "16O", "26O"), "26O"},
        Broken{"AtomsOnTopOfEachOther", with(kStructure, "1.12832", "0.01"), "apart"},
        Broken{"StructureInMetres", with(kStructure, "1.12832 Angstrom", "1.12832 m"), "from"}),
    [](const auto& test) { return std::string(test.param.name); });

}  // namespace
}  // namespace trotline
