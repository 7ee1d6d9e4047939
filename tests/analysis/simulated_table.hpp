// Tables of an invented linear rotor, its intensities summed over velocity by brute force, apart from the model
// that the methods fit.
#pragma once

#include <cmath>
#include <numbers>
#include <random>

#include <trotline/analysis/analyse.hpp>
#include <trotline/physics/constants.hpp>

namespace trotline::simulated_table {

inline constexpr double kRadPerArcsec = std::numbers::pi / 648000.0;
inline constexpr double kFwhmKmS = 2.0;

/// A rigid linear rotor of B = 20 GHz. @param isomers  even and odd J belong to two spin isomers
inline Species rotor(bool isomers = false) {
  Species species;
  species.name = species.formula = "RX";
  species.kind = SpeciesKind::levels;
  for (int j = 0; j <= 60; ++j) {
    const double weight = isomers && j % 2 == 1 ? 3.0 : 1.0;
    species.levels.push_back({std::to_string(j), 0.9598486 * j * (j + 1), weight * (2.0 * j + 1.0),
                              isomers ? (j % 2 == 1 ? "ortho" : "para") : ""});
  }
  const std::uint32_t step = isomers ? 2 : 1;
  for (std::uint32_t j = step; j <= 60; ++j) {
    const double nu = isomers ? 20e9 * (j * (j + 1.0) - (j - 2.0) * (j - 1.0)) : 40e9 * j;
    species.transitions.push_back({j, j - step, nu, 0.0, 1.2e-7 * j * j * j * j / (2.0 * j + 1.0)});
  }
  species.partition = partition_function_from_levels(species.levels);
  return species;
}

struct Layer {
  double temperature_k = 40.0;
  double column_per_cm2 = 3e13;
  double source_arcsec = 0.0;  ///< 0: fills the beam
  double background_k = constants::kCosmicBackgroundK;
};

inline double planck(double photon_k, double t) { return t > 0.0 ? photon_k / std::expm1(photon_k / t) : 0.0; }

/// tau0 of one transition.
inline double depth(const Species& species, const Transition& t, const Layer& layer) {
  const Level& u = species.levels[t.upper];
  const double photon_k = constants::kKelvinPerHz * t.frequency_hz;
  const double upper = layer.column_per_cm2 / species.partition->at(layer.temperature_k).q * u.degeneracy *
                       std::exp(-u.energy_k / layer.temperature_k);
  const double area = std::pow(constants::kLightMPerS, 3) * t.einstein_a_per_s * upper * 1e4 /
                      (8.0 * std::numbers::pi * std::pow(t.frequency_hz, 3)) *
                      std::expm1(photon_k / layer.temperature_k) / 1e3;
  return std::sqrt(4.0 * std::numbers::ln2 / std::numbers::pi) * area / kFwhmKmS;
}

/// W [K km/s] of transitions that one measurement holds: tau summed over velocity with their offsets.
inline double intensity(const Species& species, const std::vector<std::size_t>& members, const Layer& layer,
                        double beam_arcsec) {
  const double filling = layer.source_arcsec > 0.0
                             ? std::pow(layer.source_arcsec, 2) /
                                   (std::pow(layer.source_arcsec, 2) + beam_arcsec * beam_arcsec)
                             : 1.0;
  struct Member {
    double depth;
    double offset_km_s;
    double source_k;
  };
  std::vector<Member> parts;
  const double reference_hz = species.transitions[members.front()].frequency_hz;
  for (const std::size_t m : members) {
    const Transition& t = species.transitions[m];
    const double photon_k = constants::kKelvinPerHz * t.frequency_hz;
    parts.push_back({depth(species, t, layer), constants::kLightMPerS / 1e3 * (1.0 - t.frequency_hz / reference_hz),
                     planck(photon_k, layer.temperature_k) - planck(photon_k, layer.background_k)});
  }
  constexpr int kSteps = 6000;
  constexpr double kReach = 30.0;  // km/s
  double sum = 0.0;
  for (int i = 0; i <= kSteps; ++i) {
    const double v = -kReach + 2.0 * kReach * i / kSteps;
    double tau = 0.0;
    double source = 0.0;
    for (const Member& part : parts) {
      const double here =
          part.depth * std::exp(-4.0 * std::numbers::ln2 * std::pow((v - part.offset_km_s) / kFwhmKmS, 2));
      tau += here;
      source += here * part.source_k;
    }
    if (tau > 0.0) sum += -std::expm1(-tau) / tau * source;
  }
  return filling * sum * 2.0 * kReach / kSteps;
}

/// ln N at which the most opaque of the first `lines` has this depth.
inline double column_for(const Species& species, double tau0, double temperature_k, std::size_t lines) {
  double most = 0.0;
  for (std::size_t i = 0; i < lines; ++i) {
    most = std::max(most, depth(species, species.transitions[i], {temperature_k, 1e13}));
  }
  return 1e13 * tau0 / most;
}

/// Noiseless rows of the first `lines` transitions, S/N as given, beams 120 arcsec / J, widths known.
inline IntensityTable table_of(const Species& species, const std::vector<Layer>& layers, std::size_t lines,
                               double relative_error = 0.02) {
  IntensityTable table;
  table.file = "lines.csv";
  for (std::size_t i = 0; i < lines; ++i) {
    IntensityRow row;
    row.line_number = i + 2;
    row.transition = transition_label(species, species.transitions[i]);
    const double beam = 4800e9 / species.transitions[i].frequency_hz;
    row.beam_fwhm_rad = beam * kRadPerArcsec;
    row.fwhm_km_s = kFwhmKmS;
    for (const Layer& layer : layers) row.intensity += intensity(species, {i}, layer, beam);
    row.intensity_sigma = relative_error * row.intensity;
    table.rows.push_back(row);
  }
  return table;
}

inline void add_noise(IntensityTable& table, std::mt19937_64& engine) {
  std::normal_distribution<double> normal;
  for (IntensityRow& row : table.rows) row.intensity += row.intensity_sigma * normal(engine);
}

inline RunOptions by(const std::string& method) {
  RunOptions options;
  options.method = method;
  return options;
}

}  // namespace trotline::simulated_table
