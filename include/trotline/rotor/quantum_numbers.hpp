#pragma once

#include <cstdint>
#include <string>

namespace trotline {

/// Stands where a rotor has no such quantum number.
inline constexpr std::int16_t kNoQuantum = -1;

/// The quantum numbers of a rotational level.
struct QuantumNumbers {
  std::int16_t j = 0;            ///< J, total angular momentum without nuclear spin
  std::int16_t n = kNoQuantum;   ///< N, angular momentum without electron spin (triplet-sigma)
  std::int16_t k = kNoQuantum;   ///< |K| of a symmetric top, Ka of an asymmetric one
  std::int16_t kc = kNoQuantum;  ///< Kc of an asymmetric top
  std::int8_t inversion = 0;     ///< +1: symmetric (s), -1: antisymmetric (a), 0: no inversion doubling

  friend bool operator==(const QuantumNumbers&, const QuantumNumbers&) = default;
};

/// "J", "J(K)", "J(Ka,Kc)", "N(J)"; with inversion doubling "J(K)s" and "J(K)a".
[[nodiscard]] std::string label_of(const QuantumNumbers& quanta);

}  // namespace trotline
