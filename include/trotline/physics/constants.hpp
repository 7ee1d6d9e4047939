#pragma once

#include <numbers>

/// CODATA 2018 in SI units. h, k, c, e and N_A are exact by the definition of the SI.
/// Reference: Tiesinga et al. 2021, Rev. Mod. Phys. 93, 025010 (keys in docs/references.bib: [CODATA2018]).
namespace trotline::constants {

inline constexpr const char* kVintage = "CODATA 2018";

inline constexpr double kPlanckJS = 6.62607015e-34;          ///< h [J s], exact
inline constexpr double kBoltzmannJPerK = 1.380649e-23;      ///< k [J/K], exact
inline constexpr double kLightMPerS = 299792458.0;           ///< c [m/s], exact
inline constexpr double kElementaryChargeC = 1.602176634e-19;  ///< e [C], exact
inline constexpr double kAvogadroPerMol = 6.02214076e23;     ///< N_A [1/mol], exact
inline constexpr double kAtomicMassKg = 1.66053906660e-27;   ///< u [kg], relative uncertainty 3e-10
inline constexpr double kVacuumPermittivityFPerM = 8.8541878128e-12;  ///< eps0 [F/m], 1.5e-10

/// One debye [C m]: 1e-18 statC cm, which is 1e-21 / c in SI figures.
inline constexpr double kDebyeCM = 1e-21 / kLightMPerS;

/// h/k [K/Hz]: a frequency times this is the energy E/k in kelvin.
inline constexpr double kKelvinPerHz = kPlanckJS / kBoltzmannJPerK;

/// hc/k in [K per 1/cm]: a wavenumber in cm^-1 times this is E/k in kelvin.
inline constexpr double kKelvinPerWavenumberCm = kKelvinPerHz * kLightMPerS * 100.0;

/// FWHM of a Gaussian over its standard deviation, sqrt(8 ln 2).
inline constexpr double kFwhmPerSigma = 2.3548200450309493;

/// Temperature of the cosmic microwave background [K]. Reference: Fixsen 2009, ApJ 707, 916.
inline constexpr double kCosmicBackgroundK = 2.7255;

}  // namespace trotline::constants
