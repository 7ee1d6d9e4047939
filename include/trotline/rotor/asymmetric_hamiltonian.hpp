#pragma once

#include <variant>

#include <trotline/rotor/distortion.hpp>

namespace trotline {

/// Which molecular axes are x, y and z of the symmetric-top basis. z is a for I and c for III; r and l
/// differ in x and y: I^r (b, c, a), I^l (c, b, a), III^r (a, b, c), III^l (b, a, c).
enum class Representation { i_r, i_l, iii_r, iii_l };

/// Terms of Watson's A reduction that change K by 2 [Hz], with [,] the anticommutator:
///
///     - 2 delta_J J^2 (Jx^2 - Jy^2) - delta_K [Jz^2, Jx^2 - Jy^2]
///     + 2 h_J J^4 (Jx^2 - Jy^2) + h_JK J^2 [Jz^2, Jx^2 - Jy^2] + h_K [Jz^4, Jx^2 - Jy^2]
///     + 2 l_J J^6 (Jx^2 - Jy^2) + l_JK J^4 [Jz^2, Jx^2 - Jy^2] + l_KJ J^2 [Jz^4, Jx^2 - Jy^2]
///     + l_K [Jz^6, Jx^2 - Jy^2]
///
/// Papers print the sextic ones as phi_J, phi_JK, phi_K or h_J, h_JK, h_K.
struct AReduction {
  double delta_j_hz = 0.0;
  double delta_k_hz = 0.0;
  double h_j_hz = 0.0;
  double h_jk_hz = 0.0;
  double h_k_hz = 0.0;
  double l_j_hz = 0.0;
  double l_jk_hz = 0.0;
  double l_kj_hz = 0.0;
  double l_k_hz = 0.0;
};

/// Terms of Watson's S reduction that change K by 2, 4, 6 and 8 [Hz]:
///
///     (d1 J^2 + h1 J^4 + l1 J^6)(J+^2 + J-^2) + (d2 + h2 J^2 + l2 J^4)(J+^4 + J-^4)
///     + (h3 + l3 J^2)(J+^6 + J-^6) + l4 (J+^8 + J-^8)
struct SReduction {
  double d1_hz = 0.0;
  double d2_hz = 0.0;
  double h1_hz = 0.0;
  double h2_hz = 0.0;
  double h3_hz = 0.0;
  double l1_hz = 0.0;
  double l2_hz = 0.0;
  double l3_hz = 0.0;
  double l4_hz = 0.0;
};

/// Constants of an asymmetric rotor in its ground vibrational state [Hz], A >= B >= C > 0, not all equal.
/// Which reduction they belong to is told by the type of `off_diagonal`.
struct AsymmetricConstants {
  double a_hz = 0.0;
  double b_hz = 0.0;
  double c_hz = 0.0;
  DiagonalDistortion diagonal = {};
  std::variant<AReduction, SReduction> off_diagonal = AReduction{};
  Representation representation = Representation::i_r;
};

/// @throws DomainError naming the constant: not finite, not positive, A < B, B < C, all three equal (a
///         spherical rotor), or a quartic constant that is not below the rigid one
void require_valid(const AsymmetricConstants& constants);

/// One J of Watson's reduced Hamiltonian in the basis |J,K> of a symmetric top about z.
///
/// A truncated distortion series turns over sooner or later: from there energies fall with growing angular
/// momentum, and such levels are an artefact. rising_k() is the highest K up to which the series can be
/// trusted at this J; for larger K the elements keep the distortion that they have at rising_k(), so that the
/// levels below are computed beside a wall instead of beside an abyss. Levels labelled with a larger K are
/// no result.
class HamiltonianAtJ {
 public:
  /// @param constants  valid (see require_valid); not checked again here  @param j  >= 0
  HamiltonianAtJ(const AsymmetricConstants& constants, int j);

  [[nodiscard]] int j() const { return j_; }

  /// <J,K|H|J,K> [Hz].
  [[nodiscard]] double diagonal_hz(int k) const;

  /// <J,K+2m|H|J,K> [Hz] for m = 1 .. 4; 0 where K+2m is outside of -J .. J.
  [[nodiscard]] double coupling_hz(int k, int m) const;

  /// The least classical energy with Jz = K [Hz], asymmetry of the distortion aside: <J,K|H|J,K> less what
  /// the difference of the two constants across z takes off at most.
  [[nodiscard]] double floor_hz(int k) const;

  /// How far a vector spreads in K about its classical limit: that of the lowest level, which is a harmonic
  /// oscillator in K, falls off as exp(-K^2 / (2 spread^2)) at large J.
  [[nodiscard]] double spread_of_k() const;

  /// The largest m with a coupling: 1 in the A reduction, which makes Wang blocks tridiagonal.
  [[nodiscard]] int furthest_coupling() const;

  /// The highest K, at most J, such that up to it (a) E(J,K) on the diagonal moves with K as the rigid rotor
  /// has it, and (b) the classical energy H(Jx,Jy,Jz) at length sqrt(J(J+1)) and Jz = K rises with the length
  /// of J in every direction. -1 when not even K = 0 does.
  [[nodiscard]] int rising_k() const { return rising_k_; }

 private:
  [[nodiscard]] double radial_slope_hz(double y, double cos_two_chi) const;
  [[nodiscard]] bool rises_at(int k) const;
  [[nodiscard]] int find_rising_k() const;
  [[nodiscard]] double frozen(double y) const;

  AsymmetricConstants constants_;
  int j_;
  double x_;     ///< J(J+1)
  double z_hz_;  ///< rigid constant about z, and the mean and difference of the two about x and y
  double mean_hz_;
  double difference_hz_;
  int rising_k_;
};

}  // namespace trotline
