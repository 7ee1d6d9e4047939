#include <trotline/rotor/linear.hpp>

#include <fmt/format.h>

#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/rotor/line_strength.hpp>

namespace trotline {
namespace {

void check(const LinearConstants& constants) {
  if (!(std::isfinite(constants.b_hz) && constants.b_hz > 0.0)) {
    throw DomainError("B [Hz]", constants.b_hz, "finite and above 0");
  }
  const auto finite = [](const char* name, double value) {
    if (!std::isfinite(value)) throw DomainError(name, value, "finite");
  };
  finite("D [Hz]", constants.d_hz);
  finite("H [Hz]", constants.h_hz);
  finite("L [Hz]", constants.l_hz);
}

}  // namespace

double LinearDipole::at(int upper_j) const {
  const double m2 = static_cast<double>(upper_j) * upper_j;
  return mu0_c_m + m2 * (mu2_c_m + m2 * mu4_c_m);
}

double linear_energy_hz(const LinearConstants& constants, int j) {
  const double x = static_cast<double>(j) * (j + 1.0);
  return x * (constants.b_hz + x * (-constants.d_hz + x * (constants.h_hz + x * constants.l_hz)));
}

double linear_frequency_hz(const LinearConstants& constants, int upper_j) {
  // With x = J(J+1) and y = J(J-1): x - y = 2J, x2 - y2 = 4J^3, x3 - y3 = 2J^3 (3J^2 + 1),
  // x4 - y4 = 8J^5 (J^2 + 1).
  const double j = upper_j;
  const double j2 = j * j;
  const double per_2j = constants.b_hz - 2.0 * j2 * constants.d_hz + j2 * (3.0 * j2 + 1.0) * constants.h_hz +
                        4.0 * j2 * j2 * (j2 + 1.0) * constants.l_hz;
  return 2.0 * j * per_2j;
}

int linear_highest_j(const LinearConstants& constants, int limit) {
  check(constants);
  if (limit < 0) throw DomainError("limit", limit, "0 or above");
  int j = 0;
  while (j < limit && linear_frequency_hz(constants, j + 1) > 0.0) ++j;
  return j;
}

std::vector<LinearLine> linear_lines(const LinearConstants& constants, const LinearDipole& dipole,
                                     int highest_j) {
  if (highest_j > linear_highest_j(constants, highest_j)) {
    throw DomainError("highest_j", highest_j, "no J above the one where the energies stop rising");
  }
  std::vector<LinearLine> lines;
  for (int j = 1; j <= highest_j; ++j) {
    const double frequency_hz = linear_frequency_hz(constants, j);
    const double mu_c_m = dipole.at(j);
    lines.push_back({j, frequency_hz, einstein_a_per_s(frequency_hz, j * mu_c_m * mu_c_m, 2.0 * j + 1.0)});
  }
  return lines;
}

RotorModel linear_model(const LinearConstants& constants, const LinearDipole& dipole, const SpinRule& spin,
                        const RotorOptions& options) {
  require_valid(options);
  const int highest_j = linear_highest_j(constants, options.highest_j);
  RotorModel draft;
  if (highest_j < options.highest_j) {
    draft.warnings.push_back(
        fmt::format("the distortion series stops rising at J = {}; levels above are left out", highest_j));
  }
  for (int j = 0; j <= highest_j; ++j) {
    draft.levels.push_back({{static_cast<std::int16_t>(j)}, linear_energy_hz(constants, j), 2.0 * j + 1.0});
    if (j == 0) continue;
    const double mu_c_m = dipole.at(j);
    const auto upper = static_cast<std::uint32_t>(j);
    draft.transitions.push_back({upper, upper - 1, 0.0, j * mu_c_m * mu_c_m, 0.0});
  }
  draft.complete_to_hz = draft.levels.back().energy_hz;
  return finished_model(std::move(draft), spin, options);
}

}  // namespace trotline
