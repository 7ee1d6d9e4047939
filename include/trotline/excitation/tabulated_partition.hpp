#pragma once

#include <vector>

#include <trotline/species/partition_function.hpp>

namespace trotline {

/// ln Q and its slope over a span of temperatures, tabulated once so that a fit can ask for them millions of
/// times. Cubic in ln T between nodes, through values and slopes of the partition function itself; continuous
/// with its slope, so that derivatives of a likelihood agree with its values.
class TabulatedPartition {
 public:
  struct Value {
    double ln_q;
    double dlnq_dlnt;  ///< <E>/kT
  };

  /// Halves the spacing of the nodes until ln Q half way between them is off by less than
  /// kTabulatedPartitionError, or the table holds kMostPartitionNodes.
  /// @param lowest_k, highest_k  the span [K], 0 < lowest < highest, inside the range of `source`
  /// @throws DomainError if the span is none, or outside the range of `source`
  TabulatedPartition(const PartitionFunction& source, double lowest_k, double highest_k);

  /// @param ln_temperature  ln of T/K; outside the span the end interval's cubic goes on: keep inside
  [[nodiscard]] Value at(double ln_temperature) const {
    const double position = (ln_temperature - ln_lowest_) * nodes_per_ln_;
    const double most = static_cast<double>(nodes_.size() - 2);
    const double node = position < 0.0    ? 0.0
                        : position > most ? most
                                          : static_cast<double>(static_cast<int>(position));
    const double s = position - node;
    const Node& a = nodes_[static_cast<std::size_t>(node)];
    const Node& b = nodes_[static_cast<std::size_t>(node) + 1];
    const double rise = b.ln_q - a.ln_q;
    const double c2 = 3.0 * rise - 2.0 * a.step_slope - b.step_slope;
    const double c3 = a.step_slope + b.step_slope - 2.0 * rise;
    return {a.ln_q + s * (a.step_slope + s * (c2 + s * c3)),
            (a.step_slope + s * (2.0 * c2 + 3.0 * s * c3)) * nodes_per_ln_};
  }

  [[nodiscard]] double lowest_k() const { return lowest_k_; }
  [[nodiscard]] double highest_k() const { return highest_k_; }

  /// Largest error of ln Q found half way between the nodes.
  [[nodiscard]] double error() const { return error_; }

 private:
  struct Node {
    double ln_q;
    double step_slope;  ///< d ln Q / d(node number)
  };

  void tabulate(const PartitionFunction& source, int intervals);

  double lowest_k_;
  double highest_k_;
  double ln_lowest_;
  double nodes_per_ln_ = 0.0;
  double error_ = 0.0;
  std::vector<Node> nodes_;
};

inline constexpr double kTabulatedPartitionError = 1e-9;
inline constexpr int kMostPartitionNodes = 4097;

}  // namespace trotline
