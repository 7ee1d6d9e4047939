#pragma once

#include <memory>
#include <string>
#include <vector>

#include <trotline/rotor/quantum_numbers.hpp>

namespace trotline {

/// What nuclear spin does to one rotational level.
struct SpinState {
  int weight = 1;      ///< g_I; 0: the level does not exist
  std::string isomer;  ///< name of the spin isomer; empty where the species has only one
};

/// Nuclear spin weights of the levels of a molecule with equivalent nuclei.
///
/// Weights carry no common factor: the weights of a rule are divided by their greatest common divisor, and
/// nuclei that are not equivalent to others do not count. So H2CO has 3 and 1, not 12 and 4. Q and g_u are
/// consistent as long as both come from one rule.
///
/// A molecule whose symmetry none of the rules below covers can be given a rule of its own by deriving
/// from this class: nothing else in the library knows the rules apart.
class SpinRule {
 public:
  SpinRule() = default;
  SpinRule(const SpinRule&) = delete;
  SpinRule& operator=(const SpinRule&) = delete;
  virtual ~SpinRule() = default;

  /// @throws DomainError where the level lacks a quantum number that the rule needs (K, Kc, inversion)
  [[nodiscard]] virtual SpinState at(const QuantumNumbers& quanta) const = 0;

  /// One phrase for reports, e.g. "two spin-1/2 exchanged by a turn about b: ortho 3, para 1".
  [[nodiscard]] virtual std::string description() const = 0;
};

/// Which rule, as a species file states it.
struct SpinRequest {
  /// One of spin_rule_names():
  /// - "none": every level has weight 1.
  /// - "c2v": a turn by 180 degrees about `axis` exchanges one or more pairs of equal nuclei. `spins`
  ///   holds the spin of each pair's nuclei: {0.5} for H2CO, {0} for SO2, {0.5, 0} for c-C3H2.
  /// - "dinfh": the same for a linear molecule, end over end.
  /// - "c3v": three equal nuclei of spins[0] about the axis of a symmetric top: A for K = 0, 3, 6 ..., E
  /// else.
  /// - "d3h": three spin-1/2 nuclei and inversion doubling resolved, as in NH3: ortho for K = 0, 3, 6 ...
  ///   (only one of the two inversion levels exists for K = 0), para else.
  std::string rule = "none";
  char axis = 0;                   ///< 'a', 'b' or 'c', for "c2v"
  std::vector<double> spins = {};  ///< nuclear spins: multiples of 1/2, 0 to 9/2

  /// The electronic and vibrational state changes its sign under the exchange (O2: a 3-Sigma-g-minus state).
  bool state_is_antisymmetric = false;
};

/// @throws InputError naming what is wrong: an unknown rule (with the nearest name), a missing axis or
///         spin, a spin that is none
[[nodiscard]] std::shared_ptr<const SpinRule> make_spin_rule(const SpinRequest& request);

/// The names that SpinRequest::rule can have, sorted.
[[nodiscard]] std::vector<std::string> spin_rule_names();

}  // namespace trotline
