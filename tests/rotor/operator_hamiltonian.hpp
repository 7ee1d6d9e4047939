#pragma once

#include <Eigen/Dense>

#include <cmath>
#include <utility>
#include <variant>

#include <trotline/rotor/asymmetric_hamiltonian.hpp>

namespace trotline {

/// Angular momentum operators as matrices on |J,-J> .. |J,J>: an independent way to the Hamiltonian, which is
/// written below as the papers write it, with products and anticommutators.
struct Operators {
  explicit Operators(int j)
      : one(Eigen::MatrixXd::Identity(2 * j + 1, 2 * j + 1)),
        jz(Eigen::MatrixXd::Zero(2 * j + 1, 2 * j + 1)),
        raise(jz) {
    for (int k = -j; k <= j; ++k) {
      jz(k + j, k + j) = k;
      if (k < j) raise(k + 1 + j, k + j) = std::sqrt(j * (j + 1.0) - k * (k + 1.0));
    }
    j2 = j * (j + 1.0) * one;
    jz2 = jz * jz;
    const Eigen::MatrixXd lower = raise.transpose();
    Eigen::MatrixXd up = one;
    Eigen::MatrixXd down = one;
    for (Eigen::MatrixXd& power : shift) {
      up = up * raise * raise;
      down = down * lower * lower;
      power = up + down;
    }
  }
  Eigen::MatrixXd one, j2, jz, jz2, raise;
  Eigen::MatrixXd shift[4];  ///< J+^2m + J-^2m, m = 1 .. 4
};

inline Eigen::MatrixXd both_orders(const Eigen::MatrixXd& x, const Eigen::MatrixXd& y) {
  return x * y + y * x;
}

inline Eigen::MatrixXd power(const Eigen::MatrixXd& x, int n) {
  Eigen::MatrixXd result = Eigen::MatrixXd::Identity(x.rows(), x.cols());
  for (int i = 0; i < n; ++i) result = result * x;
  return result;
}

inline Eigen::MatrixXd diagonal_part(const DiagonalDistortion& d, const Operators& o) {
  const Eigen::MatrixXd& x = o.j2;
  const Eigen::MatrixXd& y = o.jz2;
  return -d.d_j_hz * power(x, 2) - d.d_jk_hz * x * y - d.d_k_hz * power(y, 2) + d.h_j_hz * power(x, 3) +
         d.h_jk_hz * power(x, 2) * y + d.h_kj_hz * x * power(y, 2) + d.h_k_hz * power(y, 3) +
         d.l_j_hz * power(x, 4) + d.l_jjk_hz * power(x, 3) * y + d.l_jk_hz * power(x, 2) * power(y, 2) +
         d.l_kkj_hz * x * power(y, 3) + d.l_k_hz * power(y, 4);
}

/// Watson 1977, the A reduction, as quoted in the header.
inline Eigen::MatrixXd off_diagonal_part(const AReduction& t, const Operators& o) {
  const Eigen::MatrixXd difference = 0.5 * o.shift[0];  // Jx^2 - Jy^2
  return -2.0 * t.delta_j_hz * o.j2 * difference - t.delta_k_hz * both_orders(o.jz2, difference) +
         2.0 * t.h_j_hz * power(o.j2, 2) * difference + t.h_jk_hz * o.j2 * both_orders(o.jz2, difference) +
         t.h_k_hz * both_orders(power(o.jz2, 2), difference) + 2.0 * t.l_j_hz * power(o.j2, 3) * difference +
         t.l_jk_hz * power(o.j2, 2) * both_orders(o.jz2, difference) +
         t.l_kj_hz * o.j2 * both_orders(power(o.jz2, 2), difference) +
         t.l_k_hz * both_orders(power(o.jz2, 3), difference);
}

inline Eigen::MatrixXd off_diagonal_part(const SReduction& t, const Operators& o) {
  return (t.d1_hz * o.j2 + t.h1_hz * power(o.j2, 2) + t.l1_hz * power(o.j2, 3)) * o.shift[0] +
         (t.d2_hz * o.one + t.h2_hz * o.j2 + t.l2_hz * power(o.j2, 2)) * o.shift[1] +
         (t.h3_hz * o.one + t.l3_hz * o.j2) * o.shift[2] + t.l4_hz * o.shift[3];
}

inline Eigen::MatrixXd full_hamiltonian(const AsymmetricConstants& c, int j) {
  const Operators o(j);
  const bool z_is_a = c.representation == Representation::i_r || c.representation == Representation::i_l;
  const double z = z_is_a ? c.a_hz : c.c_hz;
  double x = z_is_a ? c.b_hz : c.a_hz;  // I^r has x = b, y = c; III^r has x = a, y = b
  double y = z_is_a ? c.c_hz : c.b_hz;
  if (c.representation == Representation::i_l || c.representation == Representation::iii_l) std::swap(x, y);
  // x Jx^2 + y Jy^2 with Jx^2 + Jy^2 = J^2 - Jz^2 and Jx^2 - Jy^2 = (J+^2 + J-^2)/2.
  Eigen::MatrixXd h = 0.5 * (x + y) * (o.j2 - o.jz2) + z * o.jz2 + 0.25 * (x - y) * o.shift[0];
  h += diagonal_part(c.diagonal, o);
  return h + std::visit([&](const auto& terms) { return off_diagonal_part(terms, o); }, c.off_diagonal);
}

}  // namespace trotline
