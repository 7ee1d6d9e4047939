#include <fmt/format.h>

#include <array>
#include <cmath>
#include <cstdlib>
#include <numeric>

#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/rotor/spin.hpp>

namespace trotline {
namespace {

/// How many spin functions there are of either kind; without their common factor after reduce().
struct Weights {
  int first = 0;
  int second = 0;
};

Weights reduce(Weights weights) {
  const int common = std::gcd(weights.first, weights.second);
  return {weights.first / common, weights.second / common};
}

[[noreturn]] void refuse(const std::string& found, const std::string& expected) {
  throw InputError({found, expected});
}

/// 2I + 1 of a nuclear spin. The largest spin of a nucleus that forms molecules is 9/2.
int multiplicity(double spin) {
  const double doubled = 2.0 * spin;
  if (!(doubled >= 0.0 && doubled <= 9.0) || doubled != std::floor(doubled)) {
    refuse(fmt::format("{:g} is no nuclear spin", spin), "0, 0.5, 1, ... or 4.5");
  }
  return static_cast<int>(doubled) + 1;
}

/// The one isomer that exists needs no name.
SpinState named(int weight, const Weights& both, bool is_first, const char* first, const char* second) {
  if (both.first == 0 || both.second == 0) return {weight, ""};
  return {weight, is_first ? first : second};
}

class NoSpin final : public SpinRule {
 public:
  [[nodiscard]] SpinState at(const QuantumNumbers&) const override { return {}; }
  [[nodiscard]] std::string description() const override { return "no spin weights"; }
};

/// Pairs exchanged by a half turn. `even` and `odd` are the weights of rotational states that keep or
/// change their sign under that turn.
///
/// A pair of spin I has (I+1)(2I+1) symmetric and I(2I+1) antisymmetric spin functions. The whole
/// function changes sign once for each pair of fermions.
Weights pair_weights(const SpinRequest& request) {
  int symmetric = 1;
  int antisymmetric = 0;
  bool changes_sign = request.state_is_antisymmetric;
  constexpr std::size_t kMostPairs = 4;  // 55^4 spin functions of four pairs of spin 9/2 still are an int
  if (request.spins.size() > kMostPairs) {
    refuse(fmt::format("{} pairs of exchanged nuclei", request.spins.size()), "at most 4");
  }
  for (const double spin : request.spins) {
    const int n = multiplicity(spin);
    const int same = n * (n + 1) / 2;
    const int opposite = n * (n - 1) / 2;
    const int both = symmetric * same + antisymmetric * opposite;
    antisymmetric = symmetric * opposite + antisymmetric * same;
    symmetric = both;
    if (n % 2 == 0) changes_sign = !changes_sign;
  }
  return reduce(changes_sign ? Weights{antisymmetric, symmetric} : Weights{symmetric, antisymmetric});
}

/// The rules for exchanged pairs: they differ only in what makes a rotational state even.
class PairRule : public SpinRule {
 public:
  PairRule(const Weights& even_odd, std::string turn) : weights_(even_odd), turn_(std::move(turn)) {}

  [[nodiscard]] SpinState at(const QuantumNumbers& quanta) const override {
    const int weight = is_even(quanta) ? weights_.first : weights_.second;
    const bool is_heavier = weight >= std::max(weights_.first, weights_.second);
    return named(weight, weights_, is_heavier, "ortho", "para");
  }
  [[nodiscard]] std::string description() const override {
    return fmt::format("equal nuclei exchanged by {}: weight {} for even, {} for odd levels", turn_,
                       weights_.first, weights_.second);
  }

 private:
  [[nodiscard]] virtual bool is_even(const QuantumNumbers& quanta) const = 0;
  Weights weights_;
  std::string turn_;
};

class HalfTurnAboutAxis final : public PairRule {
 public:
  HalfTurnAboutAxis(char axis, const Weights& even_odd)
      : PairRule(even_odd, fmt::format("a half turn about {}", axis)), axis_(axis) {}

 private:
  /// The character of J(Ka,Kc) under the turn is (-1)^Ka about a, (-1)^Kc about c, their product about b.
  [[nodiscard]] bool is_even(const QuantumNumbers& quanta) const override {
    if (quanta.k == kNoQuantum || quanta.kc == kNoQuantum) {
      throw DomainError("spin rule c2v: Kc", quanta.kc, "a level of an asymmetric rotor");
    }
    const int exponent = axis_ == 'a' ? quanta.k : axis_ == 'c' ? quanta.kc : quanta.k + quanta.kc;
    return exponent % 2 == 0;
  }
  char axis_;
};

class EndOverEnd final : public PairRule {
 public:
  explicit EndOverEnd(const Weights& even_odd) : PairRule(even_odd, "a turn end over end") {}

