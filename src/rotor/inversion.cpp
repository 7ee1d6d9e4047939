#include <fmt/format.h>

#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/rotor/inversion.hpp>

#include "symmetric_levels.hpp"

namespace trotline {
namespace {

void require_valid(const InversionExpansion& e) {
  if (!(std::isfinite(e.nu0_hz) && e.nu0_hz > 0.0))
    throw DomainError("nu0 [Hz]", e.nu0_hz, "finite and above 0");
  for (const double c : {e.c_j, e.c_k, e.c_jj, e.c_jk, e.c_kk}) {
    if (!std::isfinite(c)) throw DomainError("coefficient of the inversion", c, "finite");
  }
  if (e.holds_to_j < 0) throw DomainError("holds_to_j", e.holds_to_j, "not below 0");
}

void require_valid(const MeasuredInversion& m) {
  if (m.k < 0 || m.k > m.j) throw DomainError("K of a measured inversion", m.k, "0 to J");
  if (!(std::isfinite(m.frequency_hz) && m.frequency_hz > 0.0)) {
    throw DomainError("measured inversion [Hz]", m.frequency_hz, "finite and above 0");
  }
}

bool is_measured(const InvertingConstants& constants, int j, int k) {
  for (const MeasuredInversion& m : constants.measured) {
    if (m.j == j && m.k == k) return true;
  }
  return false;
}

/// Fills a model K by K.
class PairMaker {
 public:
  PairMaker(const InvertingConstants& constants, double dipole_c_m, const RotorOptions& options,
            RotorModel& model)
      : constants_(constants), mu2_(dipole_c_m * dipole_c_m), options_(options), model_(model) {}

  /// Appends s, then a; a pair begins at an even index.
  void add(int j, int k, double mean_hz) {
    const double half_hz = 0.5 * inversion_frequency_hz(constants_, j, k);
    const auto first = static_cast<std::uint32_t>(model_.levels.size());
    for (const int inversion : {+1, -1}) {
      const QuantumNumbers quanta{.j = static_cast<std::int16_t>(j),
                                  .k = static_cast<std::int16_t>(k),
                                  .inversion = static_cast<std::int8_t>(inversion)};
      model_.levels.push_back({quanta, mean_hz - inversion * half_hz, 2.0 * j + 1.0});
    }
    add_lines(j, k, first);
  }

 private:
  void add_lines(int j, int k, std::uint32_t s) {
    const std::uint32_t a = s + 1;
    const double kd = k;
    if (k > 0 && (j <= constants_.inversion.holds_to_j || is_measured(constants_, j, k))) {
      add_line(a, s, (2.0 * j + 1.0) * kd * kd / (j * (j + 1.0)));
    }
    if (j > k && j <= constants_.inversion.holds_to_j) {
      add_line(s, a - 2, symmetric_line_strength(j, k));
      add_line(a, s - 2, symmetric_line_strength(j, k));
    }
  }

  void add_line(std::uint32_t upper, std::uint32_t lower, double s) {
    if (mu2_ == 0.0 || s < options_.least_line_strength) return;
    model_.transitions.push_back({.upper = upper, .lower = lower, .line_strength_mu2_c2m2 = s * mu2_});
  }

  const InvertingConstants& constants_;
  double mu2_;
  const RotorOptions& options_;
  RotorModel& model_;
};

}  // namespace

double inversion_frequency_hz(const InvertingConstants& constants, int j, int k) {
  for (const MeasuredInversion& m : constants.measured) {
    if (m.j == j && m.k == k) return m.frequency_hz;
  }
  const InversionExpansion& e = constants.inversion;
  const double x = static_cast<double>(j) * (j + 1.0);
  const double y = static_cast<double>(k) * k;
  return e.nu0_hz * std::exp(x * (e.c_j + e.c_jj * x + e.c_jk * y) + y * (e.c_k + e.c_kk * y));
}

RotorModel inverting_model(const InvertingConstants& constants, double dipole_c_m, const SpinRule& spin,
                           const RotorOptions& options) {
  require_valid(constants.mean);
  require_valid(constants.inversion);
  for (const MeasuredInversion& m : constants.measured) require_valid(m);
  require_valid(options);
  if (!std::isfinite(dipole_c_m)) throw DomainError("dipole [C m]", dipole_c_m, "finite");
  const SymmetricLevels means(constants.mean, options.highest_j);
  RotorModel model;
  PairMaker maker(constants, dipole_c_m, options, model);
  for (int k = 0; k <= options.highest_j; ++k) {
    for (int j = k; j <= options.highest_j && means.contains(j, k); ++j)
      maker.add(j, k, means.energy_hz(j, k));
  }
  model.warnings = means.warnings();
  if (options.highest_j > constants.inversion.holds_to_j) {
    model.warnings.push_back(
        fmt::format("the inversion splitting is extrapolated above J = {}; lines from there are left out",
                    constants.inversion.holds_to_j));
  }
  // The lower level of a missing pair lies half a splitting, which is of the size of nu0, below its mean.
  model.complete_to_hz = means.complete_to_hz() - constants.inversion.nu0_hz;
  return finished_model(std::move(model), spin, options);
}

}  // namespace trotline
