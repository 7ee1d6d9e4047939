// Simulated spectra with known lines and noise, for tests of errors.
#pragma once

#include <Eigen/Core>

#include <cmath>
#include <random>
#include <vector>

#include <trotline/observation/spectrum.hpp>
#include <trotline/physics/constants.hpp>

namespace trotline::simulation {

inline constexpr double kRestHz = 100e9;
inline constexpr double kChannelKmS = 0.1;
inline constexpr double kLightKmS = constants::kLightMPerS * 1e-3;

struct Line {
  double velocity_km_s = 0.0;
  double area = 1.0;  ///< K km/s
  double fwhm_km_s = 1.0;
};

struct Setup {
  int channels = 1024;
  int baseline_order = 0;              ///< of the polynomial that is added
  double baseline_size = 3.0;          ///< its coefficients, in units of the rms
  std::vector<double> kernel = {1.0};  ///< white noise is convolved with this, then scaled to rms 1
  std::vector<Line> lines;
};

/// The axis of all simulations: linear, velocity 0 in the middle.
inline SpectralAxis axis(int channels) {
  const double step_hz = -kRestHz * kChannelKmS / kLightKmS;
  return SpectralAxis(kRestHz - step_hz * 0.5 * channels, step_hz, static_cast<std::size_t>(channels));
}

/// Mean of a Gaussian over a channel, so that the channels add up to the area whatever their width.
inline double channel_mean(const Line& line, double velocity_km_s) {
  const double scale = 2.0 * std::sqrt(std::log(2.0)) / line.fwhm_km_s;
  const double low = (velocity_km_s - 0.5 * kChannelKmS - line.velocity_km_s) * scale;
  const double high = (velocity_km_s + 0.5 * kChannelKmS - line.velocity_km_s) * scale;
  return 0.5 * line.area * (std::erf(high) - std::erf(low)) / kChannelKmS;
}

/// Gaussian noise of rms 1, smoothed.
inline Eigen::ArrayXd noise(int channels, const std::vector<double>& kernel, std::mt19937_64& random) {
  std::normal_distribution<double> normal;
  const auto width = static_cast<int>(kernel.size());
  std::vector<double> white(static_cast<std::size_t>(channels + width));
  for (double& value : white) value = normal(random);
  double power = 0.0;
  for (const double weight : kernel) power += weight * weight;
  Eigen::ArrayXd result = Eigen::ArrayXd::Zero(channels);
  for (int i = 0; i < channels; ++i) {
    for (int k = 0; k < width; ++k) {
      result(i) += kernel[static_cast<std::size_t>(k)] * white[static_cast<std::size_t>(i + k)];
    }
  }
  return result / std::sqrt(power);
}

inline Spectrum spectrum(const Setup& setup, std::mt19937_64& random) {
  Spectrum result;
  result.name = "simulated";
  result.axis = axis(setup.channels);
  result.intensity = noise(setup.channels, setup.kernel, random);
  std::normal_distribution<double> normal;
  std::vector<double> coefficients;
  for (int k = 0; k <= setup.baseline_order; ++k)
    coefficients.push_back(setup.baseline_size * normal(random));
  for (int i = 0; i < setup.channels; ++i) {
    const double velocity = kLightKmS * (1.0 - result.axis.frequency_hz(i) / kRestHz);
    const double x = 2.0 * i / (setup.channels - 1.0) - 1.0;
    for (int k = 0; k <= setup.baseline_order; ++k) {
      result.intensity(i) += coefficients[static_cast<std::size_t>(k)] * std::pow(x, k);
    }
    for (const Line& line : setup.lines) result.intensity(i) += channel_mean(line, velocity);
  }
  return result;
}

/// Smoothing kernels in use: none, Hanning, a box of four, a Gaussian of 3 channels FWHM.
inline std::vector<double> kernel_named(const std::string& name) {
  if (name == "hanning") return {0.25, 0.5, 0.25};
  if (name == "box of 4") return {1.0, 1.0, 1.0, 1.0};
  if (name == "gaussian") {
    std::vector<double> kernel;
    for (int i = -6; i <= 6; ++i) kernel.push_back(std::exp(-4.0 * std::log(2.0) * i * i / 9.0));
    return kernel;
  }
  return {1.0};
}

}  // namespace trotline::simulation
