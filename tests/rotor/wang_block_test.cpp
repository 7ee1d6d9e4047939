#include <algorithm>
#include <map>
#include <random>
#include <set>

#include <trotline/rotor/wang_block.hpp>

namespace trotline {
namespace {

struct Labelled {
  int ka, kc;
  double energy_hz;
};

/// All levels of a J, by Ka and then by falling Kc: the order of the trade, in which energies never fall.
std::vector<Labelled> levels_of(const AsymmetricConstants& c, int j) {
  std::vector<Labelled> levels;
  for (const WangBlock& block : wang_blocks(HamiltonianAtJ(c, j), c.representation)) {
    for (std::size_t i = 0; i < block.ka.size(); ++i) {
      levels.push_back({block.ka[i], block.kc[i], block.energy_hz[static_cast<Eigen::Index>(i)]});
    }
  }
  std::sort(levels.begin(), levels.end(),
            [](const Labelled& x, const Labelled& y) { return x.ka != y.ka ? x.ka < y.ka : x.kc > y.kc; });
  return levels;
}

double energy_hz(const AsymmetricConstants& c, int j, int ka, int kc) {
  for (const Labelled& level : levels_of(c, j)) {
    if (level.ka == ka && level.kc == kc) return level.energy_hz;
  }
  ADD_FAILURE() << "no level " << j << "(" << ka << "," << kc << ")";
  return std::nan("");
}

constexpr Representation kRepresentations[] = {Representation::i_r, Representation::i_l,
                                               Representation::iii_r, Representation::iii_l};

// The closed forms of King, Hainer & Cross 1943 (J. Chem. Phys. 11, 27), also Townes & Schawlow, table 4-2;
// here written with Ray's kappa as E(kappa): E = (A+C)/2 J(J+1) + (A-C)/2 E(kappa).
struct ReducedEnergy {
  int j, ka, kc;
  double (*e)(double kappa);
};
constexpr ReducedEnergy kClosedForms[] = {
    {1, 1, 0, [](double k) { return k + 1.0; }},
    {1, 1, 1, [](double) { return 0.0; }},
    {1, 0, 1, [](double k) { return k - 1.0; }},
    {2, 2, 0, [](double k) { return 2.0 * (k + std::sqrt(k * k + 3.0)); }},
    {2, 2, 1, [](double k) { return k + 3.0; }},
    {2, 1, 1, [](double k) { return 4.0 * k; }},
    {2, 1, 2, [](double k) { return k - 3.0; }},
    {2, 0, 2, [](double k) { return 2.0 * (k - std::sqrt(k * k + 3.0)); }},
    {3, 3, 0, [](double k) { return 5.0 * k + 3.0 + 2.0 * std::sqrt(4.0 * k * k - 6.0 * k + 6.0); }},
    {3, 3, 1, [](double k) { return 2.0 * (k + std::sqrt(k * k + 15.0)); }},
    {3, 2, 1, [](double k) { return 5.0 * k - 3.0 + 2.0 * std::sqrt(4.0 * k * k + 6.0 * k + 6.0); }},
    {3, 2, 2, [](double k) { return 4.0 * k; }},
    {3, 1, 2, [](double k) { return 5.0 * k + 3.0 - 2.0 * std::sqrt(4.0 * k * k - 6.0 * k + 6.0); }},
    {3, 1, 3, [](double k) { return 2.0 * (k - std::sqrt(k * k + 15.0)); }},
    {3, 0, 3, [](double k) { return 5.0 * k - 3.0 - 2.0 * std::sqrt(4.0 * k * k + 6.0 * k + 6.0); }},
};

TEST(WangBlock, ReducedEnergiesAgreeWithTheClosedFormsOfKingHainerAndCross) {
  for (const Representation representation : kRepresentations) {
    for (const double kappa : {-0.9, -0.5, 0.0, 0.5, 0.9}) {
      const AsymmetricConstants c{.a_hz = 3e9,
                                  .b_hz = (2.0 + kappa) * 1e9,
                                  .c_hz = 1e9,
                                  .diagonal = {},
                                  .off_diagonal = {},
                                  .representation = representation};
      for (const ReducedEnergy& form : kClosedForms) {
        const double expected_hz = 2e9 * form.j * (form.j + 1.0) + 1e9 * form.e(kappa);
        // 1e-14 of the largest energy of the J, 36 GHz.
        EXPECT_NEAR(energy_hz(c, form.j, form.ka, form.kc), expected_hz, 4e-4)
            << form.j << "(" << form.ka << "," << form.kc << ") at kappa " << kappa;
      }
    }
  }
}

TEST(WangBlock, ProlateAndOblateLimitsAreReachedTo1e12) {
  DiagonalDistortion d{.d_j_hz = 3e3,
                       .d_jk_hz = 2e4,
                       .d_k_hz = 5e4,
                       .h_j_hz = 1e-3,
                       .h_jk_hz = 2e-3,
                       .h_kj_hz = 3e-3,
                       .h_k_hz = 4e-3};
  for (const Representation representation : kRepresentations) {
    const bool z_is_a = representation == Representation::i_r || representation == Representation::i_l;
    const double z_hz = z_is_a ? 30e9 : 3e9;
    const double other_hz = z_is_a ? 3e9 : 30e9;
    AsymmetricConstants c{.a_hz = 30e9,
                          .b_hz = other_hz,
                          .c_hz = 3e9,
                          .diagonal = d,
                          .off_diagonal = {},
                          .representation = representation};
    for (const int j : {1, 7, 40}) {
      const double x = j * (j + 1.0);
      for (const Labelled& level : levels_of(c, j)) {
        const double k = z_is_a ? level.ka : level.kc;
        const double expected = other_hz * x + (z_hz - other_hz) * k * k + d.at_hz(x, k * k);
        EXPECT_NEAR(level.energy_hz, expected, 1e-12 * std::abs(expected));
      }
    }
  }
}

TEST(WangBlock, LimitsAreReachedFromTheFarRepresentationToo) {
  // An oblate rotor about the a axis, where every block is far from diagonal; bound 1e-12 of the largest
  // energy.
  for (const int j : {1, 7, 40}) {
    const AsymmetricConstants oblate{.a_hz = 30e9, .b_hz = 30e9, .c_hz = 3e9};
    for (const Labelled& level : levels_of(oblate, j)) {
      const double expected = 30e9 * j * (j + 1.0) - 27e9 * level.kc * level.kc;
      EXPECT_NEAR(level.energy_hz, expected, 1e-12 * 30e9 * j * (j + 1.0)) << level.ka << " " << level.kc;
    }
    const AsymmetricConstants prolate{.a_hz = 30e9,
                                      .b_hz = 3e9,
                                      .c_hz = 3e9,
                                      .diagonal = {},
                                      .off_diagonal = {},
                                      .representation = Representation::iii_l};
    for (const Labelled& level : levels_of(prolate, j)) {
      const double expected = 3e9 * j * (j + 1.0) + 27e9 * level.ka * level.ka;
      EXPECT_NEAR(level.energy_hz, expected, 1e-12 * 30e9 * j * (j + 1.0)) << level.ka << " " << level.kc;
    }
  }
}

struct RandomRotor {
  explicit RandomRotor(std::mt19937_64& random) {
    std::uniform_real_distribution<double> ln_hz(std::log(1e9), std::log(1e12));
    double abc[] = {std::exp(ln_hz(random)), std::exp(ln_hz(random)), std::exp(ln_hz(random))};
    std::sort(std::begin(abc), std::end(abc), std::greater<>());
    constants.a_hz = abc[0];
    constants.b_hz = abc[1];
    constants.c_hz = abc[2];
    constants.representation = kRepresentations[random() % 4];
  }
  AsymmetricConstants constants = {};
};

/// Labels unique and complete, energies rising in the order of the labels, trace as the theory has it.
void expect_sound(const AsymmetricConstants& c, int j) {
  const auto levels = levels_of(c, j);
  ASSERT_EQ(levels.size(), static_cast<std::size_t>(2 * j + 1));
  const double largest_hz = levels.back().energy_hz;
  const double rounding_hz = 1e-13 * largest_hz;
  double trace = 0.0;
  for (std::size_t i = 0; i < levels.size(); ++i) {
    // 0, 1, 1, 2, 2 ... and J, J, J-1, J-1, J-2 ...: every label once.
    ASSERT_EQ(levels[i].ka, static_cast<int>(i + 1) / 2);
    ASSERT_EQ(levels[i].kc, j - static_cast<int>(i) / 2);
    ASSERT_GE(levels[i].energy_hz, levels[i == 0 ? 0 : i - 1].energy_hz - rounding_hz);
    trace += levels[i].energy_hz;
  }
  // Sum of E over a J: J(J+1)(2J+1)(A+B+C)/3, as each of Jx^2, Jy^2, Jz^2 has the same trace.
  const double expected = j * (j + 1.0) * (2.0 * j + 1.0) * (c.a_hz + c.b_hz + c.c_hz) / 3.0;
  ASSERT_NEAR(trace, expected, 1e-12 * expected);
}

TEST(WangBlock, LabelsAreUniqueAndCompleteAndTracesHoldForTenThousandRandomRotors) {
  std::mt19937_64 random(19430127);
  for (int i = 0; i < 10000; ++i) {
    const RandomRotor rotor(random);
    for (const int j : {static_cast<int>(random() % 9), i % 61}) {
      ASSERT_NO_FATAL_FAILURE(expect_sound(rotor.constants, j));
    }
  }
  for (int i = 0; i < 100; ++i) {
    const RandomRotor rotor(random);
    for (int j = 0; j <= 60; ++j) ASSERT_NO_FATAL_FAILURE(expect_sound(rotor.constants, j));
  }
}

TEST(WangBlock, LabelsHoldToJ120) {
  std::mt19937_64 random(1977);
  for (int i = 0; i < 8; ++i) ASSERT_NO_FATAL_FAILURE(expect_sound(RandomRotor(random).constants, 120));
}

TEST(WangBlock, EigenvectorsAreOrthonormalAndSolveTheBlock) {
  const AsymmetricConstants c{.a_hz = 90e9, .b_hz = 50e9, .c_hz = 30e9};
  const HamiltonianAtJ hamiltonian(c, 30);
  for (const WangBlock& block : wang_blocks(hamiltonian, c.representation, Eigenvectors::yes)) {
    const auto n = block.vectors.cols();
    const Eigen::MatrixXd unit = block.vectors.transpose() * block.vectors;
    EXPECT_LT((unit - Eigen::MatrixXd::Identity(n, n)).norm(), 1e-13 * static_cast<double>(n));
    const Eigen::MatrixXd h = wang_matrix_hz(hamiltonian, block.first_k, block.sign);
    const Eigen::MatrixXd residual =
        h * block.vectors - block.vectors * block.energy_hz.matrix().asDiagonal();
    EXPECT_LT(residual.norm(), 1e-13 * static_cast<double>(n) * h.norm());
  }
}

/// The block in which a label stands, from a rotor.
std::map<std::pair<int, int>, std::size_t> block_by_label(const AsymmetricConstants& c, int j) {
  std::map<std::pair<int, int>, std::size_t> found;
  const auto blocks = wang_blocks(HamiltonianAtJ(c, j), c.representation);
  for (std::size_t b = 0; b < blocks.size(); ++b) {
    for (std::size_t i = 0; i < blocks[b].ka.size(); ++i) found[{blocks[b].ka[i], blocks[b].kc[i]}] = b;
  }
  return found;
}

TEST(WangBlock, LabelsStayRightWherePairsAreSplitByLessThanRounding) {
  // In the most asymmetric rotor all levels of a low J are far apart, so their order alone gives the labels.
  // As constants change, a level keeps its symmetry: the same label must stand in the same block of HNCO (A,
  // B, C from memory, to the digits that matter here), whose pairs coincide to the last bit from J = 5 on.
  const AsymmetricConstants clear{.a_hz = 3e9, .b_hz = 2e9, .c_hz = 1e9};
  const AsymmetricConstants hnco{.a_hz = 918.4e9, .b_hz = 11.071e9, .c_hz = 10.911e9};
  int coincident = 0;
  for (int j = 1; j <= 10; ++j) {
    std::vector<std::pair<double, std::size_t>> by_energy;
    const auto blocks = wang_blocks(HamiltonianAtJ(clear, j), clear.representation);
    for (std::size_t b = 0; b < 4; ++b) {
      for (const double e : blocks[b].energy_hz) by_energy.emplace_back(e, b);
    }
    std::sort(by_energy.begin(), by_energy.end());
    const auto found = block_by_label(hnco, j);
    for (int i = 0; i <= 2 * j; ++i) {
      EXPECT_EQ(found.at({(i + 1) / 2, j - i / 2}), by_energy[static_cast<std::size_t>(i)].second)
          << "J " << j;
    }
    const auto levels = levels_of(hnco, j);
    for (std::size_t i = 1; i < levels.size(); ++i) {
      coincident +=
          std::abs(levels[i].energy_hz - levels[i - 1].energy_hz) < 1e-15 * levels[i].energy_hz ? 1 : 0;
    }
  }
  EXPECT_GT(coincident, 10);  // else the test shows nothing
}

}  // namespace
}  // namespace trotline
