#include <complex>

#include <trotline/rotor/direction_cosine.hpp>

namespace trotline {
namespace {

using Complex = std::complex<double>;

double factorial(int n) { return std::tgamma(n + 1.0); }

/// <j1 m1 1 q | j m1+q> by Racah's sum (Zare 1988, Angular Momentum, eq. 2.25): no closed form for j2 = 1.
double clebsch_gordan(int j1, int m1, int q, int j) {
  const int m = m1 + q;
  if (std::abs(m) > j || std::abs(m1) > j1 || j < std::abs(j1 - 1) || j > j1 + 1) return 0.0;
  const double triangle =
      factorial(j1 + 1 - j) * factorial(j1 - 1 + j) * factorial(1 - j1 + j) / factorial(j1 + j + 2);
  const double states = factorial(j1 + m1) * factorial(j1 - m1) * factorial(1 + q) * factorial(1 - q) *
                        factorial(j + m) * factorial(j - m);
  double sum = 0.0;
  for (int k = 0; k <= j1 + 2; ++k) {
    const int terms[] = {k, j1 + 1 - j - k, j1 - m1 - k, 1 + q - k, j - 1 + m1 + k, j - j1 - q + k};
    double product = k % 2 == 0 ? 1.0 : -1.0;
    for (const int term : terms) product = term < 0 ? 0.0 : product / factorial(term);
    sum += product;
  }
  return std::sqrt((2.0 * j + 1.0) * triangle * states) * sum;
}

/// Coefficients of a level on |J,K>, K = -J .. J.
Eigen::VectorXd on_symmetric_top_basis(const WangBlock& block, Eigen::Index level) {
  Eigen::VectorXd full = Eigen::VectorXd::Zero(2 * block.j + 1);
  for (Eigen::Index i = 0; i < block.vectors.rows(); ++i) {
    const int k = block.first_k + 2 * static_cast<int>(i);
    const double value = block.vectors(i, level);
    full[block.j + k] += k == 0 ? value : value / std::sqrt(2.0);
    if (k != 0) full[block.j - k] += block.sign * value / std::sqrt(2.0);
  }
  return full;
}

/// Spherical components of a unit vector along an axis: mu(+1) = -(x + iy)/sqrt2, mu(0) = z, mu(-1) = (x -
/// iy)/sqrt2.
Complex spherical_component(BodyAxis axis, int q) {
  if (axis == BodyAxis::z) return q == 0 ? 1.0 : 0.0;
  if (q == 0) return 0.0;
  const Complex x = -q / std::sqrt(2.0);
  return axis == BodyAxis::x ? x : Complex(0.0, -1.0 / std::sqrt(2.0));
}

double line_strength(BodyAxis axis, const Eigen::VectorXd& from, int j, const Eigen::VectorXd& to, int j_to) {
  Complex sum = 0.0;
  for (int k = -j; k <= j; ++k) {
    for (int q = -1; q <= 1; ++q) {
      if (std::abs(k + q) > j_to) continue;
      sum += to[j_to + k + q] * from[j + k] * spherical_component(axis, q) * clebsch_gordan(j, k, q, j_to);
    }
  }
  return (2.0 * j + 1.0) * std::norm(sum);
}

constexpr BodyAxis kAxes[] = {BodyAxis::x, BodyAxis::y, BodyAxis::z};

using Blocks = std::array<WangBlock, 4>;

Blocks solved(const AsymmetricConstants& c, int j) {
  return wang_blocks(HamiltonianAtJ(c, j), c.representation, Eigenvectors::yes);
}

const WangBlock& target_block(BodyAxis axis, const WangBlock& from, const Blocks& to) {
  const WangTarget target = wang_target(axis, from, to[0].j - from.j);
  return to[(target.odd ? 2U : 0U) + (target.sign > 0 ? 0U : 1U)];
}

TEST(DirectionCosine, LineStrengthsAreThoseOfClebschGordanCoefficientsForEveryPairOfLevels) {
  const AsymmetricConstants c{.a_hz = 3e9, .b_hz = 1.9e9, .c_hz = 1e9};
  for (int j = 0; j <= 6; ++j) {
    for (int delta_j = j == 0 ? 1 : 0; delta_j <= 1; ++delta_j) {
      const Blocks lower = solved(c, j);
      const Blocks upper = solved(c, j + delta_j);
      for (const WangBlock& from : lower) {
        for (const BodyAxis axis : kAxes) {
          const WangBlock& allowed = target_block(axis, from, upper);
          const Eigen::MatrixXd amplitudes = line_strength_amplitudes(axis, from, allowed);
          for (Eigen::Index i = 0; i < from.vectors.cols(); ++i) {
            const Eigen::VectorXd start = on_symmetric_top_basis(from, i);
            for (const WangBlock& to : upper) {
              for (Eigen::Index f = 0; f < to.vectors.cols(); ++f) {
                const double expected =
                    line_strength(axis, start, j, on_symmetric_top_basis(to, f), j + delta_j);
                const double s = &to == &allowed ? amplitudes(f, i) * amplitudes(f, i) : 0.0;
                EXPECT_NEAR(s, expected, 1e-13 * (2 * j + 1)) << "J = " << j << " dJ = " << delta_j;
              }
            }
          }
        }
      }
    }
  }
}

/// Sum of S over all partners of each level of `here`: `below` J - 1, `above` J + 1.
Eigen::ArrayXd sum_over_partners(BodyAxis axis, const WangBlock& here, const Blocks* below,
                                 const Blocks& same, const Blocks& above) {
  Eigen::ArrayXd sum = Eigen::ArrayXd::Zero(here.energy_hz.size());
  for (const Blocks* blocks : {&same, &above}) {
    const auto s = line_strength_amplitudes(axis, here, target_block(axis, here, *blocks));
    sum += s.colwise().squaredNorm().transpose().array();
  }
  if (below != nullptr) {
    for (const WangBlock& from : *below) {
      const WangTarget target = wang_target(axis, from, 1);
      if (target.odd != (here.first_k % 2 != 0) || target.sign != here.sign) continue;
      sum += line_strength_amplitudes(axis, from, here).rowwise().squaredNorm().array();
    }
  }
  return sum;
}

TEST(DirectionCosine, LineStrengthsOfEveryLevelAddUpTo2JPlus1ForEachComponentOfTheDipole) {
  for (const double b_hz : {4e9, 11e9, 25e9}) {  // near prolate, in between, near oblate
    const AsymmetricConstants c{.a_hz = 30e9, .b_hz = b_hz, .c_hz = 3.9e9};
    for (const int j : {0, 1, 2, 3, 8, 25, 60}) {
      const Blocks here = solved(c, j);
      const Blocks below = solved(c, std::max(j - 1, 0));
      const Blocks above = solved(c, j + 1);
      for (const WangBlock& block : here) {
        for (const BodyAxis axis : kAxes) {
          const auto sum = sum_over_partners(axis, block, j > 0 ? &below : nullptr, here, above);
          for (const double s : sum) EXPECT_NEAR(s, 2.0 * j + 1.0, 1e-10);
        }
      }
    }
  }
}

TEST(DirectionCosine, TargetsFollowTheParitiesOfKaAndKc) {
  // Gordy & Cook, table 7.5: an a-type line changes the parity of Kc only, a c-type one that of Ka only, a
  // b-type one both. In I^r z, x, y are a, b, c.
  const AsymmetricConstants c{.a_hz = 3e9, .b_hz = 1.9e9, .c_hz = 1e9};
  for (int delta_j = 0; delta_j <= 1; ++delta_j) {
    const Blocks lower = solved(c, 5);
    const Blocks upper = solved(c, 5 + delta_j);
    for (const WangBlock& from : lower) {
      for (const BodyAxis axis : kAxes) {
        const WangBlock& to = target_block(axis, from, upper);
        EXPECT_EQ((from.ka[0] + to.ka[0]) % 2 != 0, axis != BodyAxis::z);
        EXPECT_EQ((from.kc[0] + to.kc[0]) % 2 != 0, axis != BodyAxis::y);
      }
    }
  }
}

}  // namespace
}  // namespace trotline
