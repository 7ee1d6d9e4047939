#include <trotline/physics/intensity_scale.hpp>

#include <cmath>
#include <numbers>

#include <trotline/base/errors.hpp>
#include <trotline/physics/constants.hpp>

namespace trotline {
namespace {

void require_positive(const char* argument, double value) {
  if (!(std::isfinite(value) && value > 0.0)) throw DomainError(argument, value, "finite and above 0");
}

}  // namespace

double main_beam_per_antenna_temperature(double forward_efficiency, double main_beam_efficiency) {
  if (!(forward_efficiency > 0.0 && forward_efficiency <= 1.0)) {
    throw DomainError("forward_efficiency", forward_efficiency, "above 0 and up to 1");
  }
  if (!(main_beam_efficiency > 0.0 && main_beam_efficiency <= forward_efficiency)) {
    throw DomainError("main_beam_efficiency", main_beam_efficiency, "above 0 and up to the forward efficiency");
  }
  return forward_efficiency / main_beam_efficiency;
}

double kelvin_per_jansky_per_beam(double frequency_hz, double beam_major_rad, double beam_minor_rad) {
  require_positive("frequency_hz", frequency_hz);
  require_positive("beam_major_rad", beam_major_rad);
  require_positive("beam_minor_rad", beam_minor_rad);
  constexpr double kJanskyWPerM2Hz = 1e-26;
  const double solid_angle_sr = std::numbers::pi * beam_major_rad * beam_minor_rad / (4.0 * std::numbers::ln2);
  const double wavelength_m = constants::kLightMPerS / frequency_hz;
  return kJanskyWPerM2Hz * wavelength_m * wavelength_m / (2.0 * constants::kBoltzmannJPerK * solid_angle_sr);
}

}  // namespace trotline
