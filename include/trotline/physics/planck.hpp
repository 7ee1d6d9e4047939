#pragma once

namespace trotline {

/// Planck-equivalent temperature J(nu, T) of a blackbody [K].
///
///     J(nu, T) = T0 / (exp(T0 / T) - 1),    T0 = h nu / k
///
/// J is the temperature at which the Rayleigh-Jeans law alone would give the blackbody's specific
/// intensity. Use J, not T, wherever a brightness temperature is differenced against a background.
///
/// @param frequency_hz   rest frequency nu [Hz]; finite, > 0
/// @param temperature_k  physical temperature T [K]; finite, >= 0
/// @return J [K]; 0 at T = 0 and where T0 / T exceeds about 709, where it underflows
/// @throws DomainError naming the argument, if one is NaN or out of range
///
/// Properties (each tested): 0 <= J < T; J -> T - T0/2 as T0/T -> 0; J rises with T, falls with nu.
/// Accuracy: relative error < kPlanckErrorUlp * eps * (1 + T0/T) for 1e-9 <= T0/T <= 700, measured
///     against 50-digit arithmetic (test Planck.ErrorBoundHoldsAgainst50Digits).
/// Reference: [MangumShirley2015] eq. 4 (keys in docs/references.bib).
[[nodiscard]] double planck_equivalent_temperature_k(double frequency_hz, double temperature_k);

inline constexpr double kPlanckErrorUlp = 2.0;

/// dJ/dT, dimensionless: (J/T)^2 exp(T0/T), which goes to 1 for T0/T -> 0 and to 0 for T -> 0.
/// Same domain and errors as planck_equivalent_temperature_k.
[[nodiscard]] double planck_equivalent_temperature_slope(double frequency_hz, double temperature_k);

/// E/k in kelvin of a photon: h nu / k. @param frequency_hz any finite number
[[nodiscard]] double photon_energy_k(double frequency_hz);

}  // namespace trotline
