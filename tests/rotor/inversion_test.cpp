#include <map>

#include <trotline/base/errors.hpp>
#include <trotline/physics/constants.hpp>
#include <trotline/rotor/inversion.hpp>
#include <trotline/rotor/line_strength.hpp>

namespace trotline {
namespace {

/// NH3. Inversion: Costain 1951, Phys. Rev. 82, 108, as quoted by Townes & Schawlow 1955, section 12-2; from
/// memory, checked by the measured lines below. Rotation: B, C and the quartic terms from memory, to the
/// digits that give the levels of the rotation spectrum below.
InvertingConstants ammonia() {
  InvertingConstants c;
  c.mean = {.axial_hz = 186726.36e6, .b_hz = 298117.06e6};
  c.mean.distortion.d_j_hz = 25.2e6;
  c.mean.distortion.d_jk_hz = -47.2e6;
  c.mean.distortion.d_k_hz = 27.0e6;
  c.inversion = {.nu0_hz = 23785.88e6,
                 .c_j = -6.36996e-3,
                 .c_k = 8.88986e-3,
                 .c_jj = 8.6922e-7,
                 .c_jk = -1.7845e-6,
                 .c_kk = 5.3075e-7,
                 .holds_to_j = 6};
  return c;
}

RotorModel model_of(const InvertingConstants& c, int highest_j) {
  return inverting_model(c, 1.47 * constants::kDebyeCM, *make_spin_rule({.rule = "d3h"}),
                         {.highest_j = highest_j});
}

std::map<std::string, const RotorTransition*> by_label(const RotorModel& model) {
  std::map<std::string, const RotorTransition*> found;
  for (const RotorTransition& line : model.transitions) {
    found[label_of(model.levels[line.upper].quanta) + "-" + label_of(model.levels[line.lower].quanta)] =
        &line;
  }
  return found;
}

TEST(Inversion, AmmoniaLinesAgreeWithMeasuredOnesWithinTheScatterOfTheExpansion) {
  // Rest frequencies [MHz] without hyperfine structure, from memory; metastable ones first.
  const std::tuple<int, int, double> measured[] = {{1, 1, 23694.4955}, {2, 2, 23722.6333}, {4, 4, 24139.4169},
                                                   {5, 5, 24532.9887}, {6, 6, 25056.025},  {2, 1, 23098.819},
                                                   {3, 2, 22834.185},  {3, 1, 22234.51},   {5, 4, 22653.02}};
  for (const auto& [j, k, frequency_mhz] : measured) {
    EXPECT_NEAR(inversion_frequency_hz(ammonia(), j, k) / 1e6, frequency_mhz, 0.15) << j << "," << k;
  }
  // K = 3 is displaced by a splitting that the expansion does not have.
  EXPECT_NEAR(inversion_frequency_hz(ammonia(), 3, 3) / 1e6, 23870.1296, 0.3);
  EXPECT_NEAR(inversion_frequency_hz(ammonia(), 4, 3) / 1e6, 22688.3, 3.0);
}

TEST(Inversion, AMeasuredFrequencyTakesThePlaceOfTheExpansion) {
  InvertingConstants c = ammonia();
  c.measured = {{3, 3, 23870.1296e6}};
  const RotorModel model = model_of(c, 4);
  EXPECT_NEAR(by_label(model).at("3(3)a-3(3)s")->frequency_hz, 23870.1296e6, 10.0);
}

TEST(Inversion, RotationLinesJoinSToA) {
  // 1(0)s-0(0)a at 572498.2 MHz, 2(1)s-1(1)a at 1168452.4, 2(1)a-1(1)s at 1215245.7, 2(0)a-1(0)s at 1214858.7
  // (from memory). D_J and D_JK above are given to three digits: 0.05 MHz of D_J move 2-1 by 1.6 MHz.
  const RotorModel model = model_of(ammonia(), 2);
  const auto lines = by_label(model);
  EXPECT_NEAR(lines.at("1(0)s-0(0)a")->frequency_hz / 1e6, 572498.2, 5.0);
  EXPECT_NEAR(lines.at("2(1)s-1(1)a")->frequency_hz / 1e6, 1168452.4, 20.0);
  EXPECT_NEAR(lines.at("2(1)a-1(1)s")->frequency_hz / 1e6, 1215245.7, 20.0);
  EXPECT_NEAR(lines.at("2(0)a-1(0)s")->frequency_hz / 1e6, 1214858.7, 20.0);
  for (const RotorTransition& line : model.transitions) {
    EXPECT_EQ(model.levels[line.upper].quanta.inversion, -model.levels[line.lower].quanta.inversion);
    EXPECT_EQ(model.levels[line.upper].quanta.k, model.levels[line.lower].quanta.k);
  }
}

TEST(Inversion, LevelsThatDoNotExistForKZeroAreLeftOut) {
  const RotorModel model = model_of(ammonia(), 5);
  for (const RotorLevel& level : model.levels) {
    if (level.quanta.k == 0) {
      EXPECT_EQ(level.quanta.inversion, level.quanta.j % 2 == 0 ? -1 : +1);
    }
  }
  EXPECT_EQ(label_of(model.levels.front().quanta), "0(0)a");
}

TEST(Inversion, TakingTheMiddleOf00ForTheZeroOfEnergyMakesQTooSmall) {
  // Published Q counts from the lowest level that exists, 0(0)a, which lies half a splitting above the middle.
  // Found with an independent model: ignoring that costs 2.7 percent at 19 K.
  const RotorModel model = model_of(ammonia(), 8);
  const double zero_hz = model.levels.front().energy_hz;
  EXPECT_NEAR(zero_hz, 0.5 * 23785.88e6, 1.0);
  double q = 0.0;
  double q_ignoring = 0.0;
  for (const RotorLevel& level : model.levels) {
    const double middle_hz = level.energy_hz + level.quanta.inversion * 0.5 *
                                                   inversion_frequency_hz(ammonia(), level.quanta.j, level.quanta.k);
    q += level.degeneracy() * std::exp(-constants::kKelvinPerHz * (level.energy_hz - zero_hz) / 19.0);
    q_ignoring += level.degeneracy() * std::exp(-constants::kKelvinPerHz * middle_hz / 19.0);
  }
  EXPECT_NEAR(q / q_ignoring - 1.0, 0.027, 0.0005);
}

TEST(Inversion, MetastableLevelsLieAtTheirPublishedEnergies) {
  // Upper levels of (1,1) to (6,6) [K] as quoted with Ao et al. 2011, A&A 529, A154 (from memory there),
  // counted from the middle of 0(0); the constants above are good to 0.1 percent.
  const double published_k[] = {23.26, 64.45, 123.54, 200.53, 295.37, 408.06};
  const RotorModel model = model_of(ammonia(), 6);
  for (const RotorLevel& level : model.levels) {
    const auto& q = level.quanta;
    if (q.k == q.j && q.j > 0) {
      const double half_k = 0.5 * constants::kKelvinPerHz * inversion_frequency_hz(ammonia(), q.j, q.k);
      const double mean_k = constants::kKelvinPerHz * level.energy_hz + q.inversion * half_k;
      EXPECT_NEAR(mean_k, published_k[q.j - 1], 1e-3 * published_k[q.j - 1] + 0.02);
    }
  }
}

TEST(Inversion, EinsteinAOfThe11LineAgreesWithTheLiterature) {
  // 1.67e-7 1/s (Ho & Townes 1983, ARA&A 21, 239; from memory) for a dipole of 1.47 D.
  const RotorModel model = model_of(ammonia(), 3);
  EXPECT_NEAR(by_label(model).at("1(1)a-1(1)s")->einstein_a_per_s, 1.67e-7, 0.01 * 1.67e-7);
}

TEST(Inversion, LinesBeyondTheExpansionAreLeftOutWithAWarning) {
  const RotorModel model = model_of(ammonia(), 9);
  for (const RotorTransition& line : model.transitions) EXPECT_LE(model.levels[line.upper].quanta.j, 6);
  EXPECT_THAT(model.warnings.at(0), testing::HasSubstr("above J = 6"));
}

TEST(Inversion, BadConstantsAreRefused) {
  const auto refused = [](auto change) {
    InvertingConstants c = ammonia();
    change(c);
    EXPECT_THROW((void)model_of(c, 3), DomainError);
  };
  refused([](InvertingConstants& c) { c.inversion.nu0_hz = 0.0; });
  refused([](InvertingConstants& c) { c.inversion.c_jk = std::nan(""); });
  refused([](InvertingConstants& c) { c.inversion.holds_to_j = -1; });
  refused([](InvertingConstants& c) { c.measured = {{1, 2, 1e9}}; });
  refused([](InvertingConstants& c) { c.measured = {{1, 1, -1e9}}; });
  refused([](InvertingConstants& c) { c.mean.b_hz = -1.0; });
}

}  // namespace
}  // namespace trotline
