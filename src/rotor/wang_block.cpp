#include <Eigen/Eigenvalues>

#include <cmath>
#include <numbers>

#include <trotline/base/errors.hpp>
#include <trotline/rotor/wang_block.hpp>

namespace trotline {
namespace {

using Solver = Eigen::SelfAdjointEigenSolver<Eigen::MatrixXd>;

int first_k_of(bool odd, int sign) { return odd ? 1 : sign > 0 ? 0 : 2; }

/// How many basis states a block has whose K ends at last_k.
int size_of(int last_k, int first_k) { return first_k > last_k ? 0 : (last_k - first_k) / 2 + 1; }

/// <J,to|H|J,from> for K that differ by an even number.
double element_hz(const HamiltonianAtJ& hamiltonian, int from, int to) {
  if (from == to) return hamiltonian.diagonal_hz(to);
  const int m = std::abs(to - from) / 2;
  return m > hamiltonian.furthest_coupling() ? 0.0 : hamiltonian.coupling_hz(std::min(from, to), m);
}

/// <K2,sign|H|K1,sign> between Wang states.
double wang_element_hz(const HamiltonianAtJ& hamiltonian, int k1, int k2, int sign) {
  if (k1 == 0 && k2 == 0) return hamiltonian.diagonal_hz(0);
  if (k1 == 0 || k2 == 0) return std::numbers::sqrt2 * element_hz(hamiltonian, k1, k2);
  return element_hz(hamiltonian, k1, k2) + sign * element_hz(hamiltonian, -k1, k2);
}

/// The iteration's test for a negligible off-diagonal element wants numbers of order one.
struct Scaled {
  Eigen::VectorXd diagonal, below;
  double unit_hz;
};

Scaled tridiagonal(const HamiltonianAtJ& hamiltonian, const WangBlock& block, int n) {
  Scaled matrix{Eigen::VectorXd(n), Eigen::VectorXd(std::max(n - 1, 0)), 1.0};
  for (int i = 0; i < n; ++i) {
    const int k = block.first_k + 2 * i;
    matrix.diagonal[i] = wang_element_hz(hamiltonian, k, k, block.sign);
    if (i + 1 < n) matrix.below[i] = wang_element_hz(hamiltonian, k, k + 2, block.sign);
  }
  const double largest =
      std::max(matrix.diagonal.cwiseAbs().maxCoeff(), n > 1 ? matrix.below.cwiseAbs().maxCoeff() : 0.0);
  if (largest > 0.0) matrix.unit_hz = largest;
  matrix.diagonal /= matrix.unit_hz;
  matrix.below /= matrix.unit_hz;
  return matrix;
}

void diagonalise(const HamiltonianAtJ& hamiltonian, WangBlock& block, int n, Eigenvectors eigenvectors) {
  const int options = eigenvectors == Eigenvectors::yes ? Eigen::ComputeEigenvectors : Eigen::EigenvaluesOnly;
  Solver solver;
  double unit_hz = 1.0;
  if (hamiltonian.furthest_coupling() == 1) {
    const Scaled matrix = tridiagonal(hamiltonian, block, n);
    unit_hz = matrix.unit_hz;
    solver.computeFromTridiagonal(matrix.diagonal, matrix.below, options);
  } else {
    solver.compute(wang_matrix_hz(hamiltonian, block.first_k, block.sign).topLeftCorner(n, n), options);
  }
  if (solver.info() != Eigen::Success)
    throw Error("the energies of an asymmetric rotor could not be computed");
  block.energy_hz = unit_hz * solver.eigenvalues().array();
  if (eigenvectors == Eigenvectors::yes) block.vectors = solver.eigenvectors();
}

/// +1 or -1 as `exponent` is even or odd.
int sign_of(int exponent) { return exponent % 2 == 0 ? 1 : -1; }

/// Labels by rising Ka, for as many levels as the block has. The character of a level under a half turn is
/// (-1)^Ka about a and (-1)^Kc about c; that of a Wang state is (-1)^K about z, sign (-1)^J about x and sign
/// (-1)^(J-K) about y.
void label(WangBlock& block, Representation representation) {
  const int about_z = sign_of(block.first_k);
  const int about_x = block.sign * sign_of(block.j);
  const int about_y = about_x * about_z;
  const bool z_is_a = representation == Representation::i_r || representation == Representation::i_l;
  const bool x_is_partner = representation == Representation::i_l || representation == Representation::iii_r;
  const int about_other = x_is_partner ? about_x : about_y;  // c where z is a, a where z is c
  const int about_a = z_is_a ? about_z : about_other;
  const int about_c = z_is_a ? about_other : about_z;
  for (int ka = about_a > 0 ? 0 : 1; ka <= block.j; ka += 2) {
    const int kc = block.j - ka + (sign_of(block.j - ka) == about_c ? 0 : 1);
    if (kc > block.j) continue;  // Ka = 0 has Kc = J only
    if (static_cast<Eigen::Index>(block.ka.size()) == block.energy_hz.size()) return;
    block.ka.push_back(static_cast<std::int16_t>(ka));
    block.kc.push_back(static_cast<std::int16_t>(kc));
  }
}

}  // namespace

Eigen::MatrixXd wang_matrix_hz(const HamiltonianAtJ& hamiltonian, int first_k, int sign) {
  const int n = size_of(hamiltonian.j(), first_k);
  Eigen::MatrixXd matrix(n, n);
  for (int row = 0; row < n; ++row) {
    for (int column = 0; column <= row; ++column) {
      const double element = wang_element_hz(hamiltonian, first_k + 2 * column, first_k + 2 * row, sign);
      matrix(row, column) = element;
      matrix(column, row) = element;
    }
  }
  return matrix;
}

int largest_k_in_use(const HamiltonianAtJ& hamiltonian, double highest_energy_hz) {
  // The tail of a vector beyond its classical limit: exp(-6^2) is below the rounding of an energy.
  const int tail = 10 + static_cast<int>(6.0 * hamiltonian.spread_of_k());
  int k = hamiltonian.j();
  while (k > 0 && hamiltonian.floor_hz(k) > highest_energy_hz) --k;
  return std::min(k + tail, hamiltonian.j());
}

std::array<WangBlock, 4> wang_blocks(const HamiltonianAtJ& hamiltonian, Representation representation,
                                     Eigenvectors eigenvectors, double highest_energy_hz) {
  const bool z_is_a = representation == Representation::i_r || representation == Representation::i_l;
  const int last_k = z_is_a ? largest_k_in_use(hamiltonian, highest_energy_hz) : hamiltonian.j();
  std::array<WangBlock, 4> blocks;
  for (std::size_t i = 0; i < blocks.size(); ++i) {
    WangBlock& block = blocks[i];
    block.j = hamiltonian.j();
    block.sign = i % 2 == 0 ? +1 : -1;
    block.first_k = first_k_of(i >= 2, block.sign);
    const int n = size_of(last_k, block.first_k);
    if (n > 0) diagonalise(hamiltonian, block, n, eigenvectors);
    label(block, representation);
  }
  return blocks;
}

}  // namespace trotline
