#pragma once

#include <limits>
#include <string>
#include <vector>

#include <trotline/rotor/symmetric.hpp>

namespace trotline {

/// Which levels (J,K) of a symmetric rotor lie where its series still rises.
class SymmetricLevels {
 public:
  SymmetricLevels(const SymmetricConstants& constants, int highest_j);

  [[nodiscard]] bool contains(int j, int k) const { return energy_at(j, k) < kMissing; }
  [[nodiscard]] double energy_hz(int j, int k) const { return energy_at(j, k); }
  [[nodiscard]] double complete_to_hz() const { return complete_to_hz_; }
  [[nodiscard]] std::vector<std::string> warnings() const;

 private:
  static constexpr double kMissing = std::numeric_limits<double>::infinity();
  [[nodiscard]] double energy_at(int j, int k) const { return energies_hz_[index(j, k)]; }
  [[nodiscard]] static std::size_t index(int j, int k) {
    return static_cast<std::size_t>(j) * (static_cast<std::size_t>(j) + 1) / 2 + static_cast<std::size_t>(k);
  }
  [[nodiscard]] double highest_before(int j, int k) const;
  void add(const SymmetricConstants& constants, int j, int k);

  std::vector<double> energies_hz_;
  double complete_to_hz_ = std::numeric_limits<double>::infinity();
  int missing_ = 0;
  int first_j_ = 0;
  int first_k_ = 0;
};

}  // namespace trotline
