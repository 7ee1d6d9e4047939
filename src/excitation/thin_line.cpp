#include <trotline/excitation/thin_line.hpp>

#include <cmath>
#include <numbers>

#include <trotline/base/errors.hpp>
#include <trotline/physics/constants.hpp>
#include <trotline/physics/planck.hpp>

namespace trotline {
namespace {

constexpr double kSquareMetresPerSquareCm = 1e-4;
constexpr double kMetresPerKm = 1e3;

void require_positive(const char* argument, double value) {
  if (!(std::isfinite(value) && value > 0.0)) throw DomainError(argument, value, "finite and above 0");
}

}  // namespace

double intensity_per_upper_column_k_km_s_cm2(const LineConstants& line) {
  require_positive("frequency_hz", line.frequency_hz);
  require_positive("einstein_a_per_s", line.einstein_a_per_s);
  const double c = constants::kLightMPerS;
  const double k_m3_per_s = constants::kKelvinPerHz * c * c * c * line.einstein_a_per_s /
                            (8.0 * std::numbers::pi * line.frequency_hz * line.frequency_hz);
  return k_m3_per_s / kSquareMetresPerSquareCm / kMetresPerKm;
}

double background_contrast(double frequency_hz, double excitation_temperature_k, double background_k) {
  require_positive("excitation_temperature_k", excitation_temperature_k);
  if (background_k == 0.0) return 1.0;
  require_positive("background_k", background_k);
  // 1 - expm1(x) / expm1(x_bg) with x = h nu / kT, written so that neither exponential overflows alone.
  const double t0 = photon_energy_k(frequency_hz);
  const double x = t0 / excitation_temperature_k;
  const double x_background = t0 / background_k;
  return 1.0 - std::exp(x - x_background) * std::expm1(-x) / std::expm1(-x_background);
}

double background_contrast_slope_k(double frequency_hz, double excitation_temperature_k, double background_k) {
  require_positive("excitation_temperature_k", excitation_temperature_k);
  if (background_k == 0.0) return 0.0;
  require_positive("background_k", background_k);
  const double t0 = photon_energy_k(frequency_hz);
  const double x = t0 / excitation_temperature_k;
  const double x_background = t0 / background_k;
  return t0 * std::exp(x - x_background) / std::expm1(-x_background);
}

double gaussian_filling(double source_fwhm, double beam_fwhm) {
  require_positive("beam_fwhm", beam_fwhm);
  if (!(source_fwhm > 0.0)) throw DomainError("source_fwhm", source_fwhm, "above 0");
  const double ratio = beam_fwhm / source_fwhm;
  return 1.0 / (1.0 + ratio * ratio);
}

double disc_filling(double source_diameter, double beam_fwhm) {
  require_positive("beam_fwhm", beam_fwhm);
  if (!(source_diameter > 0.0)) throw DomainError("source_diameter", source_diameter, "above 0");
  const double ratio = source_diameter / beam_fwhm;
  return -std::expm1(-std::numbers::ln2 * ratio * ratio);
}

double central_optical_depth(const LineConstants& line, double upper_column_per_cm2,
                             double excitation_temperature_k, double fwhm_km_s) {
  require_positive("excitation_temperature_k", excitation_temperature_k);
  require_positive("fwhm_km_s", fwhm_km_s);
  if (!(upper_column_per_cm2 >= 0.0)) {
    throw DomainError("upper_column_per_cm2", upper_column_per_cm2, "not below 0");
  }
  // The thin area W = J(T_ex) * integral of tau dv.
  const double area_k_km_s = intensity_per_upper_column_k_km_s_cm2(line) * upper_column_per_cm2;
  const double j_k = planck_equivalent_temperature_k(line.frequency_hz, excitation_temperature_k);
  return std::sqrt(4.0 * std::numbers::ln2 / std::numbers::pi) * area_k_km_s / (j_k * fwhm_km_s);
}

}  // namespace trotline
