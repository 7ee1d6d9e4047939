#include <Eigen/Eigenvalues>

#include <algorithm>
#include <random>

#include <trotline/base/errors.hpp>
#include <trotline/rotor/asymmetric_hamiltonian.hpp>
#include <trotline/rotor/wang_block.hpp>

#include "rotor/operator_hamiltonian.hpp"

namespace trotline {
namespace {

using Eigen::MatrixXd;

Eigen::ArrayXd all_energies(const std::array<WangBlock, 4>& blocks) {
  std::vector<double> all;
  for (const WangBlock& block : blocks) all.insert(all.end(), block.energy_hz.begin(), block.energy_hz.end());
  std::sort(all.begin(), all.end());
  return Eigen::Map<Eigen::ArrayXd>(all.data(), static_cast<Eigen::Index>(all.size()));
}

/// Every constant set, all different, small enough for the series to rise at low J.
DiagonalDistortion every_diagonal_term() {
  return {.d_j_hz = 3e4,
          .d_jk_hz = -5e4,
          .d_k_hz = 7e5,
          .h_j_hz = 11.0,
          .h_jk_hz = -13.0,
          .h_kj_hz = -170.0,
          .h_k_hz = 190.0,
          .l_j_hz = -2.3e-2,
          .l_jjk_hz = 2.9e-2,
          .l_jk_hz = -3.1e-2,
          .l_kkj_hz = 3.7e-2,
          .l_k_hz = -4.1e-2};
}

AsymmetricConstants with_every_term(bool s_reduction, Representation representation) {
  AsymmetricConstants c{.a_hz = 90e9, .b_hz = 50e9, .c_hz = 30e9};
  c.diagonal = every_diagonal_term();
  if (s_reduction) {
    c.off_diagonal = SReduction{.d1_hz = -1e4,
                                .d2_hz = -3e3,
                                .h1_hz = 5.0,
                                .h2_hz = 2.0,
                                .h3_hz = 1.0,
                                .l1_hz = -1e-3,
                                .l2_hz = 2e-3,
                                .l3_hz = -5e-3,
                                .l4_hz = 7e-3};
  } else {
    c.off_diagonal = AReduction{.delta_j_hz = 1e4,
                                .delta_k_hz = 4e4,
                                .h_j_hz = 5.0,
                                .h_jk_hz = -7.0,
                                .h_k_hz = 30.0,
                                .l_j_hz = -1e-3,
                                .l_jk_hz = 2e-3,
                                .l_kj_hz = -3e-3,
                                .l_k_hz = 5e-3};
  }
  c.representation = representation;
  return c;
}

constexpr Representation kRepresentations[] = {Representation::i_r, Representation::i_l,
                                               Representation::iii_r, Representation::iii_l};

TEST(AsymmetricHamiltonian, EigenvaluesAreThoseOfTheOperatorsInEveryReductionAndRepresentation) {
  for (const bool s_reduction : {false, true}) {
    for (const Representation representation : kRepresentations) {
      const AsymmetricConstants c = with_every_term(s_reduction, representation);
      for (int j = 0; j <= 12; ++j) {
        const HamiltonianAtJ hamiltonian(c, j);
        ASSERT_EQ(hamiltonian.rising_k(), j);
        const Eigen::ArrayXd blocks = all_energies(wang_blocks(hamiltonian, representation));
        const Eigen::ArrayXd full =
            Eigen::SelfAdjointEigenSolver<MatrixXd>(full_hamiltonian(c, j)).eigenvalues();
        ASSERT_EQ(blocks.size(), 2 * j + 1);
        // Two eigenvalue solvers agree within a few eps of the largest energy; 1e-13 leaves room for 2j+1 of
        // them.
        EXPECT_LT((blocks - full).abs().maxCoeff(), 1e-13 * std::max(full.abs().maxCoeff(), 1.0))
            << "J = " << j;
      }
    }
  }
}

TEST(AsymmetricHamiltonian, WangBlocksAreTheFullMatrixInAnotherBasis) {
  // Traces of H and of H^2 do not depend on the basis.
  const AsymmetricConstants c = with_every_term(true, Representation::i_r);
  for (int j = 0; j <= 12; ++j) {
    const HamiltonianAtJ hamiltonian(c, j);
    double trace = 0.0;
    double square = 0.0;
    for (const int first_k : {0, 1}) {
      for (const int sign : {+1, -1}) {
        const MatrixXd block = wang_matrix_hz(hamiltonian, first_k == 0 && sign < 0 ? 2 : first_k, sign);
        trace += block.trace();
        square += block.squaredNorm();
      }
    }
    const MatrixXd full = full_hamiltonian(c, j);
    EXPECT_NEAR(trace, full.trace(), 1e-13 * std::abs(full.trace()));
    EXPECT_NEAR(square, full.squaredNorm(), 1e-13 * full.squaredNorm());
  }
}

TEST(AsymmetricHamiltonian, RigidRotorsNeverStopRising) {
  std::mt19937_64 random(20240501);
  std::uniform_real_distribution<double> uniform(1e9, 1e12);
  for (int i = 0; i < 200; ++i) {
    double abc[] = {uniform(random), uniform(random), uniform(random)};
    std::sort(std::begin(abc), std::end(abc), std::greater<>());
    for (const Representation representation : kRepresentations) {
      const AsymmetricConstants c{.a_hz = abc[0],
                                  .b_hz = abc[1],
                                  .c_hz = abc[2],
                                  .diagonal = {},
                                  .off_diagonal = {},
                                  .representation = representation};
      for (const int j : {0, 1, 2, 10, 100}) EXPECT_EQ(HamiltonianAtJ(c, j).rising_k(), j);
    }
  }
}

TEST(AsymmetricHamiltonian, AQuarticSeriesStopsRisingWhereItsDerivativeVanishes) {
  // On the diagonal E = mean x + (A - mean) K^2 - D_K K^4 turns at K^2 = (A - mean)/(2 D_K) = 50: the step
  // from K = 6 (36) to 7 (49) still rises, that from 7 to 8 falls, since 49 + 64 > 100.
  AsymmetricConstants c{.a_hz = 110e9, .b_hz = 11e9, .c_hz = 9e9};
  c.diagonal.d_k_hz = 1e9;
  EXPECT_EQ(HamiltonianAtJ(c, 20).rising_k(), 7);
  EXPECT_EQ(HamiltonianAtJ(c, 5).rising_k(), 5);
}

TEST(AsymmetricHamiltonian, AllLevelsOfAJAreBeyondTheTurningPointOfALargeDJ) {
  // d/dJ of B x - D x^2 vanishes at x = B/(2D) = 500, J about 21.9.
  AsymmetricConstants c{.a_hz = 11e9, .b_hz = 10.0e9, .c_hz = 9.9e9};
  c.diagonal.d_j_hz = 1e7;
  EXPECT_GE(HamiltonianAtJ(c, 21).rising_k(), 0);
  EXPECT_EQ(HamiltonianAtJ(c, 23).rising_k(), -1);
}

TEST(AsymmetricHamiltonian, ConstantsThatMakeNoRotorAreRefusedByName) {
  const auto message_of = [](const AsymmetricConstants& c) -> std::string {
    try {
      require_valid(c);
    } catch (const DomainError& error) {
      return error.what();
    }
    return "no error";
  };
  const AsymmetricConstants good{.a_hz = 3e9, .b_hz = 2e9, .c_hz = 1e9};
  EXPECT_EQ(message_of(good), "no error");
  const auto changed = [&](auto change) {
    AsymmetricConstants c = good;
    change(c);
    return message_of(c);
  };
  using C = AsymmetricConstants;
  using testing::HasSubstr;
  EXPECT_THAT(changed([](C& c) { c.a_hz = -3e9; }), HasSubstr("A [Hz]"));
  EXPECT_THAT(changed([](C& c) { c.c_hz = 0.0; }), HasSubstr("C [Hz]"));
  EXPECT_THAT(changed([](C& c) { c.b_hz = std::nan(""); }), HasSubstr("B [Hz]"));
  EXPECT_THAT(changed([](C& c) { c.b_hz = 4e9; }), HasSubstr("not above A"));
  EXPECT_THAT(changed([](C& c) { c.c_hz = 2.5e9; }), HasSubstr("not above B"));
  EXPECT_THAT(changed([](C& c) { c.a_hz = c.b_hz = c.c_hz; }), HasSubstr("spherical"));
  EXPECT_THAT(changed([](C& c) { c.diagonal.d_j_hz = 1.1e9; }), HasSubstr("D_J"));
  EXPECT_THAT(changed([](C& c) { c.diagonal.d_jk_hz = -4e9; }), HasSubstr("D_JK"));
  EXPECT_THAT(changed([](C& c) { c.diagonal.d_k_hz = 3e9; }), HasSubstr("D_K"));
  EXPECT_THAT(changed([](C& c) { c.diagonal.l_kkj_hz = std::nan(""); }), HasSubstr("L_KKJ"));
  EXPECT_THAT(changed([](C& c) { c.off_diagonal = AReduction{.delta_j_hz = 1e10}; }), HasSubstr("delta_J"));
  EXPECT_THAT(changed([](C& c) { c.off_diagonal = AReduction{.h_k_hz = std::nan("")}; }),
              HasSubstr("A reduction"));
  EXPECT_THAT(changed([](C& c) { c.off_diagonal = SReduction{.d2_hz = std::nan("")}; }),
              HasSubstr("d1 or d2"));
  EXPECT_THAT(changed([](C& c) { c.off_diagonal = SReduction{.l4_hz = 1.0 / 0.0}; }),
              HasSubstr("S reduction"));
}

}  // namespace
}  // namespace trotline
