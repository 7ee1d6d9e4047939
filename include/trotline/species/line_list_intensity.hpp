#pragma once

namespace trotline {

/// What turns the integrated intensity of a line-list row into a rate.
struct ListedIntensity {
  double intensity_nm2_mhz = 0.0;  ///< I(T0) [nm2 MHz], linear, >= 0
  double frequency_hz = 0.0;       ///< nu [Hz], > 0
  double lower_energy_k = 0.0;     ///< E_l/k [K]; may be a rounding below 0
  double upper_degeneracy = 0.0;   ///< g_u, > 0, **of the same list entry** as Q
  double partition = 0.0;          ///< Q(T0), > 0, of the same list entry as g_u
  double temperature_k = 300.0;    ///< T0 [K], > 0: the lists' is 300 K
};

/// Einstein coefficient A_ul [1/s] from the integrated intensity of a line list.
///
///     A_ul = 8 pi nu^2 / c^2 * I(T0) * Q(T0) / g_u / (exp(-E_l/kT0) - exp(-E_u/kT0)),  E_u = E_l + h nu
///
/// which is the usual "I nu^2 Q / g_u (...)^-1 2.7964e-16", nu in MHz and I in nm2 MHz, without the rounding
/// of its factor. A does not depend on how spins are counted as long as Q and g_u agree; a row that stands
/// for one of two lines that coincide (+K and -K) gives the A of each and of their sum.
/// @throws DomainError naming the argument
/// Reference: Pickett et al. 1998, JQSRT 60, 883, eq. 1-9.
[[nodiscard]] double einstein_a_from_intensity_per_s(const ListedIntensity& listed);

}  // namespace trotline
