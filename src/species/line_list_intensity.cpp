#include <cmath>
#include <numbers>

#include <trotline/base/errors.hpp>
#include <trotline/physics/constants.hpp>
#include <trotline/species/line_list_intensity.hpp>

namespace trotline {
namespace {

void require_positive(const char* argument, double value) {
  if (!(std::isfinite(value) && value > 0.0)) throw DomainError(argument, value, "finite and above 0");
}

}  // namespace

double einstein_a_from_intensity_per_s(const ListedIntensity& listed) {
  if (!(std::isfinite(listed.intensity_nm2_mhz) && listed.intensity_nm2_mhz >= 0.0)) {
    throw DomainError("intensity_nm2_mhz", listed.intensity_nm2_mhz, "finite and not below 0");
  }
  if (!std::isfinite(listed.lower_energy_k))
    throw DomainError("lower_energy_k", listed.lower_energy_k, "finite");
  require_positive("frequency_hz", listed.frequency_hz);
  require_positive("upper_degeneracy", listed.upper_degeneracy);
  require_positive("partition", listed.partition);
  require_positive("temperature_k", listed.temperature_k);
  constexpr double kSquareMetreHzPerSquareNmMhz = 1e-18 * 1e6;
  const double wavenumber_per_m = listed.frequency_hz / constants::kLightMPerS;
  const double photon = constants::kKelvinPerHz * listed.frequency_hz / listed.temperature_k;
  // exp(-E_l) - exp(-E_u) without the cancellation of two near exponentials.
  const double populations = std::exp(-listed.lower_energy_k / listed.temperature_k) * -std::expm1(-photon);
  return 8.0 * std::numbers::pi * wavenumber_per_m * wavenumber_per_m * listed.intensity_nm2_mhz *
         kSquareMetreHzPerSquareNmMhz * listed.partition / listed.upper_degeneracy / populations;
}

}  // namespace trotline
