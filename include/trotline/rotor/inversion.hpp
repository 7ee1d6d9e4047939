#pragma once

#include <vector>

#include <trotline/rotor/symmetric.hpp>

namespace trotline {

/// Inversion splitting of a pyramidal symmetric rotor such as NH3:
///
///     nu(J,K) = nu0 exp(c_j x + c_k y + c_jj x^2 + c_jk x y + c_kk y^2),    x = J(J+1), y = K^2
///
/// Reference for the form: Costain 1951, Phys. Rev. 82, 108; Townes & Schawlow 1955, section 12-2.
struct InversionExpansion {
  double nu0_hz = 0.0;
  double c_j = 0.0;
  double c_k = 0.0;
  double c_jj = 0.0;
  double c_jk = 0.0;
  double c_kk = 0.0;
  int holds_to_j = 0;  ///< the highest J of the lines from which the coefficients were found
};

/// A measured inversion frequency, which takes the place of the expansion's. The expansion misses K = 3,
/// whose levels have a further splitting, by 0.2 MHz at (3,3) and 1.8 MHz at (4,3).
struct MeasuredInversion {
  int j = 0;
  int k = 0;
  double frequency_hz = 0.0;
};

struct InvertingConstants {
  SymmetricConstants mean = {};  ///< of the middle of each pair
  InversionExpansion inversion = {};
  std::vector<MeasuredInversion> measured = {};
};

/// nu(J,K) [Hz] of the expansion or, where there is one, of the measurement.
[[nodiscard]] double inversion_frequency_hz(const InvertingConstants& constants, int j, int k);

/// Levels J(K)s and J(K)a, half the splitting below and above the mean; lines inside of the pairs and lines
/// J(K)-J-1(K), which all change s to a or a to s.
///
/// Each of s and a counts with 2J+1, not 2(2J+1): of the combinations of +K and -K with s and a nuclear spin
/// allows half, and the weights of the rule "d3h" are made for that. The rule must know which of s and a exists
/// for K = 0.
///
/// Hyperfine structure is not resolved. Lines with J above holds_to_j are left out (levels are kept, as the
/// splitting hardly moves them), and `warnings` says so.
/// @throws DomainError  as require_valid for the mean constants; if nu0 is not positive or a coefficient not
/// finite; if
///         a measurement is not positive or its (J,K) no level; as finished_model
[[nodiscard]] RotorModel inverting_model(const InvertingConstants& constants, double dipole_c_m,
                                         const SpinRule& spin, const RotorOptions& options);

}  // namespace trotline
