#include <trotline/physics/planck.hpp>

#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/physics/constants.hpp>

namespace trotline {
namespace {

void require_domain(double frequency_hz, double temperature_k) {
  if (!(std::isfinite(frequency_hz) && frequency_hz > 0.0)) {
    throw DomainError("frequency_hz", frequency_hz, "finite and above 0");
  }
  if (!(std::isfinite(temperature_k) && temperature_k >= 0.0)) {
    throw DomainError("temperature_k", temperature_k, "finite and not below 0");
  }
}

}  // namespace

double photon_energy_k(double frequency_hz) { return constants::kKelvinPerHz * frequency_hz; }

double planck_equivalent_temperature_k(double frequency_hz, double temperature_k) {
  require_domain(frequency_hz, temperature_k);
  if (temperature_k == 0.0) return 0.0;
  const double t0 = photon_energy_k(frequency_hz);
  return t0 / std::expm1(t0 / temperature_k);
}

double planck_equivalent_temperature_slope(double frequency_hz, double temperature_k) {
  require_domain(frequency_hz, temperature_k);
  if (temperature_k == 0.0) return 0.0;
  const double x = photon_energy_k(frequency_hz) / temperature_k;
  // x^2 e^x / (e^x - 1)^2 as (x / (2 sinh(x/2)))^2: no difference of near numbers, no overflow of e^x.
  const double half = 0.5 * x;
  if (half > 700.0) return 0.0;
  const double ratio = half == 0.0 ? 1.0 : half / std::sinh(half);
  return ratio * ratio;
}

}  // namespace trotline
