#include <Eigen/Eigenvalues>

#include <algorithm>
#include <map>
#include <numbers>

#include <trotline/physics/constants.hpp>
#include <trotline/rotor/asymmetric.hpp>

#include "rotor/molecules.hpp"
#include "rotor/operator_hamiltonian.hpp"

namespace trotline {
namespace {

// Q without spin weights, from the levels.
double direct_sum(const AsymmetricLevels& levels, double temperature_k) {
  double q = 0.0;
  for (std::size_t i = 0; i < levels.size(); ++i) {
    q += (2.0 * levels.j[i] + 1.0) * std::exp(-constants::kKelvinPerHz * levels.energy_hz[i] / temperature_k);
  }
  return q;
}

TEST(AsymmetricRotor, WaterOfSixthOrderIsCutWhereItsSeriesStopsRising) {
  // The trap first: without a cut, the operators give negative energies at J = 49.
  const auto lowest = [](int j) {
    return Eigen::SelfAdjointEigenSolver<Eigen::MatrixXd>(full_hamiltonian(water(), j),
                                                          Eigen::EigenvaluesOnly)
        .eigenvalues()[0];
  };
  EXPECT_GT(lowest(48), 0.0);
  EXPECT_LT(lowest(49), 0.0);

  const AsymmetricLevels levels = asymmetric_levels(water(), 60);
  ASSERT_EQ(levels.warnings.size(), 1U);
  EXPECT_THAT(levels.warnings[0], testing::HasSubstr("the distortion series stops rising"));
  std::map<std::pair<int, int>, double> last;  // by ladder
  for (std::size_t i = 0; i < levels.size(); ++i) {
    EXPECT_GE(levels.energy_hz[i], 0.0);
    const std::pair ladder(levels.ka[i], levels.ka[i] + levels.kc[i] - levels.j[i]);
    if (last.contains(ladder)) {
      EXPECT_GT(levels.energy_hz[i], last.at(ladder));
    }
    last[ladder] = levels.energy_hz[i];
  }
  // Rotational Q of water, both isomers with weight 1, against the classical limit
  // sqrt(pi (kT/h)^3 / (ABC)) (Gordy & Cook, ch. III): 545 at 1000 K; distortion adds 2 to 4 percent.
  const double kt_hz = 1000.0 / constants::kKelvinPerHz;
  const AsymmetricConstants c = water();
  const double classical = std::sqrt(std::numbers::pi * kt_hz / c.a_hz * kt_hz / c.b_hz * kt_hz / c.c_hz);
  EXPECT_NEAR(direct_sum(levels, 1000.0) / classical, 1.03, 0.02);
}

TEST(AsymmetricRotor, NothingIsMissingBelowTheEnergyThatAModelClaims) {
  // Against the same rotor computed further: every level of the longer list below the bound is in the
  // shorter.
  for (const AsymmetricConstants& c : {formaldehyde(), sulphur_dioxide(), water()}) {
    const AsymmetricLevels brief = asymmetric_levels(c, 12);
    const AsymmetricLevels full = asymmetric_levels(c, 24);
    EXPECT_LT(brief.complete_to_hz, full.complete_to_hz);
    const auto below = [&](const AsymmetricLevels& levels) {
      return std::count_if(levels.energy_hz.begin(), levels.energy_hz.end(),
                           [&](double e) { return e <= brief.complete_to_hz; });
    };
    EXPECT_EQ(below(brief), below(full));
    EXPECT_GT(below(brief), 12);
  }
}

TEST(AsymmetricRotor, ACutBySeriesLeavesTheLowLevelsOfIsocyanicAcidComplete) {
  // HNCO with its large D_K and nothing of higher order (from memory): K turns near sqrt(A / 2 D_K) = 8.7.
  AsymmetricConstants c{.a_hz = 918.4e9, .b_hz = 11.071e9, .c_hz = 10.911e9};
  c.diagonal.d_k_hz = 6.0e9;
  const AsymmetricLevels levels = asymmetric_levels(c, 20);
  EXPECT_EQ(*std::max_element(levels.ka.begin(), levels.ka.end()), 8);
  EXPECT_THAT(levels.warnings.at(0), testing::HasSubstr("J = 9, Ka = 9 upward"));
  // J = 21 with Ka = 0 lies at 10.99 GHz * 21 * 20, lower than Ka = 9.
  EXPECT_NEAR(levels.complete_to_hz, 10.99e9 * 20 * 21, 0.05e9 * 20 * 21);
}

/// Basis states far beyond the classical limit of K are left out where only levels up to an energy are
/// wanted.
TEST(AsymmetricRotor, LevelsUpToAnEnergyAreThoseOfTheWholeBasis) {
  for (const AsymmetricConstants& c : {formaldehyde(), sulphur_dioxide(), water()}) {
    RotorOptions options;
    options.highest_j = 60;
    options.highest_energy_hz = 1.2 * c.c_hz * 60 * 61;
    options.highest_line_j = 5;
    const RotorModel model = asymmetric_model(c, {1e-30, 0.0, 0.0}, *make_spin_rule({}), options);
    const AsymmetricLevels whole = asymmetric_levels(c, 60);
    std::map<std::string, double> energies;
    for (std::size_t i = 0; i < whole.size(); ++i) {
      if (whole.energy_hz[i] > options.highest_energy_hz) continue;
      energies[label_of({.j = whole.j[i], .k = whole.ka[i], .kc = whole.kc[i]})] = whole.energy_hz[i];
    }
    ASSERT_EQ(model.levels.size(), energies.size());
    for (const RotorLevel& level : model.levels) {
      // Rounding: a few eps times the largest energy on the diagonal.
      EXPECT_NEAR(level.energy_hz, energies.at(label_of(level.quanta)), 1e-12 * c.a_hz * 60 * 61);
    }
  }
}

TEST(AsymmetricRotor, LinesAboveAJAreLeftOutAndTheOthersStayTheSame) {
  RotorOptions options;
  options.highest_j = 12;
  const RotorModel whole =
      asymmetric_model(sulphur_dioxide(), {0.0, 1e-30, 0.0}, *make_spin_rule({}), options);
  options.highest_line_j = 7;
  const RotorModel cut = asymmetric_model(sulphur_dioxide(), {0.0, 1e-30, 0.0}, *make_spin_rule({}), options);
  EXPECT_EQ(cut.levels.size(), whole.levels.size());
  std::size_t expected = 0;
  for (const RotorTransition& line : whole.transitions) {
    expected += std::max(whole.levels[line.upper].quanta.j, whole.levels[line.lower].quanta.j) <= 7;
  }
  EXPECT_EQ(cut.transitions.size(), expected);
}

}  // namespace
}  // namespace trotline
