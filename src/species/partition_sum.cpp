// Q(T) as a sum over levels. Symbols: g degeneracy, E energy over k in kelvin, x = E/T.

#include <Eigen/Dense>
#include <boost/math/special_functions/gamma.hpp>
#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>
#include <numeric>

#include <trotline/base/errors.hpp>
#include <trotline/species/partition_function.hpp>

#include "level_compression.hpp"

namespace trotline {
namespace {

void check_levels(const std::vector<Level>& levels) {
  if (levels.empty()) throw DomainError("number of levels", 0, "at least 1");
  for (const Level& level : levels) {
    if (!(std::isfinite(level.energy_k) && level.energy_k >= 0.0)) {
      throw DomainError(fmt::format("energy of level '{}' [K]", level.label), level.energy_k,
                        "finite and >= 0");
    }
    if (!(std::isfinite(level.degeneracy) && level.degeneracy > 0.0)) {
      throw DomainError(fmt::format("degeneracy of level '{}'", level.label), level.degeneracy, "above 0");
    }
  }
}

void check_modes(const std::vector<VibrationalMode>& modes) {
  for (const VibrationalMode& mode : modes) {
    if (!(std::isfinite(mode.energy_k) && mode.energy_k > 0.0)) {
      throw DomainError("energy of a vibrational mode [K]", mode.energy_k, "finite and above 0");
    }
    if (mode.degeneracy < 1) throw DomainError("degeneracy of a vibrational mode", mode.degeneracy, ">= 1");
  }
}

/// The factors of the vibrational modes: ln of their product, and its slope.
struct VibrationalFactor {
  double ln_q = 0.0;
  double dlnq_dt = 0.0;
};

VibrationalFactor vibrational_factor(const std::vector<VibrationalMode>& modes, double temperature_k) {
  VibrationalFactor factor;
  for (const VibrationalMode& mode : modes) {
    const double x = mode.energy_k / temperature_k;
    factor.ln_q -= mode.degeneracy * std::log1p(-std::exp(-x));
    factor.dlnq_dt += mode.degeneracy * x / temperature_k / std::expm1(x);
  }
  return factor;
}

class LevelSum final : public PartitionFunction {
 public:
  LevelSum(const std::vector<Level>& levels, const LevelSumOptions& options)
      : levels_(sorted(levels)),
        zero_k_(lowest_energy(levels)),
        modes_(options.modes),
        highest_k_(options.highest_k) {
    // Everything beyond adds less than (sum of g) exp(-cut) = g_0 exp(-40), under 1e-17 of Q.
    cut_ = 40.0 + std::log(states() / levels_.degeneracies[0]);
    compress();
    complete_to_k_ = options.complete_to_k ? *options.complete_to_k - zero_k_ : last_energy();
    if (std::isfinite(complete_to_k_) && complete_to_k_ > 0.0) {
      complete_states_ = states_up_to(complete_to_k_);
      growth_ = std::clamp(std::log2(complete_states_ / states_up_to(0.5 * complete_to_k_)), 0.5, 6.0);
      find_highest_temperature();
    }
  }

  [[nodiscard]] PartitionValue at(double temperature_k) const override {
    if (!(temperature_k >= lowest_k() && temperature_k <= highest_k_)) {
      throw DomainError("temperature_k", temperature_k,
                        fmt::format("{:g} to {:g} K ({})", lowest_k(), highest_k_, description()));
    }
    return value_at(temperature_k);
  }

  [[nodiscard]] double lowest_k() const override { return kLowestTemperatureK; }
  [[nodiscard]] double highest_k() const override { return highest_k_; }

  [[nodiscard]] std::string description() const override {
    std::string text = fmt::format("sum over {} level{}", levels_.energies_k.size(),
                                   levels_.energies_k.size() == 1 ? "" : "s");
    if (!modes_.empty()) {
      text += fmt::format(" times {} vibrational mode{}", modes_.size(), modes_.size() == 1 ? "" : "s");
    }
    return text;
  }

 private:
  struct Sums {
    double q = 0.0;   ///< sum of g exp(-x)
    double qe = 0.0;  ///< sum of g E exp(-x)
  };

  /// By rising energy, which counts from the lowest level: no sum underflows at low T.
  static LevelArrays sorted(const std::vector<Level>& levels) {
    std::vector<std::size_t> order(levels.size());
    std::iota(order.begin(), order.end(), std::size_t{0});
    std::stable_sort(order.begin(), order.end(),
                     [&](std::size_t a, std::size_t b) { return levels[a].energy_k < levels[b].energy_k; });
    const auto n = static_cast<Eigen::Index>(levels.size());
    const Level& lowest = levels[order.front()];
    LevelArrays arrays{Eigen::ArrayXd(n), Eigen::ArrayXd(n)};
    for (Eigen::Index i = 0; i < n; ++i) {
      const Level& level = levels[order[static_cast<std::size_t>(i)]];
      arrays.energies_k[i] = level.energy_k - lowest.energy_k;
      arrays.degeneracies[i] = level.degeneracy;
    }
    return arrays;
  }

