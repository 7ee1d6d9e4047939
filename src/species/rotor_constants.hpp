// Constants of rotors in species files: which key goes where, and what makes a rotor impossible.
#pragma once

#include <span>
#include <string>

#include <trotline/base/errors.hpp>
#include <trotline/rotor/distortion.hpp>
#include <trotline/rotor/rotor.hpp>

#include "file_map.hpp"
#include "species_kinds.hpp"

namespace trotline {

/// The key of a constant and the member that takes it [Hz].
template <typename Constants>
struct ConstantKey {
  const char* key;
  double Constants::* member;
};

/// Reads those constants that the file has; the others stay as they are.
template <typename Constants>
void read_constants(const FileMap& map, std::span<const ConstantKey<Constants>> keys, Constants& constants) {
  for (const auto& [key, member] : keys) {
    constants.*member = map.optional_quantity(key, Dimension::frequency, constants.*member);
  }
}

/// Terms diagonal in K under the names of the S reduction and of symmetric rotors: D_J ... H_K, L_J ... L_K.
[[nodiscard]] std::span<const ConstantKey<DiagonalDistortion>> distortion_keys();

/// The same under the names of the A reduction: Delta_J ... Phi_K, L_J ... L_K.
[[nodiscard]] std::span<const ConstantKey<DiagonalDistortion>> a_reduction_keys();

/// The key `dipole` with mu_a, mu_b, mu_c, at least one of them not 0.
[[nodiscard]] DipoleMoment read_dipole_components(const FileMap& file, Species& species);

/// The key `dipole` with mu, along the axis.
[[nodiscard]] double read_axial_dipole(const FileMap& file, Species& species);

/// What `make` gives; where the constants are out of a rotor's domain, the file is refused at `key`.
template <typename Make>
auto made_from(const FileMap& file, const std::string& key, const Make& make) {
  try {
    return make();
  } catch (const DomainError& error) {
    file.refuse(key, {error.what(), "constants that make a rotor", "check signs, units, the order A >= B >= C, and that the spin rule is one for this kind of rotor"});
  }
}

}  // namespace trotline
