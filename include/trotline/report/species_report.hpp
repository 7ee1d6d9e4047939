#pragma once

#include <optional>
#include <string>
#include <vector>

#include <trotline/physics/quantity.hpp>
#include <trotline/species/species.hpp>

namespace trotline {

/// Which parts of a species are asked for.
struct SpeciesQuery {
  bool levels = false;
  bool lines = false;
  std::optional<QuantityRange> frequency_hz;   ///< lines in this range only
  std::vector<double> partition_temperatures_k;  ///< Q at these temperatures
};

/// The parts as text for a terminal; without any part, a summary with the sources of the numbers.
/// @throws InputError when a temperature lies outside the range of Q
[[nodiscard]] std::string species_text(const Species& species, const SpeciesQuery& query);

/// The parts as one JSON document:
/// `{name, kind, levels: [{label, energy_k, degeneracy, spin}], lines: [{transition, frequency_mhz,
/// upper_energy_k, upper_degeneracy, einstein_a_s1}], partition: [{temperature_k, q, dlnq_dt}]}`.
/// Without any part: levels and lines. @throws InputError as species_text
[[nodiscard]] std::string species_json(const Species& species, const SpeciesQuery& query);

}  // namespace trotline