  /// Long lists are thinned out for high temperatures, into windows of about a dozen levels.
  void compress() {
    constexpr Eigen::Index kLongList = 1000;
    const Eigen::Index n = levels_.energies_k.size();
    if (n < kLongList || last_energy() <= 0.0) return;
    const double width_k = 12.0 * last_energy() / static_cast<double>(n);
    thinned_ = compressed(levels_, width_k);
    thinned_from_k_ = kTemperatureOverWindow * width_k;
  }

  static double lowest_energy(const std::vector<Level>& levels) {
    return std::min_element(levels.begin(), levels.end(),
                            [](const Level& a, const Level& b) { return a.energy_k < b.energy_k; })
        ->energy_k;
  }

  [[nodiscard]] double last_energy() const { return levels_.energies_k[levels_.energies_k.size() - 1]; }
  [[nodiscard]] double states() const { return levels_.degeneracies.sum(); }

  [[nodiscard]] double states_up_to(double energy_k) const {
    return (levels_.energies_k <= energy_k).select(levels_.degeneracies, 0.0).sum();
  }

  /// In blocks that stay in the cache; the order of the terms is always the same.
  [[nodiscard]] Sums sums(double temperature_k) const {
    constexpr Eigen::Index kBlock = 512;
    const LevelArrays& levels = temperature_k >= thinned_from_k_ ? thinned_ : levels_;
    const double* const begin = levels.energies_k.data();
    const double* const end = begin + levels.energies_k.size();
    const Eigen::Index n = std::upper_bound(begin, end, cut_ * temperature_k) - begin;
    const double minus_beta = -1.0 / temperature_k;
    Eigen::Array<double, Eigen::Dynamic, 1, 0, kBlock, 1> term;
    Sums sums;
    for (Eigen::Index first = 0; first < n; first += kBlock) {
      const Eigen::Index length = std::min(kBlock, n - first);
      const auto energy = levels.energies_k.segment(first, length);
      term = levels.degeneracies.segment(first, length) * (energy * minus_beta).exp();
      sums.q += term.sum();
      sums.qe += (term * energy).sum();
    }
    return sums;
  }

  [[nodiscard]] PartitionValue value_at(double temperature_k) const {
    const Sums sum = sums(temperature_k);
    const VibrationalFactor vibration = vibrational_factor(modes_, temperature_k);
    PartitionValue value;
    value.ln_q = std::log(sum.q) + vibration.ln_q - zero_k_ / temperature_k;
    value.q = sum.q * std::exp(vibration.ln_q - zero_k_ / temperature_k);
    value.dlnq_dt = (sum.qe / sum.q + zero_k_) / (temperature_k * temperature_k) + vibration.dlnq_dt;
    value.relative_error = tail(temperature_k) / sum.q;
    return value;
  }

  /// Number of states G(E) = G_c (E/E_c)^s beyond E_c, up to which the list is complete: the integral of
  /// dG exp(-E/T) is G_c s x^-s Gamma(s, x) with x = E_c/T.
  [[nodiscard]] double tail(double temperature_k) const {
    const double x = complete_to_k_ / temperature_k;
    if (growth_ == 0.0 || x > 700.0) return 0.0;
    return complete_states_ * growth_ * std::pow(x, -growth_) * boost::math::tgamma(growth_, x);
  }

  /// The truncation rises with T: halve the interval in ln T.
  void find_highest_temperature() {
    if (value_at(highest_k_).relative_error <= kMostTruncation) return;
    double low = std::log(kLowestTemperatureK);
    double high = std::log(highest_k_);
    while (high - low > 1e-6) {
      const double middle = 0.5 * (low + high);
      (value_at(std::exp(middle)).relative_error <= kMostTruncation ? low : high) = middle;
    }
    highest_k_ = std::max(std::exp(low), kLowestTemperatureK);
  }

  LevelArrays levels_;
  double zero_k_;        ///< energy of the lowest level, from which levels_ count
  LevelArrays thinned_;  ///< stands for levels_ from thinned_from_k_ on
  double thinned_from_k_ = std::numeric_limits<double>::infinity();
  std::vector<VibrationalMode> modes_;
  double highest_k_;
  double cut_ = 0.0;
  double complete_to_k_ = 0.0;
  double complete_states_ = 0.0;
  double growth_ = 0.0;  ///< 0: no level is missing
};

}  // namespace

std::shared_ptr<const PartitionFunction> partition_function_from_levels(const std::vector<Level>& levels,
                                                                        const LevelSumOptions& options) {
  check_levels(levels);
  check_modes(options.modes);
  if (!(std::isfinite(options.highest_k) && options.highest_k > kLowestTemperatureK)) {
    throw DomainError("highest_k", options.highest_k, fmt::format("above {:g} K", kLowestTemperatureK));
  }
  if (options.complete_to_k && !(*options.complete_to_k > 0.0)) {
    throw DomainError("complete_to_k", *options.complete_to_k, "above 0 K");
  }
  return std::make_shared<LevelSum>(levels, options);
}

}  // namespace trotline
