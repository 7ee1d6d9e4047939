#include <trotline/rotor/line_strength.hpp>

#include <cmath>
#include <numbers>

#include <trotline/base/errors.hpp>
#include <trotline/physics/constants.hpp>

namespace trotline {

double einstein_a_per_s(double frequency_hz, double line_strength_mu2_c2m2, double rotational_degeneracy) {
  if (!(std::isfinite(frequency_hz) && frequency_hz > 0.0)) {
    throw DomainError("frequency_hz", frequency_hz, "finite and above 0");
  }
  if (!(std::isfinite(line_strength_mu2_c2m2) && line_strength_mu2_c2m2 >= 0.0)) {
    throw DomainError("line_strength_mu2_c2m2", line_strength_mu2_c2m2, "finite and not below 0");
  }
  if (!(std::isfinite(rotational_degeneracy) && rotational_degeneracy > 0.0)) {
    throw DomainError("rotational_degeneracy", rotational_degeneracy, "finite and above 0");
  }
  using namespace constants;
  const double inverse_wavelength = frequency_hz / kLightMPerS;
  const double cubed = inverse_wavelength * inverse_wavelength * inverse_wavelength;
  const double pi3 = std::numbers::pi * std::numbers::pi * std::numbers::pi;
  return 16.0 * pi3 * cubed / (3.0 * kVacuumPermittivityFPerM * kPlanckJS) * line_strength_mu2_c2m2 /
         rotational_degeneracy;
}

}  // namespace trotline
