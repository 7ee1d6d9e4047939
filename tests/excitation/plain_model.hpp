// The forward model once more, written straight from its formulas for any kind of number, by a brute
// trapezoidal sum over velocity: the outside against which the fast one is held. With complex numbers it
// gives derivatives to full precision (complex-step differentiation, Squire & Trapp 1998, SIAM Rev. 40, 110).
#pragma once

#include <cmath>
#include <complex>
#include <numbers>
#include <vector>

#include <trotline/excitation/forward_model.hpp>
#include <trotline/physics/constants.hpp>

namespace trotline::plain {

/// Q of a rigid linear rotor and, where `half`, only its even or odd levels (isomers 0 and 1).
inline constexpr double kRotorK = 2.766;

template <class Real>
Real ln_q(const Real& t, int isomers, int isomer) {
  Real q = 0;
  for (int j = 0; j < 150; ++j) {
    if (isomers == 1 || j % 2 == isomer)
      q += static_cast<double>(2 * j + 1) * exp(-kRotorK * j * (j + 1) / t);
  }
  return log(q);
}

class RotorPartition final : public PartitionFunction {
 public:
  RotorPartition(int isomers, int isomer) : isomers_(isomers), isomer_(isomer) {}
  [[nodiscard]] PartitionValue at(double t) const override {
    using std::exp;
    using std::log;
    const std::complex<double> shifted(t, 1e-30);
    const std::complex<double> value = ln_q(shifted, isomers_, isomer_);
    return {std::exp(value.real()), value.real(), value.imag() / 1e-30, 0.0};
  }
  [[nodiscard]] double lowest_k() const override { return 1.0; }
  [[nodiscard]] double highest_k() const override { return 3000.0; }
  [[nodiscard]] std::string description() const override { return "rigid rotor"; }

 private:
  int isomers_;
  int isomer_;
};

template <class Real>
struct PlainLine {
  Real depth;   // tau0
  Real source;  // f (J - J_bg - T_cont)
  double offset;
  double width;  // half width at 1/e
};

template <class Real>
Real planck(double photon_k, const Real& t) {
  return photon_k / (exp(photon_k / t) - 1.0);
}

template <class Real>
Real filling_of(const ModelLine& line, SourceShape shape, const Real& ln_size) {
  if (line.beam_fwhm_arcsec == 0.0 || std::isinf(std::real(ln_size))) return Real(line.filling);
  const Real ratio = exp(2.0 * ln_size) / (line.beam_fwhm_arcsec * line.beam_fwhm_arcsec);
  if (shape == SourceShape::gaussian) return line.filling * ratio / (ratio + 1.0);
  return line.filling * (1.0 - exp(-std::numbers::ln2 * ratio));
}

template <class Real>
Real velocity_sum(const std::vector<PlainLine<Real>>& lines) {
  double low = 1e300;
  double high = -1e300;
  double width = 1e300;
  for (const auto& line : lines) {
    low = std::min(low, line.offset - 9.0 * line.width);
    high = std::max(high, line.offset + 9.0 * line.width);
    width = std::min(width, line.width);
  }
  const int points = static_cast<int>((high - low) / width * 24.0);
  const double step = (high - low) / points;
  Real sum = 0;
  for (int i = 0; i <= points; ++i) {
    Real tau = 0;
    Real source = 0;
    for (const auto& line : lines) {
      const double x = (low + i * step - line.offset) / line.width;
      tau += line.depth * std::exp(-x * x);
      source += line.depth * std::exp(-x * x) * line.source;
    }
    const bool thin = std::abs(tau) < 1e-3;
    sum += thin ? source * (1.0 - tau / 2.0 + tau * tau / 6.0 - tau * tau * tau / 24.0 +
                            tau * tau * tau * tau / 120.0)
                : source * (1.0 - exp(-tau)) / tau;
  }
  return sum * step;
}

/// W of every datum with the exact opacity. State as StateLayout has it.
template <class Real>
std::vector<Real> intensities(const ForwardModel& model, const std::vector<Real>& state) {
  const StateLayout layout = model.layout();
  std::vector<Real> result(static_cast<std::size_t>(model.data()), Real(0));
  const auto at = [&](int i) { return state[static_cast<std::size_t>(i)]; };
  for (int component = 0; component < layout.components; ++component) {
    const Real t = exp(at(layout.ln_temperature(component)));
    std::vector<std::vector<PlainLine<Real>>> data(result.size());
    for (const ModelLine& line : model.lines()) {
      const LineConstants& c = line.constants;
      const double photon_k = constants::kKelvinPerHz * c.frequency_hz;
      const Real column =
          c.upper_degeneracy * exp(at(layout.ln_column(component, line.isomer)) -
                                   ln_q(t, layout.isomers, line.isomer) - c.upper_energy_k / t);
      // integral of tau dv [km/s] = c^3 A N_u / (8 pi nu^3) (e^(T0/T) - 1), with N_u per m^2
      const double c3 = std::pow(constants::kLightMPerS, 3);
      const Real area = c3 * c.einstein_a_per_s * column * 1e4 /
                        (8.0 * std::numbers::pi * std::pow(c.frequency_hz, 3)) * (exp(photon_k / t) - 1.0) /
                        1e3;
      const Real background =
          std::abs(at(layout.background())) > 0.0 ? planck(photon_k, at(layout.background())) : Real(0);
      const double half_width = line.fwhm_km_s / (2.0 * std::sqrt(std::numbers::ln2));
      data[static_cast<std::size_t>(line.datum)].push_back(
          {area / (half_width * std::sqrt(std::numbers::pi)),
           filling_of(line, model.options().source_shape, at(layout.ln_size(component))) *
               (planck(photon_k, t) - background - line.continuum_k),
           line.offset_km_s, half_width});
    }
    for (std::size_t d = 0; d < data.size(); ++d) result[d] += velocity_sum(data[d]);
  }
  return result;
}

}  // namespace trotline::plain
