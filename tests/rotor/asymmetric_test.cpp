#include <algorithm>
#include <map>

#include <trotline/base/errors.hpp>

#include "rotor/molecules.hpp"

namespace trotline {
namespace {

TEST(AsymmetricRotor, LineStrengthsOf2FollowTheirClosedFormInKappa) {
  // 2(0,2) and 2(2,0) share K = 0 and K = 2: S(2(0,2)-1(0,1)) = 2 cos^2, S(2(2,0)-1(0,1)) = 2 sin^2 of the
  // mixing angle, tan 2 theta = sqrt3 (B-C) / (2A-B-C) from the 2x2 block of Townes & Schawlow, section 4-2.
  for (const double kappa : {-0.9, -0.5, 0.0, 0.5, 0.9}) {
    const AsymmetricConstants c{.a_hz = 3e9, .b_hz = (2.0 + kappa) * 1e9, .c_hz = 1e9};
    const RotorModel model = model_of(c, {.a_c_m = 1.0}, 2);
    const auto index = by_label(model);
    const double twice = std::atan2(std::sqrt(3.0) * (c.b_hz - c.c_hz), 2.0 * c.a_hz - c.b_hz - c.c_hz);
    for (const RotorTransition& line : model.transitions) {
      if (line.lower != index.at("1(0,1)")) continue;
      if (line.upper == index.at("2(0,2)")) {
        EXPECT_NEAR(line.line_strength_mu2_c2m2, 1.0 + std::cos(twice), 1e-13);
      }
      if (line.upper == index.at("2(2,0)")) {
        EXPECT_NEAR(line.line_strength_mu2_c2m2, 1.0 - std::cos(twice), 1e-13);
      }
    }
  }
}

TEST(AsymmetricRotor, EachComponentOfTheDipoleMakesTheLinesOfItsType) {
  const AsymmetricConstants c{.a_hz = 3e9, .b_hz = 1.8e9, .c_hz = 1e9};
  const DipoleMoment dipoles[] = {{.a_c_m = 1.0}, {.b_c_m = 1.0}, {.c_c_m = 1.0}};
  for (const Representation representation : {Representation::i_r, Representation::iii_l}) {
    for (int type = 0; type < 3; ++type) {
      AsymmetricConstants used = c;
      used.representation = representation;
      const RotorModel model = model_of(used, dipoles[type], 8);
      EXPECT_GT(model.transitions.size(), 100U);
      for (const RotorTransition& line : model.transitions) {
        const QuantumNumbers& u = model.levels[line.upper].quanta;
        const QuantumNumbers& l = model.levels[line.lower].quanta;
        EXPECT_EQ((u.k + l.k) % 2 != 0, type != 0);    // Ka changes its parity in b- and c-type lines
        EXPECT_EQ((u.kc + l.kc) % 2 != 0, type != 2);  // Kc in a- and b-type lines
        EXPECT_LE(std::abs(u.j - l.j), 1);
      }
    }
  }
}

TEST(AsymmetricRotor, RepresentationsAgreeInEnergiesAndLines) {
  const AsymmetricConstants prolate_basis{.a_hz = 3e9, .b_hz = 1.8e9, .c_hz = 1e9};
  AsymmetricConstants oblate_basis = prolate_basis;
  oblate_basis.representation = Representation::iii_l;
  const DipoleMoment dipole{.a_c_m = 1.0, .b_c_m = 2.0, .c_c_m = 3.0};
  const RotorModel one = model_of(prolate_basis, dipole, 10);
  const RotorModel other = model_of(oblate_basis, dipole, 10);
  ASSERT_EQ(one.transitions.size(), other.transitions.size());
  std::map<std::string, double> strengths;
  const auto name = [](const RotorModel& m, const RotorTransition& t) {
    const auto a = label_of(m.levels[t.upper].quanta);
    const auto b = label_of(m.levels[t.lower].quanta);
    return a < b ? a + " " + b : b + " " + a;
  };
  for (const RotorTransition& line : one.transitions)
    strengths[name(one, line)] = line.line_strength_mu2_c2m2;
  for (const RotorTransition& line : other.transitions) {
    EXPECT_NEAR(line.line_strength_mu2_c2m2, strengths.at(name(other, line)), 1e-11);
  }
}

TEST(AsymmetricRotor, SumRuleHoldsInTheFinishedModel) {
  const AsymmetricConstants c{.a_hz = 3e9, .b_hz = 1.8e9, .c_hz = 1e9};
  const RotorModel model = model_of(c, kAllThree, 9);
  std::vector<double> sums(model.levels.size(), 0.0);
  for (const RotorTransition& line : model.transitions) {
    sums[line.upper] += line.line_strength_mu2_c2m2;
    sums[line.lower] += line.line_strength_mu2_c2m2;
  }
  for (std::size_t i = 0; i < sums.size(); ++i) {
    const int j = model.levels[i].quanta.j;
    if (j < 9) {
      EXPECT_NEAR(sums[i], 3.0 * (2.0 * j + 1.0), 1e-10);
    }
  }
}

TEST(AsymmetricRotor, ZerothLevelLiesAtZeroAndJZeroAloneIsAllowed) {
  const AsymmetricLevels levels = asymmetric_levels(formaldehyde(), 0);
  ASSERT_EQ(levels.size(), 1U);
  EXPECT_EQ(levels.energy_hz[0], 0.0);
  EXPECT_TRUE(model_of(formaldehyde(), kAllThree, 0).transitions.empty());
}

TEST(AsymmetricRotor, SpinWeightsFollowTheLevels) {
  const auto spin = make_spin_rule({.rule = "c2v", .axis = 'a', .spins = {0.5}});
  const RotorModel model = asymmetric_model(formaldehyde(), {.a_c_m = 7.8e-30}, *spin, {.highest_j = 5});
  for (const RotorLevel& level : model.levels) {
    EXPECT_EQ(level.spin_weight, level.quanta.k % 2 == 0 ? 1.0 : 3.0);
  }
  for (const RotorTransition& line : model.transitions) {
    EXPECT_EQ(model.levels[line.upper].isomer, model.levels[line.lower].isomer);
  }
}

TEST(AsymmetricRotor, LimitsDropLinesAndLevels) {
  const auto none = make_spin_rule({});
  const RotorModel model = asymmetric_model(formaldehyde(), {.a_c_m = 7.8e-30}, *none,
                                            {.highest_j = 10,
                                             .highest_energy_hz = 2e12,
                                             .lowest_frequency_hz = 80e9,
                                             .highest_frequency_hz = 116e9,
                                             .least_line_strength = 1e-3});
  for (const RotorLevel& level : model.levels) EXPECT_LE(level.energy_hz, 2e12);
  for (const RotorTransition& line : model.transitions) {
    EXPECT_GE(line.frequency_hz, 80e9);
    EXPECT_LE(line.frequency_hz, 116e9);
  }
  EXPECT_LE(model.complete_to_hz, 2e12);
}

TEST(AsymmetricRotor, BadInputIsRefused) {
  const auto none = make_spin_rule({});
  EXPECT_THROW((void)asymmetric_levels(formaldehyde(), -1), DomainError);
  EXPECT_THROW((void)asymmetric_levels(formaldehyde(), kHighestJ + 1), DomainError);
  AsymmetricConstants swapped = formaldehyde();
  std::swap(swapped.a_hz, swapped.b_hz);
  EXPECT_THROW((void)asymmetric_levels(swapped, 5), DomainError);
  EXPECT_THROW((void)asymmetric_model(swapped, {}, *none, {}), DomainError);
  EXPECT_THROW((void)asymmetric_model(formaldehyde(), {.b_c_m = std::nan("")}, *none, {}), DomainError);
  EXPECT_THROW((void)asymmetric_model(formaldehyde(), {}, *none, {.highest_j = 1000}), DomainError);
}

TEST(AsymmetricRotor, LevelsAndLinesAreSorted) {
  // With B = C whole series of lines coincide but for rounding.
  const AsymmetricConstants symmetric{.a_hz = 30e9, .b_hz = 5e9, .c_hz = 5e9};
  for (const AsymmetricConstants& c : {formaldehyde(), symmetric}) {
    const RotorModel model = model_of(c, kAllThree, 20);
    EXPECT_TRUE(
        std::is_sorted(model.levels.begin(), model.levels.end(),
                       [](const RotorLevel& x, const RotorLevel& y) { return x.energy_hz < y.energy_hz; }));
    EXPECT_TRUE(std::is_sorted(
        model.transitions.begin(), model.transitions.end(),
        [](const RotorTransition& x, const RotorTransition& y) { return x.frequency_hz < y.frequency_hz; }));
    for (const RotorTransition& line : model.transitions) {
      ASSERT_EQ(line.frequency_hz, model.levels[line.upper].energy_hz - model.levels[line.lower].energy_hz);
    }
  }
}

TEST(AsymmetricRotor, SameInputGivesTheSameBits) {
  const RotorModel one = model_of(formaldehyde(), kAllThree, 20);
  const RotorModel other = model_of(formaldehyde(), kAllThree, 20);
  ASSERT_EQ(one.transitions.size(), other.transitions.size());
  for (std::size_t i = 0; i < one.transitions.size(); ++i) {
    ASSERT_EQ(one.transitions[i].frequency_hz, other.transitions[i].frequency_hz);
    ASSERT_EQ(one.transitions[i].einstein_a_per_s, other.transitions[i].einstein_a_per_s);
  }
}

}  // namespace
}  // namespace trotline
