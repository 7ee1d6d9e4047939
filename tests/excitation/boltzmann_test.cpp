// Identities of Boltzmann and Planck that the model must keep at any temperature, over random draws.

#include <gtest/gtest.h>

#include <cmath>
#include <random>

#include <trotline/excitation/forward_model.hpp>
#include <trotline/physics/planck.hpp>

#include "inference/simulated_source.hpp"

namespace trotline {
namespace {

class Draws {
 public:
  double log_between(double low, double high) {
    return low * std::exp(std::log(high / low) * uniform_(engine_));
  }

 private:
  std::mt19937_64 engine_{20260609};
  std::uniform_real_distribution<double> uniform_;
};

constexpr int kDraws = 2000;

// J (exp(h nu/kT) - 1) = h nu/k; relative rounding of the exponential is some eps (1 + x).
TEST(PlanckIdentity, TimesTheOccupationGivesThePhotonEnergy) {
  Draws draws;
  for (int i = 0; i < kDraws; ++i) {
    const double nu = draws.log_between(1e9, 3e12);
    const double t = draws.log_between(2.0, 1e4);
    const double x = photon_energy_k(nu) / t;
    EXPECT_NEAR(planck_equivalent_temperature_k(nu, t) * std::expm1(x) / photon_energy_k(nu), 1.0,
                4e-16 * (4.0 + x));
  }
}

TEST(BoltzmannIdentity, ThinLinesStandAsGTimesExpOfEnergyOverT) {
  Draws draws;
  const ForwardModel model(simulated::ladder(10), simulated::partitions(),
                           {Opacity::thin, SourceShape::gaussian, 1});
  for (int i = 0; i < kDraws; ++i) {
    const double t = draws.log_between(4.0, 1500.0);
    const Eigen::VectorXd w = simulated::intensities(model, simulated::state(30.0, t, 0.0, 0.0));
    const auto population = [&](std::size_t k) {
      const LineConstants& line = model.lines()[k].constants;
      return w[static_cast<Eigen::Index>(k)] /
             (intensity_per_upper_column_k_km_s_cm2(line) * line.upper_degeneracy);
    };
    for (std::size_t k = 1; k < 10; ++k) {
      const double gap =
          model.lines()[k].constants.upper_energy_k - model.lines()[0].constants.upper_energy_k;
      // rounding of exp(-E/T) alone
      EXPECT_NEAR(population(k) / population(0) * std::exp(gap / t), 1.0, 1e-15 * (10.0 + gap / t));
    }
  }
}

// Sum of N_u over all levels is N: for a rotor whose lines J - (J-1) end on every level but the lowest.
TEST(BoltzmannIdentity, LevelsAddUpToTheColumnDensity) {
  Draws draws;
  const ForwardModel model(simulated::ladder(60), simulated::partitions(),
                           {Opacity::thin, SourceShape::gaussian, 1});
  for (int i = 0; i < 200; ++i) {
    const double t = draws.log_between(4.0, 300.0);  // level 61 holds exp(-34) at most
    const Eigen::VectorXd w = simulated::intensities(model, simulated::state(30.0, t, 0.0, 0.0));
    double total = 0.0;
    for (std::size_t k = 0; k < 60; ++k) {
      total +=
          w[static_cast<Eigen::Index>(k)] / intensity_per_upper_column_k_km_s_cm2(model.lines()[k].constants);
    }
    const double ln_lowest = 30.0 - model.partition(0).at(std::log(t)).ln_q;  // g = 1, E = 0
    EXPECT_NEAR((total + std::exp(ln_lowest)) / std::exp(30.0), 1.0, 2e-9);   // Q is tabulated to 1e-9
  }
}

// ln Q rises by <E>/kT per ln T: the slope that the table gives against the mean over levels.
TEST(BoltzmannIdentity, SlopeOfLnQIsTheMeanEnergy) {
  Draws draws;
  const auto table = simulated::partitions().front();
  for (int i = 0; i < 200; ++i) {
    const double t = draws.log_between(4.0, 1000.0);
    double q = 0.0;
    double energy = 0.0;
    for (int j = 0; j < 150; ++j) {
      const double e = plain::kRotorK * j * (j + 1);
      const double share = (2 * j + 1) * std::exp(-e / t);
      q += share;
      energy += share * e;
    }
    EXPECT_NEAR(table->at(std::log(t)).dlnq_dlnt, energy / q / t, 1e-6);
  }
}

}  // namespace
}  // namespace trotline
