#pragma once

namespace trotline {

/// What one line needs to be predicted: its own constants, in the convention of its species.
struct LineConstants {
  double frequency_hz = 0.0;      ///< rest frequency [Hz]
  double upper_energy_k = 0.0;    ///< E_u/k [K]
  double upper_degeneracy = 0.0;  ///< g_u, spin weight included
  double einstein_a_per_s = 0.0;  ///< A_ul [1/s]
};

/// Integrated brightness temperature per column density in the upper level, of a thin line without
/// background that fills the beam [K km/s per cm^-2]:
///
///     W / N_u = h c^3 A_ul / (8 pi k nu^2)
///
/// exact for any h nu / kT on the Rayleigh-Jeans brightness scale.
/// @throws DomainError unless frequency and A are finite and above 0
/// Reference: [GoldsmithLanger1999] (keys in docs/references.bib).
[[nodiscard]] double intensity_per_upper_column_k_km_s_cm2(const LineConstants& line);

/// What a background leaves of a thin line: 1 - J(nu, T_bg) / J(nu, T_ex).
///
/// Below 0 the line stands in absorption (T_ex < T_bg); it then has no place in a diagram.
/// @param excitation_temperature_k  T_ex [K], > 0
/// @param background_k              T_bg [K], >= 0
[[nodiscard]] double background_contrast(double frequency_hz, double excitation_temperature_k,
                                         double background_k);

/// d background_contrast / d(1/T_ex) [K]; always <= 0.
[[nodiscard]] double background_contrast_slope_k(double frequency_hz, double excitation_temperature_k,
                                                 double background_k);

/// The shape of a source: what its size means, and how it fills a beam.
enum class SourceShape {
  gaussian,  ///< size is the FWHM
  disc       ///< size is the diameter of a uniform disc
};

/// Beam filling factor of a Gaussian source in a Gaussian beam: theta_s^2 / (theta_s^2 + theta_b^2).
///
/// Any one unit for both angles. An infinite source gives 1.
/// @throws DomainError unless both are above 0 and the beam finite
[[nodiscard]] double gaussian_filling(double source_fwhm, double beam_fwhm);

/// Beam filling factor of a uniform disc on the axis of a Gaussian beam: 1 - exp(-ln2 theta_s^2/theta_b^2).
[[nodiscard]] double disc_filling(double source_diameter, double beam_fwhm);

/// Optical depth at the centre of a Gaussian line.
///
///     tau0 = sqrt(4 ln2 / pi) / dv * c^3 A_ul N_u / (8 pi nu^3) * (exp(h nu / k T_ex) - 1)
///
/// @param upper_column_per_cm2  N_u [cm^-2], >= 0
/// @param fwhm_km_s             FWHM dv of the line [km/s], > 0
[[nodiscard]] double central_optical_depth(const LineConstants& line, double upper_column_per_cm2,
                                           double excitation_temperature_k, double fwhm_km_s);

}  // namespace trotline
