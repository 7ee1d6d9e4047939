// Q(T) as a sum over levels. Symbols: g degeneracy, E energy over k in kelvin, x = E/T.

#include <trotline/species/partition_function.hpp>

#include <Eigen/Dense>
#include <algorithm>
#include <boost/math/special_functions/gamma.hpp>
#include <cmath>
#include <numeric>

#include <fmt/format.h>

#include <trotline/base/errors.hpp>

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
  LevelSum(const std::vector<Level>& levels, std::vector<VibrationalMode> modes, double highest_k,
           LevelList list)
      : modes_(std::move(modes)), highest_k_(highest_k) {
    sort_in(levels);
    const double states = degeneracies_.sum();
    // Everything beyond adds less than (sum of g) exp(-cut) = g_0 exp(-40), under 1e-17 of Q.
    cut_ = 40.0 + std::log(states / degeneracies_[0]);
    const double half = 0.5 * last_energy();
    double states_below_half = 0.0;
    for (Eigen::Index i = 0; i < energies_.size() && energies_[i] <= half; ++i)
      states_below_half += degeneracies_[i];
    grows_ = list == LevelList::truncated && last_energy() > 0.0;
    if (grows_) {
      growth_ = std::clamp(std::log2(states / states_below_half), 0.5, 6.0);
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
    std::string text = fmt::format("sum over {} level{}", energies_.size(), energies_.size() == 1 ? "" : "s");
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

  void sort_in(const std::vector<Level>& levels) {
    std::vector<std::size_t> order(levels.size());
    std::iota(order.begin(), order.end(), std::size_t{0});
    std::stable_sort(order.begin(), order.end(),
                     [&](std::size_t a, std::size_t b) { return levels[a].energy_k < levels[b].energy_k; });
    energies_.resize(static_cast<Eigen::Index>(levels.size()));
    degeneracies_.resize(energies_.size());
    for (Eigen::Index i = 0; i < energies_.size(); ++i) {
      const Level& level = levels[order[static_cast<std::size_t>(i)]];
      energies_[i] = level.energy_k;
      degeneracies_[i] = level.degeneracy;
    }
  }

  [[nodiscard]] double last_energy() const { return energies_[energies_.size() - 1]; }

  /// In blocks that stay in the cache; the order of the terms is always the same.
  [[nodiscard]] Sums sums(double temperature_k) const {
    constexpr Eigen::Index kBlock = 512;
    const double* const begin = energies_.data();
    const Eigen::Index n = std::upper_bound(begin, begin + energies_.size(), cut_ * temperature_k) - begin;
    const double minus_beta = -1.0 / temperature_k;
    Eigen::Array<double, Eigen::Dynamic, 1, 0, kBlock, 1> term;
    Sums sums;
    for (Eigen::Index first = 0; first < n; first += kBlock) {
      const Eigen::Index length = std::min(kBlock, n - first);
      const auto energy = energies_.segment(first, length);
      term = degeneracies_.segment(first, length) * (energy * minus_beta).exp();
      sums.q += term.sum();
      sums.qe += (term * energy).sum();
    }
    return sums;
  }

  [[nodiscard]] PartitionValue value_at(double temperature_k) const {
    const Sums sum = sums(temperature_k);
    const VibrationalFactor vibration = vibrational_factor(modes_, temperature_k);
    PartitionValue value;
    value.ln_q = std::log(sum.q) + vibration.ln_q;
    value.q = modes_.empty() ? sum.q : sum.q * std::exp(vibration.ln_q);
    value.dlnq_dt = sum.qe / (sum.q * temperature_k * temperature_k) + vibration.dlnq_dt;
    value.relative_error = tail(temperature_k) / sum.q;
    return value;
  }

  /// Number of states G(E) = G_last (E/E_last)^s beyond the last level: the integral of dG exp(-E/T) is
  /// G_last s x^-s Gamma(s, x) with x = E_last/T.
  [[nodiscard]] double tail(double temperature_k) const {
    const double x = last_energy() / temperature_k;
    if (!grows_ || x > 700.0) return 0.0;
    return degeneracies_.sum() * growth_ * std::pow(x, -growth_) * boost::math::tgamma(growth_, x);
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

  Eigen::ArrayXd energies_;
  Eigen::ArrayXd degeneracies_;
  std::vector<VibrationalMode> modes_;
  double highest_k_;
  double cut_ = 0.0;
  double growth_ = 1.0;
  bool grows_ = false;
};

}  // namespace

std::shared_ptr<const PartitionFunction> partition_function_from_levels(const std::vector<Level>& levels,
                                                                        std::vector<VibrationalMode> modes,
                                                                        double highest_k, LevelList list) {
  check_levels(levels);
  check_modes(modes);
  if (!(std::isfinite(highest_k) && highest_k > kLowestTemperatureK)) {
    throw DomainError("highest_k", highest_k, fmt::format("above {:g} K", kLowestTemperatureK));
  }
  return std::make_shared<LevelSum>(levels, std::move(modes), highest_k, list);
}

}  // namespace trotline
