#pragma once

#include <vector>

#include <trotline/rotor/rotor.hpp>
#include <trotline/rotor/spin.hpp>

namespace trotline {

/// Constants of a linear rotor without electronic spin, in frequency units [Hz].
///
///     E(J)/h = B x - D x^2 + H x^3 + L x^4,    x = J (J + 1)
///
/// Reference: Gordy & Cook 1984, Microwave Molecular Spectra, 3rd ed., ch. V.
struct LinearConstants {
  double b_hz = 0.0;
  double d_hz = 0.0;
  double h_hz = 0.0;
  double l_hz = 0.0;
};

/// Permanent dipole moment of a linear rotor [C m], as its lines J -> J-1 see it:
///
///     mu(J) = mu0 + mu2 J^2 + mu4 J^4,    J of the upper level
///
/// mu2 and mu4 hold what centrifugal stretching does to the dipole; for most molecules they are lost in the
/// uncertainty of mu0, for CO they lower A by 0.02 % at 1-0 and 1.3 % at 8-7.
struct LinearDipole {
  double mu0_c_m = 0.0;
  double mu2_c_m = 0.0;
  double mu4_c_m = 0.0;

  [[nodiscard]] double at(int upper_j) const;  ///< mu(J) [C m]
};

/// One line J -> J-1.
struct LinearLine {
  int upper_j = 0;
  double frequency_hz = 0.0;
  double einstein_a_per_s = 0.0;
};

/// E(J)/h [Hz] above J = 0. @param j  >= 0
[[nodiscard]] double linear_energy_hz(const LinearConstants& constants, int j);

/// Frequency of J -> J-1 [Hz], from the differences of the powers of x in closed form, so that no digits are
/// lost to the subtraction of two energies. @param upper_j  >= 1
[[nodiscard]] double linear_frequency_hz(const LinearConstants& constants, int upper_j);

/// The largest J, at most `limit`, up to which the energies rise with every step. A truncated series in
/// x turns over sooner or later; levels beyond that are an artefact.
/// @param limit  >= 0
/// @throws DomainError  if B is not positive or a constant is not finite
[[nodiscard]] int linear_highest_j(const LinearConstants& constants, int limit);

/// The lines 1-0, 2-1 ... up to J = highest_j, by rising J.
///
/// A_ul is that of einstein_a_per_s() with S = J_u and 2 J_u + 1; it does not depend on spin weights.
/// @param highest_j  >= 0; 0 gives no line
/// @throws DomainError  as linear_highest_j, and if the energies stop rising below highest_j
[[nodiscard]] std::vector<LinearLine> linear_lines(const LinearConstants& constants,
                                                   const LinearDipole& dipole, int highest_j);

/// Levels and lines in the form that all rotors share; cut at the J where the energies stop rising, with a
/// warning, if that is below options.highest_j.
/// @throws DomainError  as linear_highest_j, and for options outside their domain
[[nodiscard]] RotorModel linear_model(const LinearConstants& constants, const LinearDipole& dipole,
                                      const SpinRule& spin, const RotorOptions& options);

}  // namespace trotline
