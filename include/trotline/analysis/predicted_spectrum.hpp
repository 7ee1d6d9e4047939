#pragma once

#include <string>
#include <vector>

#include <trotline/analysis/measurement.hpp>
#include <trotline/excitation/thin_line.hpp>
#include <trotline/species/species.hpp>

namespace trotline {

/// One species in LTE, as a fit found it.
struct PredictedSource {
  Species species;
  double temperature_k = 0.0;
  double column_density_cm2 = 0.0;
  double source_size_rad = 0.0;  ///< 0: it fills every beam
  SourceShape shape = SourceShape::gaussian;
  double background_k = 0.0;
};

/// Velocity and width that all lines share.
struct PredictedProfile {
  double velocity_km_s = 0.0;
  double fwhm_km_s = 0.0;
};

/// Brightness temperature above background of several species in LTE [K], main-beam scale, at frequencies in
/// the LSRK:
///
///     T = (1 - exp(-tau)) / tau * sum over lines of tau_i f_i [J(nu, T_i) - J(nu, T_bg,i)],  tau = sum of tau_i
///
/// tau_i a Gaussian in velocity; lines of one or several species that overlap shade one another as if mixed.
/// @param beam_fwhm_rad  0: every source fills the beam
/// @throws DomainError  width, temperature or column density not above 0, or a temperature without Q(T)
[[nodiscard]] Eigen::ArrayXd predicted_brightness_k(const std::vector<PredictedSource>& sources,
                                                    const PredictedProfile& profile, double beam_fwhm_rad,
                                                    const Eigen::Ref<const Eigen::ArrayXd>& frequency_hz);

/// Velocity and width of the measured lines: the means of their Gaussians, each weighing by its error.
/// @param fallback  where no line has a Gaussian; its width 0: not known
[[nodiscard]] PredictedProfile profile_of(const SpeciesMeasurement& measurement,
                                          const PredictedProfile& fallback);

/// Puts the prediction into every panel, on its baseline and in the spectrum's own scale.
/// @throws InputError  where a spectrum in another scale than T_mb lacks the efficiencies or the beam that the
///         conversion takes, or a source has a size and a spectrum no beam
void add_predictions(const std::vector<PredictedSource>& sources, const PredictedProfile& profile,
                     SpeciesMeasurement& measurement);

}  // namespace trotline
