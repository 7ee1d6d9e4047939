#include <trotline/rotor/linear.hpp>

#include <gtest/gtest.h>

#include <array>
#include <boost/multiprecision/cpp_bin_float.hpp>
#include <cmath>
#include <limits>

#include <trotline/base/errors.hpp>
#include <trotline/physics/constants.hpp>

namespace trotline {
namespace {

using Wide = boost::multiprecision::cpp_bin_float_50;

// CO in v = 0, adjusted to the 95 predicted frequencies of the published list (CDMS entry 28503, version of
// 2008); its .int file gives the dipole: 0.1101135, -1.133238E-05 and -3.810608E-11 for m^4.
constexpr LinearConstants kCo = {57635.96802e6, 0.183505284e6, 0.172302164, -2.55574076e-7};
constexpr LinearDipole kCoDipole = {0.1101135 * constants::kDebyeCM, -1.133238e-5 * constants::kDebyeCM,
                                    -3.810608e-11 * constants::kDebyeCM};

struct CoLine {
  double frequency_mhz;
  double log10_a;
};

// CDMS entry 28503 (Mueller et al. 2001, A&A 370, L49; 2005, J. Mol. Struct. 742, 215): frequency in MHz and
// log10 of A in 1/s, printed to four digits, as in the sample distributed with astroquery.
constexpr std::array<CoLine, 8> kCoLines = {{{115271.2018, -7.1425},
                                             {230538.0000, -6.1605},
                                             {345795.9899, -5.6026},
                                             {461040.7682, -5.2128},
                                             {576267.9305, -4.9132},
                                             {691473.0763, -4.6701},
                                             {806651.8060, -4.4657},
                                             {921799.7000, -4.2895}}};

// The published A were computed from log10 of intensity and of Q, and printed as log10: three roundings by
// half a unit of the fourth digit.
constexpr double kDigitsOfA = 3 * 0.00005 * 2.302585;

TEST(LinearRotor, FrequenciesOfCoAgreeWithPublishedList) {
  const auto lines = linear_lines(kCo, kCoDipole, 8);
  ASSERT_EQ(lines.size(), kCoLines.size());
  for (std::size_t i = 0; i < lines.size(); ++i) {
    EXPECT_NEAR(lines[i].frequency_hz / (kCoLines[i].frequency_mhz * 1e6), 1.0, 1e-8) << lines[i].upper_j;
  }
}

TEST(LinearRotor, EinsteinAOfCoAgreesWithPublishedListWithinItsDigits) {
  const auto lines = linear_lines(kCo, kCoDipole, 8);
  for (std::size_t i = 0; i < lines.size(); ++i) {
    EXPECT_NEAR(lines[i].einstein_a_per_s / std::pow(10.0, kCoLines[i].log10_a), 1.0, kDigitsOfA)
        << lines[i].upper_j;
  }
}

TEST(LinearRotor, ConstantDipoleMakesEinsteinAOfCoTooLarge) {
  const LinearDipole constant = {kCoDipole.mu0_c_m, 0.0, 0.0};
  const auto lines = linear_lines(kCo, constant, 8);
  const auto excess = [&](std::size_t i) {
    return lines[i].einstein_a_per_s / std::pow(10.0, kCoLines[i].log10_a) - 1.0;
  };
  // (mu0/mu)^2 - 1 to first order in mu2 J^2 / mu0: 0.02 % and 1.3 %.
  EXPECT_NEAR(excess(0), 2.0 * 1.133238e-5 / 0.1101135, kDigitsOfA);
  EXPECT_NEAR(excess(7), 2.0 * 64.0 * 1.133238e-5 / 0.1101135,
              kDigitsOfA + 2e-4);  // 2nd order: 3/4 of 0.013^2
}

TEST(LinearRotor, FrequencyIsDifferenceOfEnergiesIn50Digits) {
  const auto energy = [](int j) {
    const Wide x = Wide(j) * (j + 1);
    return x * (Wide(kCo.b_hz) + x * (-Wide(kCo.d_hz) + x * (Wide(kCo.h_hz) + x * Wide(kCo.l_hz))));
  };
  for (int j = 1; j <= 120; ++j) {
    const double exact = static_cast<double>(energy(j) - energy(j - 1));
    EXPECT_NEAR(linear_frequency_hz(kCo, j) / exact, 1.0, 8 * std::numeric_limits<double>::epsilon()) << j;
  }
}

TEST(LinearRotor, RigidRotorFollowsItsTextbookFormulas) {
  const LinearConstants rigid = {10e9, 0.0, 0.0, 0.0};
  for (int j = 0; j <= 50; ++j) EXPECT_DOUBLE_EQ(linear_energy_hz(rigid, j), 10e9 * j * (j + 1));
  for (int j = 1; j <= 50; ++j) EXPECT_DOUBLE_EQ(linear_frequency_hz(rigid, j), 20e9 * j);
}

TEST(LinearRotor, EinsteinARisesAsTheCubeOfFrequencyTimesJOver2JPlus1) {
  const LinearConstants rigid = {10e9, 0.0, 0.0, 0.0};
  const auto lines = linear_lines(rigid, {constants::kDebyeCM, 0.0, 0.0}, 40);
  for (const LinearLine& line : lines) {
    const double j = line.upper_j;
    const double expected = 3.0 * j * j * j * j / (2.0 * j + 1.0);  // over that of 1-0, where it is 1
    EXPECT_NEAR(line.einstein_a_per_s / lines.front().einstein_a_per_s / expected, 1.0, 1e-14);
  }
}

TEST(LinearRotor, LevelsAreCutWhereTheSeriesTurnsOver) {
  // With B and D alone the frequency of J -> J-1 vanishes at 2 J^2 = B/D: here at J = 50.
  const LinearConstants constants = {10e9, 10e9 / 5000.0, 0.0, 0.0};
  EXPECT_EQ(linear_highest_j(constants, 1000), 49);
  EXPECT_EQ(linear_highest_j(constants, 20), 20);
  EXPECT_THROW((void)linear_lines(constants, {}, 50), DomainError);
  EXPECT_EQ(linear_lines(constants, {}, 49).size(), 49u);
}

TEST(LinearRotor, ModelHoldsTheSameLevelsAndLines) {
  RotorOptions options;
  options.highest_j = 30;
  const RotorModel model = linear_model(kCo, kCoDipole, *make_spin_rule({}), options);
  const auto lines = linear_lines(kCo, kCoDipole, 30);
  ASSERT_EQ(model.levels.size(), 31u);
  ASSERT_EQ(model.transitions.size(), lines.size());
  EXPECT_TRUE(model.warnings.empty());
  EXPECT_EQ(model.complete_to_hz, linear_energy_hz(kCo, 30));
  for (std::size_t i = 0; i < lines.size(); ++i) {
    const RotorTransition& line = model.transitions[i];
    EXPECT_EQ(line.upper, i + 1);
    EXPECT_EQ(line.lower, i);
    EXPECT_EQ(model.levels[line.upper].degeneracy(), 2.0 * static_cast<double>(i) + 3.0);
    // A difference of two energies loses their ratio to it, 15 at J = 30.
    EXPECT_NEAR(line.frequency_hz / lines[i].frequency_hz, 1.0, 1e-14);
    EXPECT_NEAR(line.einstein_a_per_s / lines[i].einstein_a_per_s, 1.0, 1e-13);
  }
}

TEST(LinearRotor, ModelSaysWhereTheSeriesTurnsOver) {
  RotorOptions options;
  options.highest_j = 80;
  const RotorModel model = linear_model({10e9, 10e9 / 5000.0, 0.0, 0.0}, {}, *make_spin_rule({}), options);
  EXPECT_EQ(model.levels.size(), 50u);
  ASSERT_EQ(model.warnings.size(), 1u);
  EXPECT_NE(model.warnings[0].find("J = 49"), std::string::npos) << model.warnings[0];
}

TEST(LinearRotor, RefusesConstantsThatMakeNoRotor) {
  const double nan = std::numeric_limits<double>::quiet_NaN();
  EXPECT_THROW((void)linear_highest_j({0.0, 0.0, 0.0, 0.0}, 5), DomainError);
  EXPECT_THROW((void)linear_highest_j({-1e9, 0.0, 0.0, 0.0}, 5), DomainError);
  EXPECT_THROW((void)linear_highest_j({nan, 0.0, 0.0, 0.0}, 5), DomainError);
  EXPECT_THROW((void)linear_highest_j({1e9, nan, 0.0, 0.0}, 5), DomainError);
  EXPECT_THROW((void)linear_highest_j({1e9, 0.0, 0.0, 0.0}, -1), DomainError);
}

}  // namespace
}  // namespace trotline
