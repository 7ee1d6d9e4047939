#include <algorithm>
#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/excitation/tabulated_partition.hpp>

namespace trotline {

TabulatedPartition::TabulatedPartition(const PartitionFunction& source, double lowest_k, double highest_k)
    : lowest_k_(lowest_k), highest_k_(highest_k), ln_lowest_(std::log(lowest_k)) {
  if (!(lowest_k > 0.0 && lowest_k >= source.lowest_k())) {
    throw DomainError("lowest_k", lowest_k, "above 0 and not below the range of Q");
  }
  if (!(highest_k > lowest_k && highest_k <= source.highest_k())) {
    throw DomainError("highest_k", highest_k, "above lowest_k and not above the range of Q");
  }
  constexpr int kFewestIntervals = 32;
  for (int intervals = kFewestIntervals; intervals < kMostPartitionNodes; intervals *= 2) {
    tabulate(source, intervals);
    if (error_ < kTabulatedPartitionError) break;
  }
}

void TabulatedPartition::tabulate(const PartitionFunction& source, int intervals) {
  const double step = std::log(highest_k_ / lowest_k_) / intervals;
  const auto temperature = [&](double node) {
    return std::clamp(std::exp(ln_lowest_ + node * step), lowest_k_, highest_k_);  // the ends exactly
  };
  nodes_per_ln_ = 1.0 / step;
  nodes_.clear();
  for (int i = 0; i <= intervals; ++i) {
    const double t = i == intervals ? highest_k_ : temperature(i);
    const PartitionValue value = source.at(t);
    nodes_.push_back({value.ln_q, value.dlnq_dt * t * step});
  }
  error_ = 0.0;
  for (int i = 0; i < intervals; ++i) {
    const double t = temperature(i + 0.5);
    error_ = std::max(error_, std::abs(at(std::log(t)).ln_q - source.at(t).ln_q));
  }
}

}  // namespace trotline
