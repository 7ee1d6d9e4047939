#pragma once

#include <Eigen/Core>

#include <optional>
#include <string>
#include <vector>

#include <trotline/observation/baseline.hpp>
#include <trotline/observation/spectrum.hpp>

namespace trotline {

/// A span of V_LSR [km/s], radio convention v = c (1 - nu / nu0); low < high.
struct VelocityRange {
  double low_km_s = 0.0;
  double high_km_s = 0.0;
};

/// A line that may lie in a spectrum. This room knows no molecules: label and tag go through unchanged.
struct LineRequest {
  std::string label;
  double rest_frequency_hz = 0.0;
  std::string tag = {};  ///< e.g. the species; goes with the label in messages
  bool measure = true;   ///< false: a neighbour, marked where it lies in another line's window
  std::optional<VelocityRange> window = {};  ///< in place of the common one
};

/// Full width of what is searched for a window where nothing is stated and the band is wide enough [km/s].
inline constexpr double kSearchKmS = 40.0;

struct MeasurementOptions {
  double vlsr_km_s = 0.0;
  std::optional<double> window_km_s;  ///< full width of the windows about V_LSR; nothing: found from the data
  /// Full width of what is searched for a window; nothing: kSearchKmS, at most a third of the covered band
  std::optional<double> search_km_s;
  std::optional<double> fwhm_km_s;  ///< expected line width: start of fits
  BaselineOptions baseline;
  double calibration_error = 0.0;  ///< fraction of the intensity
  double limit_in_sigma =
      3.0;                   ///< a line below so many standard errors is not detected; its limit is that many
  bool keep_panels = false;  ///< keep the data about each line, to draw them
};

/// What should make a reader look twice; the first three make a number not to be trusted.
enum class LineFlag {
  saturation,     ///< equal highest values in a row: the receiver or converter was at its end
  edge,           ///< the window reaches beyond the band
  hole,           ///< channels of the window have no value; they were bridged by their neighbours
  wing,           ///< significant emission beside the window
  negative_bowl,  ///< significantly negative beside the window: resolved-out emission or emission in the
                  ///< reference
  neighbour,      ///< another line lies in the window
  one_sided,      ///< baseline on one side of the line only
  uneven_noise,   ///< the noise is not Gaussian: standard deviation and median absolute deviation differ
  narrow          ///< the line is less than two channels wide
};

/// "saturation", "negative bowl", ...
[[nodiscard]] std::string_view name_of(LineFlag flag);

enum class LineStatus {
  measured,
  not_covered,  ///< outside of the band
  not_measured  ///< in the band, but the data do not allow it: see `trouble`
};

/// A value and its standard error from noise and baseline, without calibration.
struct Measured {
  double value = 0.0;
  double sigma = 0.0;
};

struct GaussianLine {
  Measured area;           ///< same unit as the intensity
  Measured velocity_km_s;  ///< V_LSR
  Measured fwhm_km_s;
  Measured peak;  ///< [K] or [Jy/beam]
};

/// Where another line lies in the velocities of a panel.
struct PanelMark {
  double velocity_km_s = 0.0;
  std::string text;
};

/// The data about one line, for a drawing.
struct LinePanel {
  Eigen::ArrayXd velocity_km_s;
  Eigen::ArrayXd intensity;  ///< as observed
  Eigen::ArrayXd baseline;
  Eigen::ArrayXd model;       ///< of the fit, on the baseline; empty without a fit
  Eigen::ArrayXd prediction;  ///< of a model of the source, on the baseline; empty without one
  std::vector<PanelMark> marks;
};

/// One line measured in one spectrum, and how.
struct LineMeasurement {
  std::string label;
  std::string tag;
  double rest_frequency_hz = 0.0;
  LineStatus status = LineStatus::not_measured;
  std::string trouble;             ///< why there is no number
  double intensity = 0.0;          ///< W [K km/s], or [Jy/beam km/s]; may be negative
  double noise_sigma = 0.0;        ///< standard error of W from the noise in its window
  double baseline_sigma = 0.0;     ///< what the uncertainty of the baseline adds in quadrature
  double calibration_sigma = 0.0;  ///< |W| times the calibration error
  bool detected = false;
  double limit = 0.0;  ///< limit_in_sigma standard errors (noise and baseline)
  std::string method;  ///< "sum over the window" or "joint fit of Gaussians"
  VelocityRange window;
  std::size_t channels = 0;  ///< in the window
  double channel_km_s = 0.0;
  double rms = 0.0;  ///< noise of one channel [K] or [Jy/beam]
  double channels_per_independent_one = 1.0;
  int baseline_order = 0;
  std::size_t baseline_channels = 0;
  std::optional<GaussianLine> gaussian;
  std::string blend;                     ///< lines with the same mark are one measurement; empty: none
  std::vector<std::string> fitted_with;  ///< the other lines of a joint fit
  std::vector<LineFlag> flags;
  std::vector<std::string> neighbours;  ///< what lies in the window, with velocities
  std::optional<LinePanel> panel;

  /// Standard error of W without calibration.
  [[nodiscard]] double sigma() const;
  [[nodiscard]] bool has(LineFlag flag) const;
  /// Measured, and neither saturated nor cut by the band's edge nor with a hole.
  [[nodiscard]] bool is_trusted() const;
};

struct SpectrumMeasurement {
  std::string spectrum;  ///< its name, object and scale, as Spectrum has them
  std::optional<std::string> object;
  IntensityScale scale = IntensityScale::main_beam;
  std::optional<double> beam_fwhm_rad;
  std::optional<double> forward_efficiency;
  std::optional<double> main_beam_efficiency;
  std::vector<LineMeasurement> lines;  ///< one for each request with `measure`, in the order of the requests
  VelocityRange window;                ///< the common one
  double window_snr = 0.0;             ///< of the line that the window was found from; 0: it was not found
  NoiseCorrelation correlation;
  std::vector<std::string> warnings;
};

/// Measures lines in a spectrum.
///
/// W is the sum over the window of (T - baseline) dv, dv from the channel's width and the line's rest
/// frequency, radio convention. The baseline is a polynomial through the line-free channels on both sides.
/// Noise is measured there, its correlation from channel to channel over the whole spectrum; W is a linear
/// function of the data, so that its error from noise and baseline follows exactly from them. Lines whose
/// windows overlap are fitted together by Gaussians of one velocity and width where these can be told apart,
/// and otherwise become one blend with one W.
///
/// @throws InputError for requests or options that make no sense (frequency not positive, empty window, error
/// below 0)
[[nodiscard]] SpectrumMeasurement measure_lines(const Spectrum& spectrum,
                                                const std::vector<LineRequest>& requests,
                                                const MeasurementOptions& options);

/// Rows of an intensity table for the lines that were measured and can be trusted; the others are named in
/// the warnings. Lines that were not detected are rows like any other: W with its error, the limit in the
/// note.
[[nodiscard]] IntensityTable to_intensity_table(const Spectrum& spectrum, const SpectrumMeasurement& measured,
                                                const MeasurementOptions& options);

}  // namespace trotline
