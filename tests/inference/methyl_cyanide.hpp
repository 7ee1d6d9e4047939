// CH3CN J = 12-11, K = 0-6, made from a few constants: a hard case for opacity, since the lines lie close in
// frequency and their opacities differ by the populations alone.
#pragma once

#include <trotline/excitation/forward_model.hpp>
#include <trotline/physics/constants.hpp>

namespace trotline::methyl_cyanide {

// B, D_J, D_JK [MHz]: Cazzoli & Puzzarini 2006, J. Mol. Spectrosc. 240, 153, digits from memory; A - B from a
// structure, rounded; dipole moment 3.922 D: Gadhi et al. 1995, Chem. Phys. Lett. 236, 467, as the CDMS entry
// 41505 has it. The tests make and fit their data with the same constants, so these need only be near.
inline constexpr double kB = 9198.899;
inline constexpr double kDj = 3.8075e-3;
inline constexpr double kDjk = 0.17740;
inline constexpr double kAMinusB = 148900.0;
inline constexpr double kDipoleD = 3.922;

inline double energy_k(int j, int k) {
  const double jj = j * (j + 1.0);
  const double kk = static_cast<double>(k) * k;
  const double mhz = kB * jj + kAMinusB * kk - kDj * jj * jj - kDjk * jj * kk;
  return mhz * 1e6 * constants::kKelvinPerHz;
}

/// Spin weight with both +K and -K: K = 0, 3, 6 ... to the others as 2 : 1 for each K-component.
inline double weight(int k) { return (k % 3 == 0 ? 4.0 : 2.0) * (k == 0 ? 1.0 : 2.0); }

class Partition final : public PartitionFunction {
 public:
  [[nodiscard]] PartitionValue at(double t) const override {
    double q = 0.0;
    double energy = 0.0;
    for (int k = 0; k <= 25; ++k) {
      for (int j = k; j <= 100; ++j) {
        const double term = weight(k) * (2 * j + 1) * std::exp(-energy_k(j, k) / t);
        q += term;
        energy += term * energy_k(j, k);
      }
    }
    return {q, std::log(q), energy / q / (t * t), 0.0};
  }
  [[nodiscard]] double lowest_k() const override { return 3.0; }
  [[nodiscard]] double highest_k() const override { return 1000.0; }
  [[nodiscard]] std::string description() const override { return "symmetric top"; }
};

inline std::vector<ModelLine> lines(double fwhm_km_s) {
  std::vector<ModelLine> result;
  for (int k = 0; k <= 6; ++k) {
    ModelLine line;
    const double nu = (energy_k(12, k) - energy_k(11, k)) / constants::kKelvinPerHz;
    const double mu = kDipoleD * constants::kDebyeCM;
    const double strength = (144.0 - k * k) / 12.0;
    const double a = 16.0 * std::pow(M_PI * nu / constants::kLightMPerS, 3) * strength * mu * mu /
                     (3.0 * constants::kVacuumPermittivityFPerM * constants::kPlanckJS * 25.0);
    line.constants = {nu, energy_k(12, k), 25.0 * weight(k), a};
    line.fwhm_km_s = fwhm_km_s;
    line.datum = k;
    result.push_back(line);
  }
  return result;
}

}  // namespace trotline::methyl_cyanide
