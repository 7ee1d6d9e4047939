#pragma once

#include <Eigen/Core>

#include <array>
#include <cstdint>
#include <limits>
#include <vector>

#include <trotline/rotor/asymmetric_hamiltonian.hpp>

namespace trotline {

/// One of the four parts into which symmetry splits the Hamiltonian of a J: states |K,+-> =
/// (|J,K> +- |J,-K>)/sqrt(2) with K even (E) or odd (O) about the z axis of the representation.
///
/// Levels are labelled inside their block. A block fixes whether Ka and Kc are even or odd, and no two
/// levels of one block cross, so the n-th level by energy has the n-th Ka of that parity. Labels from the
/// order of all levels would fail: pairs from different blocks are split by less than rounding (H2CO from
/// J = 7 on), and a swap would exchange ortho and para.
struct WangBlock {
  int j = 0;
  int first_k = 0;               ///< K of the first basis state; the next ones are first_k + 2, + 4 ...
  int sign = +1;                 ///< of |J,-K> in the basis states
  Eigen::ArrayXd energy_hz;      ///< rising
  Eigen::MatrixXd vectors;       ///< one column a level, on the basis states; empty unless asked for
  std::vector<std::int16_t> ka;  ///< label of each level
  std::vector<std::int16_t> kc;
};

enum class Eigenvectors { no, yes };

/// Diagonalises the four blocks E+, E-, O+, O- of one J. Blocks may be empty (three of them at J = 0).
///
/// Where z is a, only levels up to highest_energy_hz may be wanted. Classically a level of energy E has K of
/// at most sqrt((E - C J(J+1)) / (A - C)), and its vector falls off exponentially beyond: basis states far
/// above are left out, which moves no wanted energy by more than rounding (tested), and levels
/// above may be missing.
/// @throws Error if the eigenvalue iteration does not converge
[[nodiscard]] std::array<WangBlock, 4> wang_blocks(
    const HamiltonianAtJ& hamiltonian, Representation representation,
    Eigenvectors eigenvectors = Eigenvectors::no,
    double highest_energy_hz = std::numeric_limits<double>::infinity());

/// The largest K of a basis state that levels up to an energy have a part in; see wang_blocks.
[[nodiscard]] int largest_k_in_use(const HamiltonianAtJ& hamiltonian, double highest_energy_hz);

/// The block's Hamiltonian as a full matrix [Hz], for checks.
[[nodiscard]] Eigen::MatrixXd wang_matrix_hz(const HamiltonianAtJ& hamiltonian, int first_k, int sign);

}  // namespace trotline