 private:
  [[nodiscard]] bool is_even(const QuantumNumbers& quanta) const override {
    if (quanta.k != kNoQuantum)
      throw DomainError("spin rule dinfh: K", quanta.k, "a level of a linear rotor");
    return (quanta.n == kNoQuantum ? quanta.j : quanta.n) % 2 == 0;
  }
};

/// Three equal nuclei of multiplicity n: (n^3 + 2n)/3 spin functions are of species A1 or A2 and
/// (n^3 - n)/3 pairs of species E. A K-level of the rotor takes the one kind or the other.
Weights three_nuclei_weights(int n) { return reduce({(n * n * n + 2 * n) / 3, (n * n * n - n) / 3}); }

class ThreeAboutAxis final : public SpinRule {
 public:
  explicit ThreeAboutAxis(double spin) : weights_(three_nuclei_weights(multiplicity(spin))) {}

  [[nodiscard]] SpinState at(const QuantumNumbers& quanta) const override {
    if (quanta.k == kNoQuantum || quanta.kc != kNoQuantum) {
      throw DomainError("spin rule c3v: K", quanta.k, "a level of a symmetric rotor");
    }
    const bool is_a = quanta.k % 3 == 0;
    return named(is_a ? weights_.first : weights_.second, weights_, is_a, "A", "E");
  }
  [[nodiscard]] std::string description() const override {
    return fmt::format("three equal nuclei about the axis: A (K = 0, 3, 6 ...) {}, E {}", weights_.first,
                       weights_.second);
  }

 private:
  Weights weights_;
};

/// NH3: the allowed states have overall species A2' or A2''. For K = 0 that leaves the antisymmetric
/// inversion level where J is even and the symmetric one where J is odd.
class ThreeHydrogensInverting final : public SpinRule {
 public:
  [[nodiscard]] SpinState at(const QuantumNumbers& quanta) const override {
    if (quanta.inversion == 0 || quanta.k == kNoQuantum) {
      throw DomainError("spin rule d3h: inversion", quanta.inversion, "a level of an inverting rotor");
    }
    if (quanta.k % 3 != 0) return {1, "para"};
    const bool is_missing = quanta.k == 0 && quanta.inversion == (quanta.j % 2 == 0 ? 1 : -1);
    return {is_missing ? 0 : 2, "ortho"};
  }
  [[nodiscard]] std::string description() const override {
    return "three spin-1/2 nuclei and inversion: ortho (K = 0, 3, 6 ...) 2, para 1; one inversion level for "
           "K = 0";
  }
};

using Made = std::shared_ptr<const SpinRule>;

Made make_none(const SpinRequest&) { return std::make_shared<NoSpin>(); }

Weights required_pair_weights(const SpinRequest& request) {
  if (request.spins.empty()) {
    refuse(fmt::format("spin rule '{}' has no nuclear spins", request.rule),
           "one spin for each pair of equal nuclei");
  }
  return pair_weights(request);
}

Made make_c2v(const SpinRequest& request) {
  if (request.axis != 'a' && request.axis != 'b' && request.axis != 'c') {
    refuse("spin rule 'c2v' has no axis", "the axis of symmetry: a, b or c");
  }
  return std::make_shared<HalfTurnAboutAxis>(request.axis, required_pair_weights(request));
}

Made make_dinfh(const SpinRequest& request) {
  return std::make_shared<EndOverEnd>(required_pair_weights(request));
}

Made make_c3v(const SpinRequest& request) {
  if (request.spins.size() != 1) {
    refuse(fmt::format("spin rule 'c3v' has {} nuclear spins", request.spins.size()),
           "the one spin that the three nuclei have");
  }
  return std::make_shared<ThreeAboutAxis>(request.spins.front());
}

Made make_d3h(const SpinRequest& request) {
  if (!request.spins.empty() && request.spins != std::vector<double>{0.5}) {
    refuse("spin rule 'd3h' with a spin that is not 1/2", "three hydrogens; other nuclei have other weights");
  }
  return std::make_shared<ThreeHydrogensInverting>();
}

struct Entry {
  const char* name;
  Made (*make)(const SpinRequest&);
};

constexpr std::array<Entry, 5> kRules = {
    {{"c2v", make_c2v}, {"c3v", make_c3v}, {"d3h", make_d3h}, {"dinfh", make_dinfh}, {"none", make_none}}};

}  // namespace

std::vector<std::string> spin_rule_names() {
  std::vector<std::string> names;
  for (const Entry& entry : kRules) names.emplace_back(entry.name);
  return names;
}

std::shared_ptr<const SpinRule> make_spin_rule(const SpinRequest& request) {
  for (const Entry& entry : kRules) {
    if (request.rule == entry.name) return entry.make(request);
  }
  const auto names = spin_rule_names();
  throw InputError({fmt::format("spin rule '{}' is not known", printable(request.rule)),
                    "one of " + listed(names), did_you_mean(request.rule, names)});
}

}  // namespace trotline
