#pragma once

#include <cstdint>
#include <string>

namespace trotline {

/// One energy level of a species.
struct Level {
  std::string label;        ///< quantum numbers, e.g. "2" (J), "12(3)" (J(K)), "3(1,2)" (J(Ka,Kc))
  double energy_k = 0.0;    ///< E/k [K] above the lowest level of the species (the zero of its list, where that lies lower)
  double degeneracy = 1.0;  ///< g = (2J+1) times spin weight, in the convention of the species
  std::string spin;         ///< spin isomer, e.g. "ortho"; empty where the species has only one
};

/// One radiative transition. Levels are indices into the level list of the same species.
struct Transition {
  std::uint32_t upper = 0;
  std::uint32_t lower = 0;
  double frequency_hz = 0.0;        ///< rest frequency [Hz]
  double frequency_sigma_hz = 0.0;  ///< its standard uncertainty [Hz]; 0 where none is given
  double einstein_a_per_s = 0.0;    ///< A_ul [1/s]
};

}  // namespace trotline
