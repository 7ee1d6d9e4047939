#include <Eigen/Geometry>

#include <fstream>
#include <numbers>
#include <random>
#include <sstream>

#include <trotline/base/errors.hpp>
#include <trotline/physics/constants.hpp>
#include <trotline/rotor/isotope.hpp>
#include <trotline/rotor/isotopologue.hpp>
#include <trotline/rotor/structure.hpp>

namespace trotline {
namespace {

constexpr double kAngstrom = 1e-10;
constexpr double kHzPerCm = 100.0 * constants::kLightMPerS;

Atom at(const char* isotope, double x, double y, double z) {
  return {isotope, Eigen::Vector3d(x, y, z) * kAngstrom};
}

/// Bent XY2 with the symmetry axis along x.
std::vector<Atom> bent(const char* centre, const char* end, double bond, double angle_degree) {
  const double half = 0.5 * angle_degree * std::numbers::pi / 180.0;
  return {at(centre, 0, 0, 0), at(end, bond * std::cos(half), bond * std::sin(half), 0),
          at(end, bond * std::cos(half), -bond * std::sin(half), 0)};
}

/// Apex and three atoms at `bond` from it, with `angle` between the bonds.
std::vector<Atom> pyramid(const char* apex, const char* base, double bond, double angle_degree) {
  const double angle = angle_degree * std::numbers::pi / 180.0;
  const double from_axis = std::asin(2.0 / std::sqrt(3.0) * std::sin(0.5 * angle));
  std::vector<Atom> atoms = {at(apex, 0, 0, 0)};
  for (int i = 0; i < 3; ++i) {
    const double turn = 2.0 * std::numbers::pi * i / 3.0;
    atoms.push_back(at(base, bond * std::sin(from_axis) * std::cos(turn),
                       bond * std::sin(from_axis) * std::sin(turn), bond * std::cos(from_axis)));
  }
  return atoms;
}

std::vector<Atom> methane() {
  const double d = 1.087 / std::sqrt(3.0);
  return {at("12C", 0, 0, 0), at("1H", d, d, d), at("1H", d, -d, -d), at("1H", -d, d, -d),
          at("1H", -d, -d, d)};
}

TEST(Isotope, MassesAgreeWithTheEvaluationOf2003WithinThreeOfItsErrors) {
  std::ifstream stream(TROTLINE_SOURCE_DIR "/tests/reference/isotope_masses_2003.csv");
  ASSERT_TRUE(stream.good());
  std::size_t compared = 0;
  for (std::string row; std::getline(stream, row);) {
    std::istringstream cells(row);
    std::string name, mass, error;
    std::getline(cells, name, ',');
    std::getline(cells, mass, ',');
    std::getline(cells, error);
    if (name.empty() || name[0] == '#' || name == "isotope") continue;
    const double half_a_digit =
        std::stod(mass) < 10.0 ? 5e-10 : 5e-9;  // ten digits, zeros at the end left out
    EXPECT_NEAR(isotope_mass_u(name), std::stod(mass), 3.0 * std::stod(error) + half_a_digit) << name;
    ++compared;
  }
  EXPECT_EQ(compared, known_isotopes().size());
}

TEST(Isotope, ShortNamesOfHydrogenAreKnownAndUnknownOnesAreRefused) {
  EXPECT_EQ(isotope_mass_u("H"), isotope_mass_u("1H"));
  EXPECT_EQ(isotope_mass_u("D"), isotope_mass_u("2H"));
  EXPECT_EQ(isotope_mass_u("12C"), 12.0);
  try {
    (void)isotope_mass_u("14C");
    FAIL() << "no error";
  } catch (const InputError& error) {
    EXPECT_THAT(error.what(), testing::HasSubstr("one of 12C, 13C"));
  }
  EXPECT_THROW((void)isotope_mass_u("C"), InputError);
  EXPECT_THROW((void)isotope_mass_u(""), InputError);
  EXPECT_THROW((void)isotope_mass_u("12c"), InputError);
}

TEST(Diatomic, EquilibriumConstantsFollowFromMassesAndBondLengthsOfHuberAndHerzberg) {
  // Huber & Herzberg 1979, Constants of Diatomic Molecules: r_e [Angstrom] and B_e [1/cm] of the ground
  // states, from memory. Bound 1e-4: what Born-Oppenheimer corrections in the published r_e amount to.
  const std::tuple<const char*, const char*, double, double> table[] = {
      {"12C", "16O", 1.128323, 1.93128087}, {"1H", "35Cl", 1.274552, 10.593416},
      {"14N", "14N", 1.097685, 1.998241},   {"12C", "32S", 1.534941, 0.8200434},
      {"28Si", "16O", 1.509739, 0.7267521}, {"1H", "19F", 0.916808, 20.955712}};
  for (const auto& [first, second, r, b] : table) {
    EXPECT_NEAR(diatomic_b_hz(first, second, r * kAngstrom) / kHzPerCm, b, 1e-4 * b) << first << second;
  }
}

TEST(Diatomic, AgreesWithTheUsualFactorAndWithTheStructureOfTwoAtoms) {
  // B [MHz] = 505379.0 / I [u A^2], the factor in use (from CODATA).
  const double moment = 12.0 * 15.99491461926 / 27.99491461926 * 1.128323 * 1.128323;
  const double b_hz = diatomic_b_hz("12C", "16O", 1.128323 * kAngstrom);
  EXPECT_NEAR(b_hz / 1e6, 505379.0 / moment, 2e-7 * b_hz / 1e6);
  const RigidRotor rotor =
      rigid_rotor({at("12C", 0.3, 0.0, 0.0), at("16O", 0.3, 1.128323, 0.0)}, {0.0, -3e-31, 0.0});
  EXPECT_EQ(rotor.rotor_class, RotorClass::linear);
  EXPECT_TRUE(std::isinf(rotor.a_hz));
  EXPECT_NEAR(rotor.b_hz, b_hz, 1e-12 * b_hz);
  EXPECT_NEAR(rotor.c_hz, b_hz, 1e-12 * b_hz);
  EXPECT_NEAR(std::abs(rotor.dipole.a_c_m), 3e-31, 1e-43);
}

TEST(Structure, ClassesOfRotorsAreRecognised) {
  EXPECT_EQ(rigid_rotor(bent("16O", "1H", 0.958, 104.5)).rotor_class, RotorClass::asymmetric);
  EXPECT_EQ(rigid_rotor(methane()).rotor_class, RotorClass::spherical);
  EXPECT_EQ(rigid_rotor(pyramid("14N", "1H", 1.012, 106.7)).rotor_class, RotorClass::oblate);
  std::vector<Atom> methyl_cyanide = pyramid("12C", "1H", 1.10, 108.9);
  methyl_cyanide.push_back(at("12C", 0, 0, -1.46));
  methyl_cyanide.push_back(at("14N", 0, 0, -2.62));
  EXPECT_EQ(rigid_rotor(methyl_cyanide).rotor_class, RotorClass::prolate);
  EXPECT_EQ(rigid_rotor({at("1H", 0, 0, 0), at("12C", 0, 0, 1.066), at("14N", 0, 0, 2.22)}).rotor_class,
            RotorClass::linear);
  EXPECT_STREQ(name_of(RotorClass::oblate), "oblate symmetric");
}

TEST(Structure, MomentsOfWaterAreThoseOfABentTriatomicMolecule) {
  // About the symmetry axis 2 m r^2 sin^2, about the other axis in the plane 2 m M / (M + 2m) r^2 cos^2 of
  // half the angle (Townes & Schawlow, ch. 4), and for a flat body their sum.
  const double half = 0.5 * 104.48 * std::numbers::pi / 180.0;
  const double m = isotope_mass_kg("1H");
  const double heavy = isotope_mass_kg("16O");
  const double r2 = std::pow(0.9576 * kAngstrom, 2);
  const double about_symmetry_axis = 2.0 * m * r2 * std::pow(std::sin(half), 2);
  const double about_other_axis = 2.0 * m * heavy / (heavy + 2.0 * m) * r2 * std::pow(std::cos(half), 2);
  const RigidRotor water = rigid_rotor(bent("16O", "1H", 0.9576, 104.48));
  const double bound = 1e-14 * water.moments_kg_m2[2];
  EXPECT_NEAR(water.moments_kg_m2[0], about_other_axis, bound);
  EXPECT_NEAR(water.moments_kg_m2[1], about_symmetry_axis, bound);
  EXPECT_NEAR(water.moments_kg_m2[2], about_symmetry_axis + about_other_axis, bound);
  // Against the ground state's C, 278139 MHz (from memory): the 2.6 percent of the header, its worst case.
  EXPECT_NEAR(water.c_hz / 278139e6 - 1.0, 0.026, 0.001);
}

TEST(Structure, EquilibriumConstantsDifferFromGroundStateOnesByAboutOnePercent) {
  // NH3: r_e 1.0116 Angstrom, 106.7 degrees (Herzberg 1966, from memory) against B0 = 298117, C0 = 186726
  // MHz.
  const RigidRotor ammonia = rigid_rotor(pyramid("14N", "1H", 1.0116, 106.7));
  EXPECT_NEAR(ammonia.b_hz / 298117e6, 1.0, 0.015);
  EXPECT_NEAR(ammonia.c_hz / 186726e6, 1.0, 0.025);
  EXPECT_GT(std::abs(ammonia.b_hz / 298117e6 - 1.0), 0.001);
}

TEST(Structure, ConstantsAndDipoleDoNotDependOnTheFrame) {
  std::vector<Atom> atoms = {at("12C", 0, 0, 0), at("16O", 0, 0, 1.2), at("1H", 0.94, 0, -0.59),
                             at("2H", -0.94, 0.1, -0.59)};
  const Eigen::Vector3d dipole(1e-30, -2e-30, 7e-30);
  const RigidRotor here = rigid_rotor(atoms, dipole);
  std::mt19937_64 random(11);
  std::normal_distribution<double> normal;
  for (int i = 0; i < 100; ++i) {
    const Eigen::Quaterniond turn =
        Eigen::Quaterniond(normal(random), normal(random), normal(random), normal(random)).normalized();
    const Eigen::Vector3d shift =
        3.0 * kAngstrom * Eigen::Vector3d(normal(random), normal(random), normal(random));
    std::vector<Atom> moved = atoms;
    for (Atom& atom : moved) atom.position_m = turn * atom.position_m + shift;
    const RigidRotor there = rigid_rotor(moved, turn * dipole);
    EXPECT_NEAR(there.a_hz, here.a_hz, 1e-12 * here.a_hz);
    EXPECT_NEAR(there.b_hz, here.b_hz, 1e-12 * here.b_hz);
    EXPECT_NEAR(there.c_hz, here.c_hz, 1e-12 * here.c_hz);
    EXPECT_NEAR(std::abs(there.dipole.a_c_m), std::abs(here.dipole.a_c_m), 1e-41);
    EXPECT_NEAR(std::abs(there.dipole.b_c_m), std::abs(here.dipole.b_c_m), 1e-41);
    EXPECT_NEAR(std::abs(there.dipole.c_c_m), std::abs(here.dipole.c_c_m), 1e-41);
    EXPECT_NEAR(there.axes.determinant(), 1.0, 1e-12);
  }
}

TEST(Structure, DipoleLiesOnTheAxisThatSymmetryDemands) {
  // Water's dipole lies along b, formaldehyde's along a.
  const RigidRotor water = rigid_rotor(bent("16O", "1H", 0.9576, 104.48), {6.2e-30, 0.0, 0.0});
  EXPECT_NEAR(std::abs(water.dipole.b_c_m), 6.2e-30, 1e-42);
  EXPECT_NEAR(water.dipole.a_c_m, 0.0, 1e-42);
  const RigidRotor formaldehyde = rigid_rotor(
      {at("12C", 0, 0, 0), at("16O", 0, 0, 1.206), at("1H", 0.94, 0, -0.58), at("1H", -0.94, 0, -0.58)},
      {0, 0, 7.8e-30});
  EXPECT_NEAR(std::abs(formaldehyde.dipole.a_c_m), 7.8e-30, 1e-42);
}

std::string complaint_of(const std::vector<Atom>& atoms) {
  try {
    (void)rigid_rotor(atoms);
  } catch (const InputError& error) {
    return error.what();
  }
  return "no error";
}

TEST(Structure, WhatIsNoMoleculeIsRefused) {
  using testing::HasSubstr;
  EXPECT_THAT(complaint_of({}), HasSubstr("0 atoms"));
  EXPECT_THAT(complaint_of({at("12C", 0, 0, 0)}), HasSubstr("1 atoms"));
  EXPECT_THAT(complaint_of({at("12C", 0, 0, 0), at("16O", 0, 0, 0.01)}),
              HasSubstr("atom 1 (12C) and atom 2 (16O)"));
  EXPECT_THAT(complaint_of({at("12C", 0, 0, 0), at("16Q", 0, 0, 1.1)}), HasSubstr("16Q"));
  EXPECT_THAT(complaint_of({at("12C", 0, 0, 0), at("16O", 0, std::nan(""), 1.1)}),
              HasSubstr("no finite number"));
  EXPECT_THAT(complaint_of({{"12C", {0, 0, 0}}, {"16O", {0, 0, 1.1}}}),
              HasSubstr("check the unit"));  // metres
  EXPECT_THROW((void)rigid_rotor({at("12C", 0, 0, 0), at("16O", 0, 0, 1.1)}, {0, 0, 1.0 / 0.0}), InputError);
  EXPECT_THROW((void)diatomic_b_hz("12C", "16O", 0.0), InputError);
  EXPECT_THROW((void)diatomic_b_hz("12C", "16O", std::nan("")), InputError);
}

TEST(Isotopologue, RatioRuleHoldsWithinItsExpectedErrorForDiatomicMolecules) {
  // Ground-state B0 [MHz] of parent and isotopologue, from memory (as in the line lists in use).
  struct Case {
    std::vector<std::string> parent, isotopologue;
    double parent_mhz, isotopologue_mhz;
  };
  const Case cases[] = {{{"12C", "16O"}, {"13C", "16O"}, 57635.968, 55101.011},
                        {{"12C", "16O"}, {"12C", "18O"}, 57635.968, 54891.420},
                        {{"12C", "32S"}, {"12C", "34S"}, 24495.562, 24103.548},
                        {{"12C", "32S"}, {"13C", "32S"}, 24495.562, 23123.856},
                        // Huber & Herzberg: B_e - alpha_e / 2 of HCl and DCl.
                        {{"1H", "35Cl"}, {"2H", "35Cl"}, 10.43982 * 29979.2458, 5.39215 * 29979.2458}};
  for (const Case& c : cases) {
    const Estimated b = diatomic_isotopologue_b(c.parent_mhz * 1e6, c.parent, c.isotopologue);
    const double error = std::abs(b.value_hz / 1e6 / c.isotopologue_mhz - 1.0);
    EXPECT_LE(error, b.relative_error) << c.isotopologue[0] << c.isotopologue[1];
    EXPECT_GE(error, 0.1 * b.relative_error);  // nor is the expectation far too large
  }
}

TEST(Isotopologue, RatioRuleHoldsForCarbonylSulphide) {
  // OCS: r(CO) = 1.1562, r(CS) = 1.5614 Angstrom; B0 = 6081.492, O13CS 6061.925, OC34S 5932.834 MHz (from
  // memory).
  const std::vector<Atom> structure = {at("16O", 0, 0, 0), at("12C", 0, 0, 1.1562), at("32S", 0, 0, 2.7176)};
  const ParentConstants parent{.b_hz = 6081.492e6};
  const auto carbon = isotopologue_constants(parent, structure, {"16O", "13C", "32S"});
  EXPECT_NEAR(carbon.b.value_hz / 1e6, 6061.925, carbon.b.relative_error * 6061.925);
  const auto sulphur = isotopologue_constants(parent, structure, {"16O", "12C", "34S"});
  EXPECT_NEAR(sulphur.b.value_hz / 1e6, 5932.834, sulphur.b.relative_error * 5932.834);
  EXPECT_TRUE(std::isinf(sulphur.a.value_hz));
  EXPECT_EQ(sulphur.c.value_hz, sulphur.b.value_hz);
}

TEST(Isotopologue, NoSubstitutionChangesNothing) {
  const auto same = isotopologue_constants({.a_hz = 3e11, .b_hz = 2e11, .c_hz = 1e11},
                                           bent("16O", "1H", 0.96, 104.5), {"16O", "1H", "1H"});
  EXPECT_EQ(same.a.value_hz, 3e11);
  EXPECT_EQ(same.c.value_hz, 1e11);
  EXPECT_EQ(same.b.relative_error, 0.0);
}

TEST(Isotopologue, DistortionScalesWithPowersOfTheRatio) {
  // D of CO and 13CO, 183.5 and 167.7 kHz (from memory): D goes as B^2.
  EXPECT_NEAR(scaled_distortion_hz(183.5e3, 55101.011 / 57635.968, 2), 167.7e3, 0.1e3);
}

TEST(Isotopologue, BadInputIsRefused) {
  const auto water = bent("16O", "1H", 0.96, 104.5);
  EXPECT_THROW((void)isotopologue_constants({3e11, 2e11, 1e11}, water, {"16O", "1H"}), InputError);
  EXPECT_THROW((void)isotopologue_constants({3e11, 2e11, 1e11}, water, {"16O", "1H", "4H"}), InputError);
  EXPECT_THROW((void)isotopologue_constants({3e11, 0.0, 1e11}, water, {"16O", "1H", "2H"}), DomainError);
  EXPECT_THROW((void)diatomic_isotopologue_b(-1.0, {"12C", "16O"}, {"13C", "16O"}), DomainError);
  EXPECT_THROW((void)diatomic_isotopologue_b(1e9, {"12C"}, {"13C", "16O"}), InputError);
}

}  // namespace
}  // namespace trotline
