// The states of a linear rotor are the spherical harmonics: a general-purpose library's spherical_harmonic,
// and quadrature that is exact for the products that occur, against what the rotor takes for granted.
#include <Eigen/Dense>
#include <boost/math/quadrature/gauss.hpp>
#include <boost/math/special_functions/spherical_harmonic.hpp>

#include <complex>
#include <numbers>

#include <trotline/rotor/linear.hpp>
#include <trotline/rotor/rotor.hpp>

namespace trotline {
namespace {

constexpr int kHighest = 20;

/// Points and weights on the sphere: Gauss-Legendre in cos(theta) with 30 points is exact to degree 59, equal
/// steps in phi are exact for |m| below their number; products of two states times cos(theta) have degree 41
/// and |m| up to 40.
class Sphere {
 public:
  Sphere() {
    using Gauss = boost::math::quadrature::gauss<double, 30>;
    constexpr int kSteps = 42;
    for (std::size_t i = 0; i < Gauss::abscissa().size(); ++i) {
      for (const double side : {-1.0, 1.0}) {
        for (int step = 0; step < kSteps; ++step) {
          cosine.push_back(side * Gauss::abscissa()[i]);
          phi.push_back(2.0 * std::numbers::pi * step / kSteps);
          weight.push_back(Gauss::weights()[i] * 2.0 * std::numbers::pi / kSteps);
        }
      }
    }
  }
  std::vector<double> cosine, phi, weight;
};

Eigen::Index place_of(int j, int m) { return j * (j + 1) + m; }

/// Y_jm at every point, one column a state.
Eigen::MatrixXcd states_on(const Sphere& sphere) {
  Eigen::MatrixXcd states(static_cast<Eigen::Index>(sphere.phi.size()), place_of(kHighest, kHighest) + 1);
  for (int j = 0; j <= kHighest; ++j) {
    for (int m = -j; m <= j; ++m) {
      for (std::size_t i = 0; i < sphere.phi.size(); ++i) {
        states(static_cast<Eigen::Index>(i), place_of(j, m)) = boost::math::spherical_harmonic(
            static_cast<unsigned>(j), m, std::acos(sphere.cosine[i]), sphere.phi[i]);
      }
    }
  }
  return states;
}

/// <j2 m2| f |j m> for f a function of the points.
Eigen::MatrixXcd elements_of(const Eigen::MatrixXcd& states, const Eigen::VectorXd& weighted_f) {
  return states.adjoint() * (weighted_f.asDiagonal() * states);
}

void expect_orthonormal(const Eigen::MatrixXcd& overlap) {
  const auto n = overlap.rows();
  EXPECT_EQ(n, 441);  // 2J+1 states for each J
  EXPECT_LT((overlap - Eigen::MatrixXcd::Identity(n, n)).cwiseAbs().maxCoeff(), 1e-12);
}

void expect_selection_rules(const Eigen::MatrixXcd& cos_theta) {
  for (int j = 0; j <= kHighest; ++j) {
    for (int m = -j; m <= j; ++m) {
      Eigen::VectorXcd column = cos_theta.col(place_of(j, m));
      if (std::abs(m) < j) column[place_of(j - 1, m)] = 0.0;
      if (j < kHighest) column[place_of(j + 1, m)] = 0.0;
      EXPECT_LT(column.cwiseAbs().maxCoeff(), 1e-12) << j << " " << m;
    }
  }
}

void expect_line_strengths(const Eigen::MatrixXcd& cos_theta) {
  const RotorModel model =
      linear_model({.b_hz = 1e10}, {.mu0_c_m = 1.0}, *make_spin_rule({}), {.highest_j = kHighest});
  ASSERT_EQ(model.transitions.size(), static_cast<std::size_t>(kHighest));
  for (int j = 1; j <= kHighest; ++j) {
    double sum = 0.0;
    for (int m = 1 - j; m <= j - 1; ++m) sum += std::norm(cos_theta(place_of(j - 1, m), place_of(j, m)));
    EXPECT_NEAR(sum, j / 3.0, 1e-12);
    // S = 3 sum over M: the z component of a dipole that may point anywhere in space.
    EXPECT_NEAR(model.transitions[static_cast<std::size_t>(j - 1)].line_strength_mu2_c2m2, 3.0 * sum, 3e-12);
  }
}

TEST(SphericalHarmonics, AreOrthonormalAndCosThetaJoinsJToJMinus1OfTheSameMWithLineStrengthJ) {
  const Sphere sphere;
  const Eigen::MatrixXcd states = states_on(sphere);
  const Eigen::Map<const Eigen::VectorXd> weight(sphere.weight.data(), states.rows());
  const Eigen::Map<const Eigen::VectorXd> cosine(sphere.cosine.data(), states.rows());
  expect_orthonormal(elements_of(states, weight));
  const Eigen::MatrixXcd cos_theta = elements_of(states, weight.cwiseProduct(cosine));
  expect_selection_rules(cos_theta);
  expect_line_strengths(cos_theta);
}

TEST(SphericalHarmonics, EnergiesAreThoseOfAngularMomentumAndLevelsAre2JPlus1Fold) {
  // hbar^2 J(J+1) / 2I with I = mu r^2: h B J(J+1) with B = h / (8 pi^2 I) is the same thing.
  const RotorModel model =
      linear_model({.b_hz = 5.7e10}, {.mu0_c_m = 1.0}, *make_spin_rule({}), {.highest_j = kHighest});
  for (const RotorLevel& level : model.levels) {
    const int j = level.quanta.j;
    EXPECT_NEAR(level.energy_hz, 5.7e10 * j * (j + 1.0), 1e-15 * 5.7e10 * 420.0);
    EXPECT_EQ(level.degeneracy(), 2.0 * j + 1.0);
  }
}

}  // namespace
}  // namespace trotline
