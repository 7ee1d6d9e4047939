#pragma once

#include <Eigen/Core>

#include <trotline/rotor/wang_block.hpp>

namespace trotline {

/// Axis of the representation.
enum class BodyAxis { x, y, z };

/// The block to which a component of the dipole leads from a Wang block.
struct WangTarget {
  bool odd = false;
  int sign = +1;
};

/// @param delta_j  0 or +1
[[nodiscard]] WangTarget wang_target(BodyAxis axis, const WangBlock& from, int delta_j);

/// Amplitudes whose squares are the line strengths S of all pairs of levels from two blocks.
///
///     S = 3 sum over M, M' of |<J' tau' M'| Phi_Zg |J tau M>|^2
///
/// @param from, to  blocks with eigenvectors, J' = J or J + 1, and `to` the one that wang_target() names
/// @return one row a level of `to`, one column a level of `from`; signs depend on phases
/// Reference: Cross, Hainer & King 1944, J. Chem. Phys. 12, 210; phases as Zare 1988, Angular Momentum,
/// ch. 3.
[[nodiscard]] Eigen::MatrixXd line_strength_amplitudes(BodyAxis axis, const WangBlock& from,
                                                       const WangBlock& to);

}  // namespace trotline
