#pragma once

namespace trotline {

/// Main-beam temperature per corrected antenna temperature: T_mb = T_A* F_eff / B_eff.
///
/// @param forward_efficiency    F_eff, in (0, 1]
/// @param main_beam_efficiency  B_eff, in (0, F_eff]
/// @throws DomainError naming the argument
/// Reference: the relation is common practice at single-dish telescopes; Kutner & Ulich 1981, ApJ 250, 341
/// define the efficiencies under other names.
[[nodiscard]] double main_beam_per_antenna_temperature(double forward_efficiency, double main_beam_efficiency);

/// Rayleigh-Jeans brightness temperature per flux density in a beam [K / (Jy/beam)].
///
///     T / S = c^2 / (2 k nu^2 Omega),   Omega = pi theta1 theta2 / (4 ln 2)
///
/// @param frequency_hz   nu [Hz], > 0
/// @param beam_major_rad, beam_minor_rad  FWHM of the Gaussian beam [rad], > 0
/// @throws DomainError naming the argument
[[nodiscard]] double kelvin_per_jansky_per_beam(double frequency_hz, double beam_major_rad, double beam_minor_rad);

}  // namespace trotline
