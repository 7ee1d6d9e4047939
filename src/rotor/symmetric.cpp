#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/rotor/linear.hpp>
#include <trotline/rotor/symmetric.hpp>

#include "symmetric_levels.hpp"

namespace trotline {
namespace {

void require_positive(const char* name, double value) {
  if (!(std::isfinite(value) && value > 0.0)) throw DomainError(name, value, "finite and above 0");
}

QuantumNumbers quanta_of(int j, int k) {
  return {.j = static_cast<std::int16_t>(j), .k = static_cast<std::int16_t>(k)};
}

}  // namespace

void require_valid(const SymmetricConstants& constants) {
  require_positive("axial constant [Hz]", constants.axial_hz);
  require_positive("B [Hz]", constants.b_hz);
  if (constants.axial_hz == constants.b_hz) {
    throw DomainError("axial constant [Hz]", constants.axial_hz,
                      "not B: equal constants make a spherical rotor");
  }
  // I_c = I_a + I_b for a flat molecule and less for any other. Vibration moves C of a flat one a little.
  constexpr double kFlatWithVibration = 0.49;
  if (constants.axial_hz < kFlatWithVibration * constants.b_hz) {
    throw DomainError("C [Hz]", constants.axial_hz, "at least B/2, which a flat molecule has");
  }
  require_valid(constants.distortion, {constants.b_hz, std::max(constants.axial_hz, constants.b_hz)});
}

double symmetric_energy_hz(const SymmetricConstants& constants, int j, int k) {
  const double x = static_cast<double>(j) * (j + 1.0);
  const double y = static_cast<double>(k) * k;
  return constants.b_hz * x + (constants.axial_hz - constants.b_hz) * y + constants.distortion.at_hz(x, y);
}

double symmetric_line_strength(int j, int k) {
  const double jd = j;
  const double kd = k;
  return (jd - kd) * (jd + kd) / jd;
}

RotorModel symmetric_model(const SymmetricConstants& constants, double dipole_c_m, const SpinRule& spin,
                           const RotorOptions& options) {
  require_valid(constants);
  require_valid(options);
  if (!std::isfinite(dipole_c_m)) throw DomainError("dipole [C m]", dipole_c_m, "finite");
  const SymmetricLevels levels(constants, options.highest_j);
  RotorModel model;
  model.warnings = levels.warnings();
  model.complete_to_hz = levels.complete_to_hz();
  for (int k = 0; k <= options.highest_j; ++k) {
    const double signs = k == 0 ? 1.0 : 2.0;
    for (int j = k; j <= options.highest_j && levels.contains(j, k); ++j) {
      const auto here = static_cast<std::uint32_t>(model.levels.size());
      model.levels.push_back({quanta_of(j, k), levels.energy_hz(j, k), signs * (2.0 * j + 1.0)});
      const double s = j > k ? signs * symmetric_line_strength(j, k) : 0.0;
      if (s == 0.0 || dipole_c_m == 0.0 || s < options.least_line_strength) continue;
      model.transitions.push_back(
          {.upper = here, .lower = here - 1, .line_strength_mu2_c2m2 = s * dipole_c_m * dipole_c_m});
    }
  }
  return finished_model(std::move(model), spin, options);
}

RotorModel spherical_model(const SphericalConstants& constants, const RotorOptions& options) {
  require_valid(options);
  require_positive("B [Hz]", constants.b_hz);
  if (!(std::abs(constants.d_hz) < constants.b_hz)) throw DomainError("D [Hz]", constants.d_hz, "below B");
  const LinearConstants ladder{.b_hz = constants.b_hz, .d_hz = constants.d_hz, .h_hz = constants.h_hz};
  const int highest_j = linear_highest_j(ladder, options.highest_j);
  RotorModel model;
  for (int j = 0; j <= highest_j; ++j) {
    model.levels.push_back(
        {{.j = static_cast<std::int16_t>(j)}, linear_energy_hz(ladder, j), std::pow(2.0 * j + 1.0, 2)});
  }
  model.complete_to_hz = model.levels.back().energy_hz;
  model.warnings.emplace_back("a spherical rotor: no lines, and all spin weights taken as equal");
  if (highest_j < options.highest_j) {
    model.warnings.push_back("the distortion series stops rising: no level above J = " +
                             std::to_string(highest_j));
  }
  return finished_model(std::move(model), *make_spin_rule({}), options);
}

}  // namespace trotline
