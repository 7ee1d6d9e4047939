#pragma once

#include <vector>

#include <trotline/rotor/structure.hpp>

namespace trotline {

/// A number that was estimated, not measured.
struct Estimated {
  double value_hz = 0.0;
  double relative_error = 0.0;  ///< expected size of its error, as a part of the value
};

/// Rotational constants of an isotopologue, estimated. For a linear rotor A is
/// infinite, without error, and C is B.
struct EstimatedConstants {
  Estimated a;
  Estimated b;
  Estimated c;
};

/// Measured ground-state constants of the parent [Hz]; of a linear rotor only B is used.
struct ParentConstants {
  double a_hz = 0.0;
  double b_hz = 0.0;
  double c_hz = 0.0;
};

/// The ratio rule: B0(iso) = B0(parent) Be(iso) / Be(parent), for each of A, B and C.
///
/// What the rule leaves out is that vibration changes with mass too. Zero-point motion takes up to 1.5
/// percent off B (HCl), a share that goes as the square root of B in a diatomic molecule; and where the
/// structure gives the parent badly, its isotopologue is no better. Expected error: the largest of 0.015 |1 -
/// sqrt(ratio)| and |B0(parent)/Be(parent) - 1| |1 - ratio|. Distortion constants scale with ratio^2
/// (quartic) and ratio^3 (sextic): see scaled_distortion_hz().
/// @param parent      measured constants, finite and > 0
/// @param structure   atoms of the parent
/// @param isotopes    of the same atoms in the isotopologue, in the same order
/// @throws InputError  as rigid_rotor; if the numbers of atoms differ
/// @throws DomainError  if a constant is not finite and positive
[[nodiscard]] EstimatedConstants isotopologue_constants(const ParentConstants& parent,
                                                        const std::vector<Atom>& structure,
                                                        const std::vector<std::string>& isotopes);

/// The same for a diatomic molecule, where the ratio is that of the reduced masses and no structure is
/// needed.
[[nodiscard]] Estimated diatomic_isotopologue_b(double parent_b_hz, const std::vector<std::string>& parent,
                                                const std::vector<std::string>& isotopologue);

/// A distortion constant of order `power` in B (2 for D, 3 for H), scaled by a ratio of rotational constants.
/// Its expected relative error is a few times that of B; for a polyatomic molecule some percent.
[[nodiscard]] double scaled_distortion_hz(double parent_hz, double ratio, int power);

}  // namespace trotline
