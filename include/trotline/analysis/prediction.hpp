#pragma once

#include <cstddef>
#include <functional>
#include <limits>
#include <optional>
#include <string>
#include <utility>
#include <vector>

#include <trotline/analysis/result.hpp>
#include <trotline/excitation/thin_line.hpp>
#include <trotline/inference/line_choice.hpp>
#include <trotline/physics/constants.hpp>
#include <trotline/physics/quantity.hpp>
#include <trotline/species/species.hpp>

namespace trotline {

/// A range of frequencies that can be observed.
struct ObservingBand {
  QuantityRange frequency_hz{0.0, 0.0};
  std::optional<double> system_temperature_k;  ///< nothing: that of all bands
};

/// What is to be predicted: a source, and how it would be observed.
struct PredictionOptions {
  std::optional<double> temperature_k;           ///< needed
  std::optional<double> column_density_per_cm2;  ///< needed
  std::optional<double> fwhm_km_s;               ///< of the lines; needed
  double background_k = constants::kCosmicBackgroundK;
  std::optional<double> source_size_rad;  ///< FWHM or diameter; without one the source fills every beam
  SourceShape source_shape = SourceShape::gaussian;
  std::optional<double> beam_fwhm_rad;  ///< one beam for all lines ...
  std::optional<double> dish_m;         ///< ... or that of a dish: FWHM = kBeamFactor lambda / D
  std::vector<ObservingBand> bands;     ///< empty: wherever the species has lines

  std::optional<double> rms_k;                 ///< noise of a channel ...
  std::optional<double> time_s;                ///< ... or time on source for every line
  std::optional<double> system_temperature_k;  ///< for bands without one of their own
  std::optional<double> channel_km_s;          ///< width of a channel ...
  std::optional<double> channel_hz;            ///< ... or so
  double noise_factor = 1.4142135623730951;  ///< f in rms = f T_sys / sqrt(channel * time): 1 and no reference,
                                             ///< sqrt(2) for as long on a reference, 1 for two polarisations of it
  double calibration_error = 0.0;            ///< fraction
  bool calibration_shared = false;           ///< one factor for all lines; else each has its own

  double least_snr = 1.0;  ///< lines below are neither shown nor chosen, where noise is known
  std::size_t choose = 0;  ///< how many lines are to be chosen; 0: none
  Aim aim = Aim::temperature;
};

/// FWHM of the beam of a dish in units of lambda/D: what a taper of about 12 dB gives; a stated convention.
inline constexpr double kBeamFactor = 1.2;

/// A line is summed over this many of its FWHM (98 % of a Gaussian), which sets the noise of its intensity.
inline constexpr double kWindowWidths = 2.0;

/// Lines of the species less than this many FWHM apart are one measurement.
inline constexpr double kBlendWidths = 1.0;

/// One option of a prediction: the same word serves the command line and the provenance.
struct PredictionOption {
  std::string key;
  std::function<void(PredictionOptions&, const std::string&)> set;  ///< throws InputError
  std::function<std::string(const PredictionOptions&)> show;
};

/// All options, in the order in which they are documented.
[[nodiscard]] const std::vector<PredictionOption>& prediction_option_table();

/// One measurement: a line, or lines that cannot be told apart.
struct PredictedLine {
  std::string transition;  ///< of the strongest member
  std::vector<std::string> blended_with;
  double frequency_mhz = kNotKnown;
  double upper_energy_k = kNotKnown;
  double upper_degeneracy = kNotKnown;
  double einstein_a_s1 = kNotKnown;
  double beam_fwhm_arcsec = kNotKnown;  ///< NaN: no beam is given
  double filling = 1.0;
  double optical_depth = kNotKnown;     ///< at the centre of the strongest member
  double peak_k = kNotKnown;            ///< main-beam temperature at the centre of the strongest member alone
  double intensity_k_km_s = kNotKnown;  ///< of all members
  double intensity_error_k_km_s = kNotKnown;  ///< from noise; calibration not included
  double snr = kNotKnown;
  double rms_k = kNotKnown;
  double time_s = kNotKnown;  ///< on source
  double by_ln_column = kNotKnown;       ///< dW/d ln N [K km/s]
  double by_ln_temperature = kNotKnown;  ///< dW/d ln T [K km/s]
  bool chosen = false;
  bool among_brightest = false;  ///< of the same number of lines with the largest W
};

/// Standard errors of T [K] and of log10 N, infinite where the lines set none.
struct ExpectedAnswer {
  double temperature_error_k = kNotKnown;
  double log10_column_error = kNotKnown;
};

/// What so many lines give.
struct ChoiceSize {
  std::size_t count = 0;
  ExpectedAnswer best;       ///< from the lines that serve the aim best
  ExpectedAnswer brightest;  ///< from as many of the largest W
  bool is_exhaustive = true;
};

/// The lines of a species toward a source in LTE, as they would be observed.
struct Prediction {
  std::string species;
  std::string formula;
  double temperature_k = kNotKnown;
  double column_density_per_cm2 = kNotKnown;
  double partition_function = kNotKnown;
  Aim aim = Aim::temperature;
  bool has_noise = false;
  std::vector<PredictedLine> lines;  ///< by rising frequency
  std::size_t lines_below = 0;       ///< measurements in the bands that are below least_snr, or show nothing
  ExpectedAnswer all_lines;
  std::size_t choose = 0;
  std::vector<ChoiceSize> sizes;  ///< from 2 lines on; empty without noise
  std::vector<std::string> warnings;
  std::vector<std::pair<std::string, std::string>> options;
  std::string species_file;
  std::vector<std::string> data_sources;
};

/// Predicts intensities with the forward model that fits use (one layer in LTE, Gaussian lines, opacity by the
/// curve of growth), their noise by the radiometer equation
///
///     rms = f T_sys / sqrt(channel * time),    sigma(W) = rms sqrt(channel * kWindowWidths * FWHM)
///
/// and chooses lines by the Fisher information of ln N and ln T, everything else taken as known.
/// Reference: [WilsonRohlfsHuettemeister2013] chapter 4 for the radiometer equation.
/// @throws InputError  T, N or width missing; options that exclude or need one another; T outside the range of
///         Q; no line in the bands; more lines to choose than there are
[[nodiscard]] Prediction predict(const Species& species, const PredictionOptions& options);

}  // namespace trotline
