#pragma once

#include <array>
#include <limits>
#include <string>
#include <vector>

#include <trotline/rotor/wang_block.hpp>

namespace trotline {

/// Says J after J which levels of an asymmetric rotor are a result, and what is missing.
///
/// A ladder is known by its K about z and by the side of its pair, Ka + Kc - J = 0 or 1. It ends for good at
/// the first J that has no level for it.
class LadderGuard {
 public:
  LadderGuard(Representation representation, int highest_j);

  /// Whether each level of the block stays. Call for all blocks of J = 0, then 1, 2 ...
  [[nodiscard]] std::vector<bool> admit(const WangBlock& block, int rising_k);

  /// Nothing is missing below this E/h [Hz], given that the list ends at the last J that was admitted.
  [[nodiscard]] double complete_to_hz() const;

  /// One sentence where anything was left out.
  [[nodiscard]] std::vector<std::string> warnings() const;

 private:
  [[nodiscard]] int k_about_z(const WangBlock& block, std::size_t i) const;
  [[nodiscard]] std::size_t ladder_of(const WangBlock& block, std::size_t i) const;
  void note_admitted(const WangBlock& block, std::size_t i);
  void note_missing(const WangBlock& block, std::size_t i);
  [[nodiscard]] double last_of_lower_ladders_hz(int k) const;

  bool z_is_a_;
  std::vector<double> last_hz_;  ///< energy of each ladder's last level
  std::vector<bool> is_cut_;
  std::array<double, 2> lowest_hz_;  ///< of the J before and of this J
  int j_ = 0;
  double missing_from_hz_ = std::numeric_limits<double>::infinity();
  std::size_t missing_ = 0;
  int first_j_ = 0;
  int first_k_ = 0;
};

}  // namespace trotline
