#pragma once

#include <Eigen/Core>

#include <memory>
#include <optional>
#include <string>
#include <vector>

#include <trotline/observation/intensity_table.hpp>
#include <trotline/observation/spectral_axis.hpp>

namespace trotline {

/// One spectrum toward one position.
struct Spectrum {
  std::string name;                   ///< file, and extension and row where there are several
  std::optional<std::string> object;  ///< the source that the file names
  SpectralAxis axis;                  ///< frequencies in the LSRK
  Eigen::ArrayXd intensity;  ///< [K], or [Jy/beam] where scale is flux_per_beam; NaN: no value (a hole)
  IntensityScale scale = IntensityScale::main_beam;
  std::optional<double> rest_frequency_hz;  ///< that the file names; not needed to find lines
  std::optional<double> resolution_hz;      ///< FWHM of the spectrometer's response
  std::optional<double> beam_fwhm_rad;      ///< geometric mean for an elliptical beam
  std::optional<double> forward_efficiency;
  std::optional<double> main_beam_efficiency;
  std::optional<double> noise_sigma;        ///< of one channel, where it is stated; otherwise it is measured
  std::optional<double> calibration_error;  ///< fraction, where this spectrum has one of its own
  std::string axis_type;              ///< in which the file has the axis, e.g. "VRAD"
  RestFrame frame = RestFrame::lsrk;  ///< in which the file has it
  std::vector<std::string> warnings;
};

/// What a caller knows that a file does not say.
struct SpectrumOptions {
  AxisOptions axis;
  std::optional<std::string> intensity_unit;  ///< where BUNIT is missing, e.g. "K"
  std::optional<IntensityScale>
      scale;  ///< for intensities in K; main beam where neither this nor the file says
};

/// A file of spectra, which are read one at a time.
///
/// Understood are FITS images of one spectrum (one-dimensional, or with further axes of length 1), FITS
/// binary tables with one spectrum a row (the SDFITS convention: a vector column DATA, SPECTRUM or SERIES;
/// every keyword may be a column), several of these in one file, tile-compressed images (RICE_1, GZIP_1,
/// GZIP_2), any of them packed with gzip, and text in two or three columns; docs/spectra.md describes them.
/// BLANK, TNULL, not-a-number and masked channels (an extension MASK or DQ, a column FLAGS or MASK, not 0)
/// are holes.
class SpectrumFile {
 public:
  /// @param path  a file, or "-" for standard input
  /// @throws InputError when the file cannot be read, is damaged, or holds no spectrum, naming file and
  /// keyword
  explicit SpectrumFile(const std::string& path, SpectrumOptions options = {});

  /// The same from bytes in memory. @param name  stands for the file in messages
  SpectrumFile(std::string bytes, std::string name, SpectrumOptions options);

  ~SpectrumFile();
  SpectrumFile(SpectrumFile&&) noexcept;
  SpectrumFile& operator=(SpectrumFile&&) noexcept;

  [[nodiscard]] std::size_t size() const;

  /// What was passed over in the file, e.g. images without a spectral axis.
  [[nodiscard]] const std::vector<std::string>& warnings() const;

  /// Spectrum `index`, from 0. May be called from several threads.
  /// @throws InputError when its header does not lead to frequencies in the LSRK and intensities in a known
  /// unit
  [[nodiscard]] Spectrum read(std::size_t index) const;

  class Reader;  ///< one for each kind of file

 private:
  std::unique_ptr<Reader> reader_;
};

/// All spectra of a file at once.
[[nodiscard]] std::vector<Spectrum> read_spectra(const std::string& path,
                                                 const SpectrumOptions& options = {});

}  // namespace trotline
