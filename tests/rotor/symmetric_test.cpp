#include <map>

#include <trotline/base/errors.hpp>
#include <trotline/physics/constants.hpp>
#include <trotline/rotor/asymmetric.hpp>
#include <trotline/rotor/symmetric.hpp>

#include "rotor/published_list.hpp"

namespace trotline {
namespace {

/// CH3CN, v = 0 (as in Mueller, Drouin & Pearson 2009, A&A 506, 1487; from memory, checked below).
SymmetricConstants methyl_cyanide() {
  SymmetricConstants c{.axial_hz = 158099.0e6, .b_hz = 9198.899167e6};
  c.distortion.d_j_hz = 3.807528e3;
  c.distortion.d_jk_hz = 177.40796e3;
  c.distortion.d_k_hz = 2.8251e6;
  c.distortion.h_j_hz = -2.37e-4;
  c.distortion.h_jk_hz = 1.0257;
  c.distortion.h_kj_hz = 6.062;
  return c;
}

std::map<std::string, const RotorTransition*> by_label(const RotorModel& model) {
  std::map<std::string, const RotorTransition*> found;
  for (const RotorTransition& line : model.transitions) {
    found[label_of(model.levels[line.upper].quanta) + "-" + label_of(model.levels[line.lower].quanta)] =
        &line;
  }
  return found;
}

RotorModel model_of(const SymmetricConstants& c, double dipole_c_m, int highest_j) {
  return symmetric_model(c, dipole_c_m, *make_spin_rule({.rule = "c3v", .spins = {0.5}}),
                         {.highest_j = highest_j});
}

TEST(SymmetricRotor, FrequenciesOfMethylCyanideAgreeWithPublishedListWithin200kHz) {
  const auto list = read_symmetric_list("ch3cn_tag041505_v2008.cat");
  if (list.empty()) GTEST_SKIP() << "the published list is not at hand";
  const RotorModel model = model_of(methyl_cyanide(), 1.0, 20);
  const auto lines = by_label(model);
  int compared = 0;
  for (const ListedLine& listed : list) {
    const auto found = lines.find(listed.upper + "-" + listed.lower);
    if (found == lines.end() || model.levels[found->second->upper].quanta.k > 9) continue;
    EXPECT_NEAR(found->second->frequency_hz / 1e6, listed.frequency_mhz, 0.2) << found->first;
    ++compared;
  }
  EXPECT_GE(compared, 200);
}

TEST(SymmetricRotor, LinesListedForPlusKAndMinusKApartAddUpToOne) {
  const auto list = read_symmetric_list("ch3cn_tag041505_v2008.cat");
  if (list.empty()) GTEST_SKIP() << "the published list is not at hand";
  // Dipole and Q(300 K) are the list's own. S mu^2 summed over the rows of a line, each with its own A.
  const double mu_c_m = 3.92197 * constants::kDebyeCM;
  const RotorModel model = model_of(methyl_cyanide(), mu_c_m, 20);
  std::map<std::string, double> listed_strength;
  std::map<std::string, int> rows;
  std::map<std::string, double> listed_a;
  const auto lines = by_label(model);
  for (const ListedLine& listed : list) {
    const std::string name = listed.upper + "-" + listed.lower;
    const auto found = lines.find(name);
    if (found == lines.end() || model.levels[found->second->upper].quanta.k > 9)
      continue;  // letters from 10 on
    const int j = model.levels[found->second->upper].quanta.j;
    const double s = listed_line_strength(listed, 14683.6324, j);
    listed_strength[name] += s;
    listed_a[name] = einstein_a_per_s(listed.frequency_mhz * 1e6, s, 2.0 * j + 1.0);
    ++rows[name];
  }
  for (const auto& [name, strength] : listed_strength) {
    const RotorTransition& line = *lines.at(name);
    EXPECT_EQ(rows.at(name), model.levels[line.upper].quanta.k == 0 ? 1 : 2) << name;
    EXPECT_NEAR(line.line_strength_mu2_c2m2, strength, 1e-3 * strength) << name;
    EXPECT_NEAR(line.einstein_a_per_s, listed_a.at(name), 1e-3 * listed_a.at(name)) << name;
  }
  EXPECT_GE(listed_strength.size(), 150U);
}

TEST(SymmetricRotor, LevelsOfMethylCyanideLieWhereThePublishedListHasThem) {
  const auto list = read_symmetric_list("ch3cn_tag041505_v2008.cat");
  if (list.empty()) GTEST_SKIP() << "the published list is not at hand";
  const RotorModel model = model_of(methyl_cyanide(), 1.0, 20);
  const auto lines = by_label(model);
  for (const ListedLine& listed : list) {
    const auto found = lines.find(listed.upper + "-" + listed.lower);
    if (found == lines.end() || model.levels[found->second->upper].quanta.k > 6) continue;  // H_K is left out
    const double energy_cm = model.levels[found->second->lower].energy_hz / (100.0 * constants::kLightMPerS);
    // A and D_K come from the infrared and are given to about 1e-6.
    EXPECT_NEAR(energy_cm, listed.lower_energy_cm, 2e-4 + 2e-6 * listed.lower_energy_cm) << found->first;
  }
}

TEST(SymmetricRotor, PlusKAndMinusKAreOneLevelOfTwiceTheWeightAndTheSameA) {
  const RotorModel model = model_of(methyl_cyanide(), 1e-29, 12);
  const auto lines = by_label(model);
  for (const RotorLevel& level : model.levels) {
    EXPECT_EQ(level.rotational_degeneracy, (level.quanta.k == 0 ? 1.0 : 2.0) * (2.0 * level.quanta.j + 1.0));
    EXPECT_EQ(level.spin_weight, level.quanta.k % 3 == 0 ? 2.0 : 1.0);
  }
  // S for one sign is (J^2-K^2)/J: for 12(3)-11(3) 135/12, twice that for the level.
  EXPECT_NEAR(lines.at("12(3)-11(3)")->line_strength_mu2_c2m2, 2.0 * 135.0 / 12.0 * 1e-58, 1e-70);
  EXPECT_NEAR(lines.at("12(0)-11(0)")->line_strength_mu2_c2m2, 12.0 * 1e-58, 1e-70);
  const RotorTransition& k3 = *lines.at("12(3)-11(3)");
  EXPECT_NEAR(k3.einstein_a_per_s / einstein_a_per_s(k3.frequency_hz, 135.0 / 12.0 * 1e-58, 25.0), 1.0,
              1e-14);
}

TEST(SymmetricRotor, AgreesWithTheAsymmetricRotorInBothLimits) {
  for (const bool prolate : {true, false}) {
    SymmetricConstants c{.axial_hz = prolate ? 20e9 : 6e9, .b_hz = 10e9};
    c.distortion = {.d_j_hz = 2e3,
                    .d_jk_hz = -3e3,
                    .d_k_hz = 4e3,
                    .h_j_hz = 1e-2,
                    .h_jk_hz = 2e-2,
                    .h_kj_hz = -3e-2,
                    .h_k_hz = 4e-2};
    AsymmetricConstants limit{.a_hz = prolate ? 20e9 : 10e9, .b_hz = 10e9, .c_hz = prolate ? 10e9 : 6e9};
    limit.diagonal = c.distortion;
    limit.representation = prolate ? Representation::i_r : Representation::iii_l;
    const DipoleMoment dipole = prolate ? DipoleMoment{.a_c_m = 1.0} : DipoleMoment{.c_c_m = 1.0};
    const auto none = make_spin_rule({});
    const RotorModel symmetric = symmetric_model(c, 1.0, *none, {.highest_j = 15});
    const RotorModel asymmetric = asymmetric_model(limit, dipole, *none, {.highest_j = 15});
    std::map<std::pair<int, int>, double> energies;
    std::map<std::tuple<int, int, int>, double> strengths;
    const auto k_of = [&](const QuantumNumbers& q) { return prolate ? q.k : q.kc; };
    for (const RotorLevel& level : asymmetric.levels)
      energies[{level.quanta.j, k_of(level.quanta)}] = level.energy_hz;
    for (const RotorTransition& line : asymmetric.transitions) {
      const QuantumNumbers& u = asymmetric.levels[line.upper].quanta;
      const QuantumNumbers& l = asymmetric.levels[line.lower].quanta;
      strengths[{u.j, l.j, k_of(u)}] += line.line_strength_mu2_c2m2;
    }
    for (const RotorLevel& level : symmetric.levels) {
      const double expected = energies.at({level.quanta.j, level.quanta.k});
      EXPECT_NEAR(level.energy_hz, expected, 1e-12 * expected);
    }
    for (const RotorTransition& line : symmetric.transitions) {
      const QuantumNumbers& u = symmetric.levels[line.upper].quanta;
      EXPECT_NEAR(line.line_strength_mu2_c2m2, strengths.at({u.j, u.j - 1, u.k}), 1e-12 * u.j);
    }
  }
}

TEST(SymmetricRotor, ASeriesThatTurnsOverIsCut) {
  // With D_K alone the bottom of the K-ladders, E(K,K), turns where A K^2 - D_K K^4 does: K^2 near A/(2 D_K)
  // = 50.
  SymmetricConstants c{.axial_hz = 100e9, .b_hz = 5e9};
  c.distortion.d_k_hz = 1e9;
  const RotorModel model = model_of(c, 1.0, 20);
  for (const RotorLevel& level : model.levels) EXPECT_LE(level.quanta.k, 7);
  ASSERT_EQ(model.warnings.size(), 1U);
  EXPECT_THAT(model.warnings[0], testing::HasSubstr("J = 8, K = 8 upward"));
}

TEST(SymmetricRotor, NothingIsMissingBelowTheEnergyThatAModelClaims) {
  for (const double axial_hz : {20e9, 6e9}) {
    const SymmetricConstants c{.axial_hz = axial_hz, .b_hz = 10e9};
    const RotorModel brief = model_of(c, 1.0, 10);
    const RotorModel full = model_of(c, 1.0, 30);
    const auto below = [&](const RotorModel& m) {
      return std::count_if(m.levels.begin(), m.levels.end(),
                           [&](const RotorLevel& level) { return level.energy_hz <= brief.complete_to_hz; });
    };
    EXPECT_EQ(below(brief), below(full));
    EXPECT_GE(below(brief), 11);
  }
}

TEST(SymmetricRotor, ConstantsThatMakeNoRotorAreRefused) {
  const auto none = make_spin_rule({});
  const auto refused = [&](SymmetricConstants c) {
    EXPECT_THROW((void)symmetric_model(c, 1.0, *none, {}), DomainError);
  };
  refused({.axial_hz = -1e9, .b_hz = 1e9});
  refused({.axial_hz = 1e9, .b_hz = 0.0});
  refused({.axial_hz = 1e9, .b_hz = std::nan("")});
  refused({.axial_hz = 1e9, .b_hz = 1e9});
  refused({.axial_hz = 0.4e9, .b_hz = 1e9});  // C below B/2
  refused({.axial_hz = 2e9, .b_hz = 1e9, .distortion = {.d_j_hz = 2e9}});
  EXPECT_THROW((void)symmetric_model(methyl_cyanide(), std::nan(""), *none, {}), DomainError);
  EXPECT_THROW((void)symmetric_model(methyl_cyanide(), 1.0, *none, {.highest_j = -1}), DomainError);
}

TEST(SphericalRotor, LevelsHaveTheSquareOf2JPlus1States) {
  // CH4: B = 5.2410 1/cm (from memory); E = B J(J+1).
  const double b_hz = 5.2410 * 100.0 * constants::kLightMPerS;
  const RotorModel model = spherical_model({.b_hz = b_hz}, {.highest_j = 10});
  ASSERT_EQ(model.levels.size(), 11U);
  EXPECT_TRUE(model.transitions.empty());
  for (int j = 0; j <= 10; ++j) {
    EXPECT_EQ(model.levels[static_cast<std::size_t>(j)].degeneracy(), (2.0 * j + 1.0) * (2.0 * j + 1.0));
    EXPECT_NEAR(model.levels[static_cast<std::size_t>(j)].energy_hz, b_hz * j * (j + 1), 1e-15 * b_hz * 110);
  }
  EXPECT_THAT(model.warnings.at(0), testing::HasSubstr("no lines"));
}

TEST(SphericalRotor, BadConstantsAreRefusedAndATurningSeriesIsCut) {
  EXPECT_THROW((void)spherical_model({.b_hz = -1.0}, {}), DomainError);
  EXPECT_THROW((void)spherical_model({.b_hz = 1e9, .d_hz = 2e9}, {}), DomainError);
  // B x - D x^2 is the same for x and 100 - x; J(J+1) = 56 for J = 7 lies nearer to the top at 50 than 42
  // and 72.
  const RotorModel model = spherical_model({.b_hz = 1e9, .d_hz = 1e7}, {.highest_j = 20});
  EXPECT_EQ(model.levels.back().quanta.j, 7);
}

}  // namespace
}  // namespace trotline
