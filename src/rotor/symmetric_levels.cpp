#include "symmetric_levels.hpp"

#include <fmt/format.h>

#include <algorithm>

#include <trotline/physics/constants.hpp>

namespace trotline {

SymmetricLevels::SymmetricLevels(const SymmetricConstants& constants, int highest_j)
    : energies_hz_(index(highest_j, highest_j) + 1, kMissing) {
  for (int j = 0; j <= highest_j; ++j) {
    for (int k = 0; k <= j; ++k) add(constants, j, k);
  }
  // Levels of the next J lie above those of the last one.
  const auto last_j = energies_hz_.begin() + static_cast<std::ptrdiff_t>(index(highest_j, 0));
  complete_to_hz_ = std::min(complete_to_hz_, *std::min_element(last_j, energies_hz_.end()));
}

/// The higher of the two levels that this one must lie above; infinite where one of them is missing.
double SymmetricLevels::highest_before(int j, int k) const {
  double highest = -kMissing;
  if (k < j) highest = std::max(highest, energy_at(j - 1, k));
  if (k > 0) highest = std::max(highest, energy_at(j - 1, k - 1));
  return highest;
}

void SymmetricLevels::add(const SymmetricConstants& constants, int j, int k) {
  const double energy = symmetric_energy_hz(constants, j, k);
  const double before = highest_before(j, k);
  if (energy > before) {
    energies_hz_[index(j, k)] = energy;
    return;
  }
  if (missing_++ == 0) {
    first_j_ = j;
    first_k_ = k;
  }
  complete_to_hz_ = std::min(complete_to_hz_, before);
}

std::vector<std::string> SymmetricLevels::warnings() const {
  if (missing_ == 0) return {};
  return {
      fmt::format("the distortion series stops rising: {} levels from J = {}, K = {} upward are left out; "
                  "none is missing "
                  "below E/k = {:.0f} K",
                  missing_, first_j_, first_k_, constants::kKelvinPerHz * complete_to_hz_)};
}

}  // namespace trotline
