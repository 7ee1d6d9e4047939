#include "model_partitions.hpp"

#include <algorithm>
#include <cmath>
#include <deque>
#include <mutex>

namespace trotline {
namespace {

class IsomerPartition final : public PartitionFunction {
 public:
  IsomerPartition(const Species& species, const std::string& isomer)
      : whole_(species.partition), isomer_(isomer) {
    for (const Level& level : species.levels) {
      energy_k_.push_back(level.energy_k);
      weight_.push_back(level.degeneracy);
      belongs_.push_back(level.spin == isomer);
    }
  }

  [[nodiscard]] PartitionValue at(double temperature_k) const override {
    double all = 0.0;
    double all_energy = 0.0;
    double own = 0.0;
    double own_energy = 0.0;
    for (std::size_t i = 0; i < energy_k_.size(); ++i) {
      const double term = weight_[i] * std::exp(-energy_k_[i] / temperature_k);
      all += term;
      all_energy += term * energy_k_[i];
      if (!belongs_[i]) continue;
      own += term;
      own_energy += term * energy_k_[i];
    }
    PartitionValue value = whole_->at(temperature_k);
    value.q *= own / all;
    value.ln_q += std::log(own / all);
    value.dlnq_dt += (own_energy / own - all_energy / all) / (temperature_k * temperature_k);
    return value;
  }
  [[nodiscard]] double lowest_k() const override {
    // Below, the isomer's lowest level empties out beside the other's and its share underflows.
    double least = HUGE_VAL;
    for (std::size_t i = 0; i < energy_k_.size(); ++i) {
      if (belongs_[i]) least = std::min(least, energy_k_[i]);
    }
    return std::max(whole_->lowest_k(), least / 500.0);
  }
  [[nodiscard]] double highest_k() const override { return whole_->highest_k(); }
  [[nodiscard]] std::string description() const override { return whole_->description() + ", " + isomer_; }

 private:
  std::shared_ptr<const PartitionFunction> whole_;
  std::string isomer_;
  std::vector<double> energy_k_;
  std::vector<double> weight_;
  std::vector<bool> belongs_;
};

struct Kept {
  std::weak_ptr<const PartitionFunction> source;
  std::string isomer;
  double lowest_k;
  double highest_k;
  std::shared_ptr<const TabulatedPartition> table;
};

class Cache {
 public:
  std::shared_ptr<const TabulatedPartition> find(const Species& species, const std::string& isomer,
                                                 double lowest_k, double highest_k) {
    const std::lock_guard lock(mutex_);
    for (const Kept& kept : kept_) {
      if (kept.source.lock() == species.partition && kept.isomer == isomer && kept.lowest_k == lowest_k &&
          kept.highest_k == highest_k) {
        return kept.table;
      }
    }
    const auto source = isomer.empty() ? species.partition : isomer_partition(species, isomer);
    auto table = std::make_shared<const TabulatedPartition>(*source, lowest_k, highest_k);
    kept_.push_front({species.partition, isomer, lowest_k, highest_k, table});
    if (kept_.size() > kMostKept) kept_.pop_back();
    return table;
  }

 private:
  static constexpr std::size_t kMostKept = 64;
  std::mutex mutex_;
  std::deque<Kept> kept_;
};

}  // namespace

std::vector<std::string> spin_isomers(const Species& species) {
  std::vector<std::string> names;
  for (const Level& level : species.levels) {
    if (level.spin.empty()) return {};
    if (std::find(names.begin(), names.end(), level.spin) == names.end()) names.push_back(level.spin);
  }
  std::sort(names.begin(), names.end());
  return names.size() > 1 ? names : std::vector<std::string>{};
}

std::shared_ptr<const PartitionFunction> isomer_partition(const Species& species, const std::string& isomer) {
  return std::make_shared<IsomerPartition>(species, isomer);
}

std::vector<std::shared_ptr<const TabulatedPartition>> model_partitions(
    const Species& species, const std::vector<std::string>& isomers, double lowest_k, double highest_k) {
  static Cache cache;
  std::vector<std::shared_ptr<const TabulatedPartition>> tables;
  for (const std::string& isomer : isomers)
    tables.push_back(cache.find(species, isomer, lowest_k, highest_k));
  return tables;
}

}  // namespace trotline
