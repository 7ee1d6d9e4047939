// Rates of collisions from a file, and the critical densities that follow.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include <trotline/species/species.hpp>

namespace trotline {

/// Downward rate coefficients of one species with one partner, as docs/collisions.md describes the file.
struct CollisionRates {
  struct Rate {
    std::size_t upper = 0;  ///< index into Species::levels
    std::size_t lower = 0;
    std::vector<double> cm3_per_s = {};  ///< one for each temperature
  };
  std::string file;
  std::string partner;
  std::string from;
  std::vector<double> temperature_k;  ///< rising
  std::vector<Rate> rates;
};

/// @throws InputError with file and line: unknown or missing keys, a level that the species does not have,
/// rates
///         that are not above zero or not one for each temperature, temperatures that do not rise
[[nodiscard]] CollisionRates read_collision_rates(const std::string& path, const Species& species);

/// The same from text. @param name  stands for the file in messages
[[nodiscard]] CollisionRates parse_collision_rates(const std::string& text, const std::string& name,
                                                   const Species& species);

/// A_ul over the sum of the rates out of the upper level to all lower ones [cm^-3], each interpolated
/// linearly in ln T - ln rate; nothing where no rate leads out of the level or T lies outside the table.
[[nodiscard]] std::optional<double> critical_density_per_cm3(const CollisionRates& collisions,
                                                             const Transition& transition,
                                                             double temperature_k);

}  // namespace trotline
