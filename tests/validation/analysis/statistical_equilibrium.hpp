// Level populations of an invented linear rotor between radiation and collisions: what LTE is not.
#pragma once

#include <Eigen/Dense>

#include <cmath>
#include <vector>

#include "analysis/simulated_table.hpp"

namespace trotline::equilibrium {

/// Downward rate coefficient [cm^3/s] from J to a lower one: invented, of the size and fall with |dJ| that neutral
/// molecules in H2 have.
inline double downward_rate(int upper, int lower) { return 8e-11 * std::pow(upper - lower, -1.3); }

/// Fractions of all molecules in J = 0 ... count - 1, optically thin in the cosmic background.
///
/// Rates of collisions obey detailed balance at the kinetic temperature; radiation is spontaneous and stimulated
/// emission and absorption of J -> J - 1. The equations of balance are solved as they stand.
inline Eigen::VectorXd populations(const Species& species, double kinetic_k, double density_per_cm3, int count = 30) {
  Eigen::MatrixXd rate = Eigen::MatrixXd::Zero(count, count);  // (to, from)
  const auto level = [&](int j) -> const Level& { return species.levels[static_cast<std::size_t>(j)]; };
  for (int u = 1; u < count; ++u) {
    for (int l = 0; l < u; ++l) {
      const double down = density_per_cm3 * downward_rate(u, l);
      rate(l, u) += down;
      rate(u, l) += down * level(u).degeneracy / level(l).degeneracy *
                    std::exp(-(level(u).energy_k - level(l).energy_k) / kinetic_k);
    }
    const Transition& line = species.transitions[static_cast<std::size_t>(u) - 1];
    const double photons =
        1.0 / std::expm1(constants::kKelvinPerHz * line.frequency_hz / constants::kCosmicBackgroundK);
    rate(u - 1, u) += line.einstein_a_per_s * (1.0 + photons);
    rate(u, u - 1) += line.einstein_a_per_s * photons * level(u).degeneracy / level(u - 1).degeneracy;
  }
  for (int j = 0; j < count; ++j) rate(j, j) -= rate.col(j).sum();
  rate.row(0).setOnes();  // the populations sum to 1
  Eigen::VectorXd right = Eigen::VectorXd::Zero(count);
  right[0] = 1.0;
  return rate.fullPivLu().solve(right);
}

/// Thin lines from such populations, each with its own excitation temperature against the background.
inline IntensityTable table_of(const Species& species, double column_per_cm2, double kinetic_k,
                               double density_per_cm3, std::size_t lines, double relative_error) {
  const Eigen::VectorXd fraction = populations(species, kinetic_k, density_per_cm3);
  IntensityTable table = simulated_table::table_of(species, {{kinetic_k, column_per_cm2}}, lines, relative_error);
  for (std::size_t i = 0; i < lines; ++i) {
    const Transition& line = species.transitions[i];
    const double photon_k = constants::kKelvinPerHz * line.frequency_hz;
    const auto u = static_cast<Eigen::Index>(line.upper);
    const double ratio = fraction[u - 1] / species.levels[line.lower].degeneracy /
                         (fraction[u] / species.levels[line.upper].degeneracy);
    // J(T_ex) from the populations themselves: T_ex may be below zero where levels are inverted.
    const double source_k = photon_k / (ratio - 1.0);
    const double background_k = simulated_table::planck(photon_k, constants::kCosmicBackgroundK);
    const LineConstants constants{line.frequency_hz, species.levels[line.upper].energy_k,
                                  species.levels[line.upper].degeneracy, line.einstein_a_per_s};
    IntensityRow& row = table.rows[i];
    row.intensity = column_per_cm2 * fraction[u] * intensity_per_upper_column_k_km_s_cm2(constants) *
                    (1.0 - background_k / source_k);
    row.intensity_sigma = relative_error * std::abs(row.intensity);
  }
  return table;
}

}  // namespace trotline::equilibrium
