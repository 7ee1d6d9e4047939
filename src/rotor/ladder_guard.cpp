#include "ladder_guard.hpp"

#include <fmt/format.h>

#include <algorithm>

#include <trotline/physics/constants.hpp>

namespace trotline {
namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();

}  // namespace

LadderGuard::LadderGuard(Representation representation, int highest_j)
    : z_is_a_(representation == Representation::i_r || representation == Representation::i_l),
      last_hz_(2 * (static_cast<std::size_t>(highest_j) + 1), -kInfinity),
      is_cut_(last_hz_.size(), false),
      lowest_hz_{-kInfinity, kInfinity} {}

int LadderGuard::k_about_z(const WangBlock& block, std::size_t i) const {
  return z_is_a_ ? block.ka[i] : block.kc[i];
}

std::size_t LadderGuard::ladder_of(const WangBlock& block, std::size_t i) const {
  return static_cast<std::size_t>(2 * k_about_z(block, i) + block.ka[i] + block.kc[i] - block.j);
}

std::vector<bool> LadderGuard::admit(const WangBlock& block, int rising_k) {
  if (block.j != j_) {
    if (lowest_hz_[1] < kInfinity) lowest_hz_[0] = lowest_hz_[1];
    lowest_hz_[1] = kInfinity;
    j_ = block.j;
  }
  std::vector<bool> stays(block.ka.size());
  for (std::size_t i = 0; i < stays.size(); ++i) {
    const std::size_t ladder = ladder_of(block, i);
    const bool rises = block.energy_hz[static_cast<Eigen::Index>(i)] > last_hz_[ladder];
    stays[i] = !is_cut_[ladder] && rises && k_about_z(block, i) <= rising_k;
    if (stays[i]) {
      note_admitted(block, i);
    } else {
      note_missing(block, i);
    }
  }
  return stays;
}

void LadderGuard::note_admitted(const WangBlock& block, std::size_t i) {
  const double energy_hz = block.energy_hz[static_cast<Eigen::Index>(i)];
  last_hz_[ladder_of(block, i)] = energy_hz;
  lowest_hz_[1] = std::min(lowest_hz_[1], energy_hz);
}

/// The true energy of a missing level lies above the last one of its ladder, above the last ones of all
/// ladders that are lower at the same J, and above the lowest level of the J before.
void LadderGuard::note_missing(const WangBlock& block, std::size_t i) {
  const int k = k_about_z(block, i);
  const std::size_t ladder = ladder_of(block, i);
  if (missing_++ == 0) {
    first_j_ = block.j;
    first_k_ = k;
  }
  is_cut_[ladder] = true;
  const double above_hz = std::max({last_hz_[ladder], last_of_lower_ladders_hz(k), lowest_hz_[0]});
  missing_from_hz_ = std::min(missing_from_hz_, above_hz);
}

/// Energies of one J rise with Ka and fall with Kc.
double LadderGuard::last_of_lower_ladders_hz(int k) const {
  const auto here = last_hz_.begin() + 2 * k;
  const auto [first, last] =
      z_is_a_ ? std::pair(last_hz_.begin(), here) : std::pair(here + 2, last_hz_.end());
  return first == last ? -kInfinity : *std::max_element(first, last);
}

double LadderGuard::complete_to_hz() const {
  const double last_j_hz = lowest_hz_[1] < kInfinity ? lowest_hz_[1] : lowest_hz_[0];
  return std::min(missing_from_hz_, last_j_hz);
}

std::vector<std::string> LadderGuard::warnings() const {
  if (missing_ == 0) return {};
  return {fmt::format(
      "the distortion series stops rising: {} levels from J = {}, {} = {} upward are left out; none is "
      "missing below E/k = {:.0f} K",
      missing_, first_j_, z_is_a_ ? "Ka" : "Kc", first_k_, constants::kKelvinPerHz * complete_to_hz())};
}

}  // namespace trotline
