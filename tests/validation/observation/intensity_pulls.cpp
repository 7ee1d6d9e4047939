// Do the errors of measured intensities mean what they say? Simulates spectra for many cases and writes a
// table of the pulls (measured minus true, over the stated error): docs/intensity_errors.md is made by
//
//     intensity_pulls [SPECTRA PER CASE] > docs/intensity_errors.md
#include <fmt/format.h>

#include <cstdlib>
#include <string>

#include <trotline/observation/line_measurement.hpp>

#include "observation/simulated_spectra.hpp"

namespace {

using namespace trotline;

struct Case {
  std::string noise;
  int order;       // of the true baseline
  bool automatic;  // the order of the fitted one is chosen
  int window;      // channels
  double snr;      // of the intensity, from the noise in the window
};

struct Pulls {
  double mean;
  double sigma;
  double covered;  // share within one standard error
  int spectra;
};

/// Standard error that the noise in the window alone gives, to scale the line.
double window_sigma(const Case& c) {
  const auto kernel = simulation::kernel_named(c.noise);
  double sum = 0.0;
  double power = 0.0;
  for (const double weight : kernel) {
    sum += weight;
    power += weight * weight;
  }
  const double independent = sum * sum / power;
  return simulation::kChannelKmS * std::sqrt(c.window * independent);
}

Pulls run(const Case& c, int spectra, std::mt19937_64& random) {
  simulation::Setup setup;
  setup.channels = 1024;
  setup.baseline_order = c.order;
  setup.kernel = simulation::kernel_named(c.noise);
  const double width = c.window * simulation::kChannelKmS;
  // A window of 3.3 widths holds all but 1e-4 of a Gaussian.
  const double centre =
      0.5 * simulation::kChannelKmS;  // between two channels: the windows have even numbers of them
  setup.lines = {{centre, c.snr * window_sigma(c), width / 3.3}};
  MeasurementOptions options;
  options.vlsr_km_s = centre;
  options.window_km_s = width - 0.1 * simulation::kChannelKmS;
  if (!c.automatic) options.baseline.order = c.order;
  double sum = 0.0;
  double squares = 0.0;
  int covered = 0;
  for (int i = 0; i < spectra; ++i) {
    const Spectrum spectrum = simulation::spectrum(setup, random);
    const auto measured = measure_lines(spectrum, {{"line", simulation::kRestHz}}, options);
    const LineMeasurement& line = measured.lines[0];
    const double pull = (line.intensity - setup.lines[0].area) / line.sigma();
    sum += pull;
    squares += pull * pull;
    covered += std::abs(pull) < 1.0 ? 1 : 0;
  }
  const double mean = sum / spectra;
  return {mean, std::sqrt(squares / spectra - mean * mean), static_cast<double>(covered) / spectra, spectra};
}

constexpr const char* kHead =
    R"(# Do the errors of measured intensities mean what they say?

Made by the program `tests/validation/observation/intensity_pulls`, {} simulated spectra for each case, seed 1. Each spectrum has 1024
channels of Gaussian noise, a polynomial baseline with random coefficients of 3 times the noise, and one Gaussian line in
the middle of its window. The pull is (measured - true) / stated error; an honest error gives a mean of 0, a standard
deviation of 1, and 68.3 % within one error. The scatter of these figures themselves is {:.3f} for the mean, {:.3f} for
the standard deviation and {:.1f} % for the share.

Noise: `white`; `hanning`, smoothed by 1/4, 1/2, 1/4; `box of 4`, a running mean of four channels; `gaussian`, smoothed by
a Gaussian of 3 channels FWHM. Order: of the true and the fitted baseline; `auto`: the program averages over orders 0 to 5.
S/N: the line's intensity over the error that the noise in its window gives.

| noise | order | window (channels) | S/N | mean | standard deviation | within one error |
|---|---|---|---|---|---|---|
)";

}  // namespace

int main(int argc, char** argv) {
  const int spectra = argc > 1 ? std::atoi(argv[1]) : 4000;
  std::mt19937_64 random(1);
  fmt::print(kHead, spectra, 1.0 / std::sqrt(spectra), 1.0 / std::sqrt(2.0 * spectra),
             100.0 * std::sqrt(0.683 * 0.317 / spectra));
  const double snrs[] = {3.0, 10.0, 50.0};
  int step = 0;
  for (const char* noise : {"white", "hanning", "box of 4", "gaussian"}) {
    for (int order = 0; order <= 5; ++order) {
      for (const int window : {4, 20, 60, 200}) {
        const Case c{noise, order, (step + order) % 3 == 2, window, snrs[step % 3]};
        ++step;
        const Pulls pulls = run(c, spectra, random);
        fmt::print("| {} | {}{} | {} | {:g} | {:+.3f} | {:.3f} | {:.1f} % |\n", noise, order,
                   c.automatic ? " (auto)" : "", window, c.snr, pulls.mean, pulls.sigma,
                   100.0 * pulls.covered);
      }
    }
  }
  return 0;
}
