#include <trotline/analysis/predicted_spectrum.hpp>
#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/physics/constants.hpp>
#include <trotline/physics/intensity_scale.hpp>
#include <trotline/physics/planck.hpp>

namespace trotline {
namespace {

constexpr double kLightKmPerS = constants::kLightMPerS * 1e-3;
constexpr double kReachInFwhm = 4.0;  ///< a Gaussian is 2e-19 of its peak there
constexpr double kFourLn2 = 2.772588722239781;

/// Sums over lines at each frequency.
struct Sums {
  Eigen::ArrayXd tau;
  Eigen::ArrayXd brightness;  ///< tau_i times f_i [J_i - J_bg,i]
};

double filling_of(const PredictedSource& source, double beam_fwhm_rad) {
  if (source.source_size_rad <= 0.0 || beam_fwhm_rad <= 0.0) return 1.0;
  return source.shape == SourceShape::disc ? disc_filling(source.source_size_rad, beam_fwhm_rad)
                                           : gaussian_filling(source.source_size_rad, beam_fwhm_rad);
}

void require_positive(const char* name, double value) {
  if (!(value > 0.0 && std::isfinite(value))) throw DomainError(name, value, "finite and above 0");
}

void add_line(const PredictedSource& source, const Transition& transition, double upper_per_q,
              const PredictedProfile& profile, double filling,
              const Eigen::Ref<const Eigen::ArrayXd>& frequency_hz, Sums& sums) {
  const Level& upper = source.species.levels[transition.upper];
  const LineConstants line{transition.frequency_hz, upper.energy_k, upper.degeneracy,
                           transition.einstein_a_per_s};
  const double upper_column =
      upper_per_q * upper.degeneracy * std::exp(-upper.energy_k / source.temperature_k);
  const double tau0 = central_optical_depth(line, upper_column, source.temperature_k, profile.fwhm_km_s);
  const double contrast = planck_equivalent_temperature_k(line.frequency_hz, source.temperature_k) -
                          planck_equivalent_temperature_k(line.frequency_hz, source.background_k);
  for (Eigen::Index i = 0; i < frequency_hz.size(); ++i) {
    const double velocity = kLightKmPerS * (1.0 - frequency_hz(i) / line.frequency_hz);
    const double t = (velocity - profile.velocity_km_s) / profile.fwhm_km_s;
    if (std::abs(t) > kReachInFwhm) continue;
    const double tau = tau0 * std::exp(-kFourLn2 * t * t);
    sums.tau(i) += tau;
    sums.brightness(i) += tau * filling * contrast;
  }
}

/// Lines of a source that reach into a band.
void add_source(const PredictedSource& source, const PredictedProfile& profile, double beam_fwhm_rad,
                const Eigen::Ref<const Eigen::ArrayXd>& frequency_hz, Sums& sums) {
  require_positive("temperature_k", source.temperature_k);
  require_positive("column_density_cm2", source.column_density_cm2);
  const double reach = 1.0 + kReachInFwhm * profile.fwhm_km_s / kLightKmPerS;
  const double doppler = 1.0 - profile.velocity_km_s / kLightKmPerS;
  const double low = frequency_hz.minCoeff() / doppler / reach;
  const double high = frequency_hz.maxCoeff() / doppler * reach;
  const double upper_per_q =
      source.column_density_cm2 / source.species.partition->at(source.temperature_k).q;
  for (const Transition& transition : source.species.transitions) {
    if (transition.frequency_hz < low || transition.frequency_hz > high) continue;
    add_line(source, transition, upper_per_q, profile, filling_of(source, beam_fwhm_rad), frequency_hz, sums);
  }
}

/// How many units of the spectrum one kelvin of main-beam temperature is.
double per_main_beam_k(const SpectrumMeasurement& spectrum, double frequency_hz) {
  if (spectrum.scale == IntensityScale::main_beam) return 1.0;
  if (spectrum.scale == IntensityScale::antenna) {
    if (!spectrum.forward_efficiency || !spectrum.main_beam_efficiency) {
      throw InputError(Place{spectrum.spectrum},
                       {"the prediction is T_mb, the spectrum T_A*, and the efficiencies are not known",
                        "forward and main-beam efficiency"});
    }
    return 1.0 / main_beam_per_antenna_temperature(*spectrum.forward_efficiency,
                                                   *spectrum.main_beam_efficiency);
  }
  if (!spectrum.beam_fwhm_rad) {
    throw InputError(Place{spectrum.spectrum},
                     {"the prediction is T_mb, the spectrum Jy/beam, and the beam is not known", "a beam"});
  }
  return 1.0 /
         kelvin_per_jansky_per_beam(frequency_hz, *spectrum.beam_fwhm_rad, *spectrum.beam_fwhm_rad);
}

void require_beam(const std::vector<PredictedSource>& sources, const SpectrumMeasurement& spectrum) {
  for (const PredictedSource& source : sources) {
    if (source.source_size_rad > 0.0 && !spectrum.beam_fwhm_rad) {
      throw InputError(Place{spectrum.spectrum},
                       {fmt::format("the model of {} has a source size, and the beam is not known",
                                    printable(source.species.name)),
                        "the beam of the spectrum"});
    }
  }
}

}  // namespace

Eigen::ArrayXd predicted_brightness_k(const std::vector<PredictedSource>& sources,
                                      const PredictedProfile& profile, double beam_fwhm_rad,
                                      const Eigen::Ref<const Eigen::ArrayXd>& frequency_hz) {
  require_positive("fwhm_km_s", profile.fwhm_km_s);
  if (frequency_hz.size() == 0) return {};
  Sums sums{Eigen::ArrayXd::Zero(frequency_hz.size()), Eigen::ArrayXd::Zero(frequency_hz.size())};
  for (const PredictedSource& source : sources)
    add_source(source, profile, beam_fwhm_rad, frequency_hz, sums);
  for (Eigen::Index i = 0; i < sums.tau.size(); ++i) {
    if (sums.tau(i) > 0.0) sums.brightness(i) *= -std::expm1(-sums.tau(i)) / sums.tau(i);
  }
  return sums.brightness;
}

PredictedProfile profile_of(const SpeciesMeasurement& measurement, const PredictedProfile& fallback) {
  double weights = 0.0;
  PredictedProfile mean;
  for (const SpectrumMeasurement& spectrum : measurement.spectra) {
    for (const LineMeasurement& line : spectrum.lines) {
      if (!line.gaussian || !(line.gaussian->fwhm_km_s.sigma > 0.0)) continue;
      const double weight = 1.0 / (line.gaussian->fwhm_km_s.sigma * line.gaussian->fwhm_km_s.sigma);
      weights += weight;
      mean.velocity_km_s += weight * line.gaussian->velocity_km_s.value;
      mean.fwhm_km_s += weight * line.gaussian->fwhm_km_s.value;
    }
  }
  if (weights == 0.0) return fallback;
  return {mean.velocity_km_s / weights, mean.fwhm_km_s / weights};
}

void add_predictions(const std::vector<PredictedSource>& sources, const PredictedProfile& profile,
                     SpeciesMeasurement& measurement) {
  for (SpectrumMeasurement& spectrum : measurement.spectra) {
    require_beam(sources, spectrum);
    for (LineMeasurement& line : spectrum.lines) {
      if (!line.panel) continue;
      const Eigen::ArrayXd frequency_hz =
          line.rest_frequency_hz * (1.0 - line.panel->velocity_km_s / kLightKmPerS);
      line.panel->prediction =
          line.panel->baseline + per_main_beam_k(spectrum, line.rest_frequency_hz) *
                                     predicted_brightness_k(sources, profile,
                                                            spectrum.beam_fwhm_rad.value_or(0.0), frequency_hz);
    }
  }
}

}  // namespace trotline
