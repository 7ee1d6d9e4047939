#pragma once

#include <Eigen/Core>

#include <memory>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include <trotline/observation/rest_frame.hpp>

namespace trotline {

/// The frequencies of the channels of a spectrum. Channels count from 0 at their centres; a channel's edges
/// lie at its number -0.5 and +0.5. Frequencies run steadily up or steadily down.
class SpectralAxis {
 public:
  SpectralAxis() = default;

  /// @param first_hz  of channel 0; @param step_hz  not 0; every frequency must be above 0
  /// @throws DomainError
  SpectralAxis(double first_hz, double step_hz, std::size_t channels);

  /// @param frequency_hz  of each channel, strictly rising or falling, above 0. @throws DomainError
  explicit SpectralAxis(Eigen::ArrayXd frequency_hz);

  [[nodiscard]] std::size_t size() const { return size_; }
  [[nodiscard]] bool is_linear() const { return table_ == nullptr; }
  [[nodiscard]] bool rises() const { return size_ < 2 || frequency_hz(1.0) > frequency_hz(0.0); }

  /// Frequency [Hz] at a channel, which may be a fraction; beyond the ends the last step goes on.
  [[nodiscard]] double frequency_hz(double channel) const;

  /// The channel, as a fraction, that has the frequency: the inverse of frequency_hz().
  [[nodiscard]] double channel_of(double frequency_hz) const;

  /// Distance of the edges of a channel [Hz], above 0.
  [[nodiscard]] double width_hz(std::size_t channel) const;

  /// Lowest and highest frequency at the outer edges [Hz].
  [[nodiscard]] double low_hz() const;
  [[nodiscard]] double high_hz() const;

  /// The axis with all frequencies multiplied. @param factor  above 0
  [[nodiscard]] SpectralAxis scaled(double factor) const;

 private:
  std::size_t size_ = 0;
  double first_hz_ = 0.0;
  double step_hz_ = 0.0;
  std::shared_ptr<const Eigen::ArrayXd> table_;  ///< shared: many spectra have the same axis
};

/// What a caller knows that a header does not say.
struct AxisOptions {
  std::optional<double> rest_frequency_hz;  ///< taken in place of RESTFRQ
  std::optional<RestFrame> frame;           ///< taken where the header names none
};

/// A spectral axis as a header has it, turned to frequencies in the LSRK.
struct HeaderAxis {
  SpectralAxis axis;
  int fits_axis = 0;                  ///< number n of CTYPEn, from 1
  std::string type;                   ///< CTYPEn after translation of older spellings, e.g. "VRAD"
  RestFrame frame = RestFrame::lsrk;  ///< in which the header has it
  double lsrk_ratio = 1.0;            ///< what its frequencies were multiplied with to reach the LSRK
  std::optional<double> rest_frequency_hz;
  std::vector<std::string> warnings;
};

/// Reads the spectral axis of a FITS header.
///
/// FREQ, AFRQ, ENER, WAVN, VRAD, WAVE, VOPT, ZOPT, AWAV, VELO and BETA, on linear, logarithmic or other grids
/// that Greisen et al. 2006, A&A 446, 747 (Paper III) defines, in any unit; also the older FREQ-LSR,
/// VELO-LSR, FELO-HEL
/// ... with VELREF. The frame comes from SPECSYS, else from VELREF, else from CTYPE. wcslib does the work.
///
/// @param cards  the header, 80 characters a card; END is not needed
/// @param where  stands for the file in messages
/// @throws InputError naming the keyword: no spectral axis or more than one, a step of 0, numbers that are
/// not
///         finite, an unknown unit, an axis that turns with another, velocities without rest frequency,
///         frequencies that are not positive, a frame from which the header does not lead to the LSRK
[[nodiscard]] HeaderAxis read_spectral_axis(std::string_view cards, const std::string& where,
                                            const AxisOptions& options = {});

/// The same without the last step: frequencies stay in the frame of the header, which may be unknown.
[[nodiscard]] HeaderAxis read_spectral_axis_as_written(std::string_view cards, const std::string& where,
                                                       const AxisOptions& options = {});

}  // namespace trotline
