#pragma once

namespace trotline {

/// Centrifugal distortion of a rotor with an axis: all terms that are diagonal in K, through octic order
/// [Hz].
///
///     - D_J x^2 - D_JK x y - D_K y^2                              x = J(J+1), y = K^2
///     + H_J x^3 + H_JK x^2 y + H_KJ x y^2 + H_K y^3
///     + L_J x^4 + L_JJK x^3 y + L_JK x^2 y^2 + L_KKJ x y^3 + L_K y^4
///
/// The same terms serve symmetric rotors and both reductions of asymmetric ones. In Watson's A reduction
/// D_J, D_JK, D_K are printed as Delta_J, Delta_JK, Delta_K and the sextic ones often as Phi.
/// Reference: Watson 1977, in Vibrational Spectra and Structure 6, 1; Gordy & Cook 1984, ch. VI and VIII.
struct DiagonalDistortion {
  double d_j_hz = 0.0;
  double d_jk_hz = 0.0;
  double d_k_hz = 0.0;
  double h_j_hz = 0.0;
  double h_jk_hz = 0.0;
  double h_kj_hz = 0.0;
  double h_k_hz = 0.0;
  double l_j_hz = 0.0;
  double l_jjk_hz = 0.0;
  double l_jk_hz = 0.0;
  double l_kkj_hz = 0.0;
  double l_k_hz = 0.0;

  /// The quartic terms [Hz], sign included. @param x  J(J+1)  @param y  K^2
  [[nodiscard]] double quartic_hz(double x, double y) const {
    return -(d_j_hz * x * x + d_jk_hz * x * y + d_k_hz * y * y);
  }
  [[nodiscard]] double sextic_hz(double x, double y) const {
    return x * x * (h_j_hz * x + h_jk_hz * y) + y * y * (h_kj_hz * x + h_k_hz * y);
  }
  [[nodiscard]] double octic_hz(double x, double y) const {
    return x * x * (l_j_hz * x * x + l_jjk_hz * x * y + l_jk_hz * y * y) +
           y * y * y * (l_kkj_hz * x + l_k_hz * y);
  }
  [[nodiscard]] double at_hz(double x, double y) const {
    return quartic_hz(x, y) + sextic_hz(x, y) + octic_hz(x, y);
  }
};

/// The largest constants that a caller may give: rigid ones that bound the quartic ones.
struct RigidScale {
  double smallest_hz = 0.0;  ///< bounds |D_J|
  double largest_hz = 0.0;   ///< bounds |D_JK| and |D_K|
};

/// @throws DomainError naming the constant that is not finite, or a quartic one that is not below its bound
void require_valid(const DiagonalDistortion& distortion, const RigidScale& rigid);

}  // namespace trotline
