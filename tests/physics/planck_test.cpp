#include <boost/multiprecision/cpp_dec_float.hpp>
#include <gtest/gtest.h>

#include <cmath>
#include <limits>
#include <random>

#include <trotline/base/errors.hpp>
#include <trotline/physics/constants.hpp>
#include <trotline/physics/planck.hpp>

namespace trotline {
namespace {

using Wide = boost::multiprecision::cpp_dec_float_50;

// CODATA 2018 writes h and k exactly: Tiesinga et al. 2021, Rev. Mod. Phys. 93, 025010, table XXXI.
const Wide kWidePlanck("6.62607015e-34");
const Wide kWideBoltzmann("1.380649e-23");

Wide wide_temperature(double frequency_hz, double temperature_k) {
  const Wide t0 = kWidePlanck * Wide(frequency_hz) / kWideBoltzmann;
  return t0 / (exp(t0 / Wide(temperature_k)) - 1);
}

struct Draw {
  double frequency_hz;
  double temperature_k;
  double ratio;
};

/// Frequencies of 1 MHz to 100 THz, T0/T spread evenly in its logarithm.
Draw draw(std::mt19937_64& random, double least_ratio, double largest_ratio) {
  std::uniform_real_distribution<double> log_frequency(std::log(1e6), std::log(1e14));
  std::uniform_real_distribution<double> log_ratio(std::log(least_ratio), std::log(largest_ratio));
  Draw drawn{std::exp(log_frequency(random)), 0.0, std::exp(log_ratio(random))};
  drawn.temperature_k = constants::kKelvinPerHz * drawn.frequency_hz / drawn.ratio;
  return drawn;
}

TEST(Planck, ErrorBoundHoldsAgainst50Digits) {
  std::mt19937_64 random(3);
  double worst = 0.0;
  for (int i = 0; i < 20000; ++i) {
    const Draw d = draw(random, 1e-9, 700.0);
    const Wide truth = wide_temperature(d.frequency_hz, d.temperature_k);
    const Wide error =
        abs(Wide(planck_equivalent_temperature_k(d.frequency_hz, d.temperature_k)) / truth - 1);
    const double allowed = std::numeric_limits<double>::epsilon() * (1.0 + d.ratio);
    worst = std::max(worst, static_cast<double>(error) / allowed);
  }
  EXPECT_LT(worst, kPlanckErrorUlp);
  RecordProperty("worst_error_in_bounds", std::to_string(worst));
}

TEST(Planck, LiesBelowTheTemperature) {
  std::mt19937_64 random(4);
  for (int i = 0; i < 20000; ++i) {
    const Draw d = draw(random, 1e-9, 1e4);
    const double j = planck_equivalent_temperature_k(d.frequency_hz, d.temperature_k);
    EXPECT_GE(j, 0.0);
    EXPECT_LT(j, d.temperature_k);
  }
}

TEST(Planck, GoesToTMinusHalfT0ForSmallRatios) {
  // J/T = 1 - x/2 + x^2/12 - ...: the expansion of x/(e^x - 1) with Bernoulli numbers.
  for (const double temperature_k : {3.0, 50.0, 1000.0}) {
    const double frequency_hz = 1e-4 * temperature_k / constants::kKelvinPerHz;
    const double t0 = photon_energy_k(frequency_hz);
    EXPECT_NEAR(planck_equivalent_temperature_k(frequency_hz, temperature_k), temperature_k - 0.5 * t0,
                temperature_k * 1e-8 / 12.0 * 1.001);
  }
}

TEST(Planck, RisesWithTemperatureAndFallsWithFrequency) {
  std::mt19937_64 random(5);
  for (int i = 0; i < 2000; ++i) {
    const Draw d = draw(random, 1e-6, 500.0);
    const double j = planck_equivalent_temperature_k(d.frequency_hz, d.temperature_k);
    EXPECT_GT(planck_equivalent_temperature_k(d.frequency_hz, 1.001 * d.temperature_k), j);
    EXPECT_LT(planck_equivalent_temperature_k(1.001 * d.frequency_hz, d.temperature_k), j);
  }
}

TEST(Planck, IsZeroAtZeroTemperatureAndFarInTheWienTail) {
  EXPECT_EQ(planck_equivalent_temperature_k(1e11, 0.0), 0.0);
  EXPECT_EQ(planck_equivalent_temperature_k(1e14, 1.0), 0.0);
  EXPECT_EQ(planck_equivalent_temperature_slope(1e11, 0.0), 0.0);
  EXPECT_EQ(planck_equivalent_temperature_slope(1e14, 1.0), 0.0);
}

TEST(Planck, SlopeIsTheDerivative) {
  // dJ/dT = (J/T)^2 exp(T0/T), in 50 digits; an error of x in units of eps is carried by exp(x).
  std::mt19937_64 random(6);
  for (int i = 0; i < 5000; ++i) {
    const Draw d = draw(random, 1e-9, 600.0);
    const Wide ratio = kWidePlanck * Wide(d.frequency_hz) / kWideBoltzmann / Wide(d.temperature_k);
    const Wide j = wide_temperature(d.frequency_hz, d.temperature_k) / Wide(d.temperature_k);
    const Wide truth = j * j * exp(ratio);
    const Wide error =
        abs(Wide(planck_equivalent_temperature_slope(d.frequency_hz, d.temperature_k)) / truth - 1);
    EXPECT_LT(static_cast<double>(error), 8.0 * std::numeric_limits<double>::epsilon() * (1.0 + d.ratio))
        << d.ratio;
  }
}

TEST(Planck, BackgroundAt115GhzHasItsPublishedSize) {
  // h nu / k = 5.53 K for CO 1-0 at 115.271 GHz, the energy of its upper level as tables print it (common
  // practice).
  EXPECT_NEAR(photon_energy_k(115.2712018e9), 5.53, 0.005);
  // J(2.73 K) at 115 GHz is about 0.84 K (common practice, printed with two digits).
  EXPECT_NEAR(planck_equivalent_temperature_k(115.2712018e9, 2.73), 0.84, 0.005);
}

TEST(Planck, RefusesWhatIsOutsideItsDomain) {
  const double nan = std::numeric_limits<double>::quiet_NaN();
  const double inf = std::numeric_limits<double>::infinity();
  for (const double frequency_hz : {0.0, -1.0, nan, inf}) {
    EXPECT_THROW((void)planck_equivalent_temperature_k(frequency_hz, 10.0), DomainError);
    EXPECT_THROW((void)planck_equivalent_temperature_slope(frequency_hz, 10.0), DomainError);
  }
  for (const double temperature_k : {-1.0, nan, inf}) {
    EXPECT_THROW((void)planck_equivalent_temperature_k(1e11, temperature_k), DomainError);
    EXPECT_THROW((void)planck_equivalent_temperature_slope(1e11, temperature_k), DomainError);
  }
}

}  // namespace
}  // namespace trotline
