#pragma once

#include <cstddef>
#include <cstdint>
#include <limits>
#include <string>
#include <vector>

#include <trotline/rotor/spin.hpp>

/// The one way in to every rotor. Each kind (linear, symmetric, spherical, asymmetric, triplet-sigma,
/// inverting) has a function that takes its constants and gives a RotorModel; what comes after does not ask
/// which kind it was.
namespace trotline {

/// Permanent dipole moment on the principal axes [C m]. Signs do not matter to line strengths, as no line
/// of a rotor has two components at once.
struct DipoleMoment {
  double a_c_m = 0.0;
  double b_c_m = 0.0;
  double c_c_m = 0.0;
};

inline constexpr int kHighestJ = 400;

/// What to compute and what to keep. The same for every rotor.
struct RotorOptions {
  int highest_j = 60;  ///< levels up to this J; 0 to kHighestJ
  double highest_energy_hz = std::numeric_limits<double>::infinity();  ///< levels above are dropped
  double lowest_frequency_hz = 0.0;                                    ///< lines below, or at 0, are dropped
  double highest_frequency_hz = std::numeric_limits<double>::infinity();  ///< lines above are dropped
  double least_line_strength = 0.0;  ///< lines with S (without mu^2) below are dropped
  int highest_line_j = kHighestJ;    ///< lines of a level with J above are dropped; levels stay, for Q
};

struct RotorLevel {
  QuantumNumbers quanta = {};
  double energy_hz = 0.0;  ///< E/h [Hz] from the zero of the Hamiltonian, not from the lowest level
  double rotational_degeneracy = 1.0;  ///< 2J+1; 2(2J+1) where +K and -K are one level; (2J+1)^2 spherical
  double spin_weight = 1.0;            ///< g_I, > 0
  std::string isomer = {};             ///< "ortho", "para", "A", "E"; empty where there is only one

  /// g = rotational degeneracy times spin weight: what Q and populations want.
  [[nodiscard]] double degeneracy() const { return rotational_degeneracy * spin_weight; }
};

/// An electric-dipole line. Indices point into the levels of the same model.
struct RotorTransition {
  std::uint32_t upper = 0;
  std::uint32_t lower = 0;
  double frequency_hz = 0.0;            ///< energy difference / h, > 0
  double line_strength_mu2_c2m2 = 0.0;  ///< S mu^2 [C2 m2], without spin weight; summed over +K and -K
  double einstein_a_per_s = 0.0;        ///< A_ul [1/s]
};

struct RotorModel {
  std::vector<RotorLevel> levels;            ///< by rising energy; only levels that exist (g_I > 0)
  std::vector<RotorTransition> transitions;  ///< by rising frequency
  std::vector<std::string> warnings;         ///< what was cut off or assumed, for the reader of the numbers

  /// No level that the Hamiltonian has is missing below this E/h [Hz] (same zero as the levels'): the
  /// least of where highest_j, highest_energy_hz and a distortion series that stops rising cut the list.
  double complete_to_hz = std::numeric_limits<double>::infinity();
};

/// Makes a model of levels and lines as a rotor's own file computes them: asks the spin rule about every
/// level, drops levels of weight 0 and what the options exclude together with their lines, computes A,
/// sorts both lists. A line is turned round where its upper level lies below its lower one.
///
/// @param draft  quanta, energies, rotational degeneracies; lines with S mu^2 and indices into draft.levels.
///               Spin weights, frequencies and A are set here. S is not known here, so
///               options.least_line_strength is the rotor's business.
/// @throws DomainError if an option is out of its domain or the spin rule does not fit the levels
[[nodiscard]] RotorModel finished_model(RotorModel draft, const SpinRule& spin, const RotorOptions& options);

/// @throws DomainError naming the option that is NaN or out of range
void require_valid(const RotorOptions& options);

}  // namespace trotline
