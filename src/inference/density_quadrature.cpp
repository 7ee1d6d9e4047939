#include <algorithm>
#include <array>
#include <cmath>
#include <limits>

#include <trotline/base/errors.hpp>
#include <trotline/inference/density_quadrature.hpp>

namespace trotline {
namespace {

constexpr double kStepSigma = 0.5;          // spacing of the nodes in standard errors
constexpr double kWidestStep = 0.5;         // of a parameter that the curvature leaves loose
constexpr double kMostDisagreement = 3e-3;  // of sums over every node and every other
constexpr int kMostHalvings = 8;
constexpr double kMostOrderDifference = 5e-3;  // of ln_total between orders of the parameters
constexpr double kNothing = -std::numeric_limits<double>::infinity();

using Point = std::array<double, kMostQuadratureParameters>;

/// The integral over the inner parameters at one place of the outer ones.
struct Slice {
  double ln_mass = kNothing;
  Point mean{};  ///< of the inner parameters, by their number
  Point peak{};  ///< the node of largest density
  double ln_peak = kNothing;
};

/// Nodes of one line that lie side by side: numbers first, first + 1 ...
struct Run {
  int first = 0;
  std::vector<Slice> slices;

  [[nodiscard]] int last() const { return first + static_cast<int>(slices.size()) - 1; }
};

/// Nodes of one line: value = anchor + number * step.
struct Line {
  double anchor = 0.0;
  double step = 0.0;
  bool at_lower = false;  ///< the density reaches the bound
  bool at_upper = false;
  bool resolved = true;
  std::vector<Run> runs;

  [[nodiscard]] double value(int number) const { return anchor + number * step; }
};

class NestedSums {
 public:
  /// @param order  parameters, outermost first
  NestedSums(const BoundedDensity& density, std::vector<Eigen::Index> order)
      : density_(density), order_(std::move(order)), point_(density.lower.size()) {
    for (std::size_t level = 0; level < order_.size(); ++level) steps_.push_back(step_of(level));
  }

  Line outermost() {
    std::vector<Point> seeds;
    for (const Eigen::VectorXd& peak : density_.peaks) {
      Point seed{};
      std::copy(peak.begin(), peak.end(), seed.begin());
      seeds.push_back(seed);
    }
    return line(0, seeds);
  }

  [[nodiscard]] Slice total(const Line& line) const { return summed(line, 0); }
  [[nodiscard]] std::int64_t evaluations() const { return evaluations_; }
  [[nodiscard]] bool resolved() const { return resolved_; }

 private:
  /// Half a standard error of the parameter, given those outside of it.
  [[nodiscard]] double step_of(std::size_t level) const {
    const std::vector<Eigen::Index> inner(order_.begin() + static_cast<std::ptrdiff_t>(level), order_.end());
    const Eigen::MatrixXd part = density_.information(inner, inner);
    const Eigen::LLT<Eigen::MatrixXd> cholesky(part);
    double step = kWidestStep;
    if (part.allFinite() && cholesky.info() == Eigen::Success) {
      const Eigen::VectorXd unit = Eigen::VectorXd::Unit(part.rows(), 0);
      step = std::min(step, kStepSigma * std::sqrt(cholesky.solve(unit)[0]));
    }
    const double span = density_.upper[order_[level]] - density_.lower[order_[level]];
    return std::isfinite(span) ? std::min(step, 0.1 * span) : step;
  }

  Slice slice(std::size_t level, const std::vector<Point>& seeds) {
    if (level == order_.size()) {
      ++evaluations_;
      Slice result;
      const double cost = density_.cost(point_);
      result.ln_mass = result.ln_peak = std::isfinite(cost) ? -cost : kNothing;
      return result;
    }
    Line nodes = line(level, seeds);
    resolved_ = resolved_ && nodes.resolved;
    return summed(nodes, level);
  }

  Slice slice_at(std::size_t level, double value, std::vector<Point>& seeds) {
    point_[order_[level]] = value;
    Slice result = slice(level + 1, seeds);
    result.peak[static_cast<std::size_t>(order_[level])] = value;
    if (std::isfinite(result.ln_peak)) seeds.front() = result.peak;
    return result;
  }

  /// Finds where the density lies along a line, then sets nodes closer until the sum stands.
  Line line(std::size_t level, const std::vector<Point>& seeds) {
    const auto which = static_cast<std::size_t>(order_[level]);
    const double lower = density_.lower[order_[level]];
    const double upper = density_.upper[order_[level]];
    Line nodes;
    nodes.step = steps_[level];
    nodes.anchor = std::clamp(seeds.front()[which], lower, upper);
    for (int halvings = 0;; ++halvings) {
      grow(nodes, level, seeds);
      if (nodes.at_lower || nodes.at_upper) {  // put nodes on the bounds that cut
        if (halvings == 0) nodes.step *= 0.5;  // end weights are of fourth order only
        if (nodes.at_lower && nodes.at_upper)
          nodes.step = (upper - lower) / std::ceil((upper - lower) / nodes.step);
        nodes.anchor = nodes.at_lower ? lower : upper;
        grow(nodes, level, seeds);
      }
      if (!nodes.resolved || is_resolved(nodes)) return nodes;
      if (halvings == kMostHalvings) break;
      nodes.step *= 0.5;
    }
    nodes.resolved = false;
    return nodes;
  }

  void grow(Line& nodes, std::size_t level, const std::vector<Point>& seeds) {
    nodes.runs.clear();
    nodes.resolved = true;
    const bool was_lower = nodes.at_lower;
    const bool was_upper = nodes.at_upper;
    nodes.at_lower = nodes.at_upper = false;
    double highest = kNothing;
    for (std::size_t s = 0; s < seeds.size(); ++s) {
      std::vector<Point> own{seeds[s]};
      own.insert(own.end(), seeds.begin(), seeds.end());
      if (seeds.size() == 1) own.resize(1);
      grow_from(nodes, level, own, highest);
    }
    // A bound that was met before stays met, so that the nodes on it do not come and go.
    nodes.at_lower = nodes.at_lower || was_lower;
    nodes.at_upper = nodes.at_upper || was_upper;
    std::sort(nodes.runs.begin(), nodes.runs.end(),
              [](const Run& a, const Run& b) { return a.first < b.first; });
  }

  [[nodiscard]] static bool is_known(const Line& nodes, int number) {
    return std::any_of(nodes.runs.begin(), nodes.runs.end(),
                       [&](const Run& run) { return number >= run.first && number <= run.last(); });
  }

  void grow_from(Line& nodes, std::size_t level, const std::vector<Point>& seeds, double& highest) {
    const auto which = static_cast<std::size_t>(order_[level]);
    const double lower = density_.lower[order_[level]];
    const double upper = density_.upper[order_[level]];
    const double slack = 1e-9 * nodes.step;
    const double start = std::clamp(seeds.front()[which], lower, upper);
    int middle = static_cast<int>(std::lround((start - nodes.anchor) / nodes.step));
    while (nodes.value(middle) > upper + slack) --middle;
    while (nodes.value(middle) < lower - slack) ++middle;
    if (is_known(nodes, middle)) return;
    std::vector<Point> upward = seeds;
    Run run;
    run.slices.push_back(slice_at(level, nodes.value(middle), upward));
    highest = std::max(highest, run.slices.front().ln_mass);
    const auto extend = [&](int direction, std::vector<Point> track, std::vector<Slice>& found) {
      double before = run.slices.front().ln_mass;
      for (int number = middle + direction;; number += direction) {
        const double value = nodes.value(number);
        if (value > upper + slack) return void(nodes.at_upper = true);
        if (value < lower - slack) return void(nodes.at_lower = true);
        if (is_known(nodes, number)) return;
        if (found.size() > kMostNodes) return void(nodes.resolved = false);
        found.push_back(slice_at(level, value, track));
        const double here = found.back().ln_mass;
        highest = std::max(highest, here);
        if (here < highest - kLnDensityDrop && here <= before) return;
        before = here;
      }
    };
    std::vector<Slice> above;
    std::vector<Slice> below;
    extend(+1, upward, above);
    extend(-1, upward, below);
    run.first = middle - static_cast<int>(below.size());
    run.slices.insert(run.slices.begin(), below.rbegin(), below.rend());
    run.slices.insert(run.slices.end(), above.begin(), above.end());
    nodes.runs.push_back(std::move(run));
  }

  /// Gregory's weight of a node that is `from_end` nodes from an end where the density is cut.
  [[nodiscard]] static double end_weight(int from_end) {
    constexpr std::array<double, 3> kWeights = {3.0 / 8.0, 7.0 / 6.0, 23.0 / 24.0};
    return from_end < 3 ? kWeights[static_cast<std::size_t>(from_end)] : 1.0;
  }

  [[nodiscard]] static bool is_resolved(const Line& nodes) {
    double highest = kNothing;
    int count = 0;
    for (const Run& run : nodes.runs) {
      for (const Slice& s : run.slices) {
        highest = std::max(highest, s.ln_mass);
        ++count;
      }
    }
    if (!std::isfinite(highest)) return true;
    if (count < 9) return false;
    std::array<double, 2> sums{};
    for (const Run& run : nodes.runs) {
      for (int number = run.first; number <= run.last(); ++number) {
        const double mass =
            std::exp(run.slices[static_cast<std::size_t>(number - run.first)].ln_mass - highest);
        const bool cut = (nodes.at_lower && &run == &nodes.runs.front() && number == run.first) ||
                         (nodes.at_upper && &run == &nodes.runs.back() && number == run.last());
        sums[static_cast<std::size_t>(number & 1)] += cut ? 0.5 * mass : mass;
      }
    }
    // At a cut the plain sums differ by some h^2/12 of the slope, which the end weights take away.
    const double total = sums[0] + sums[1];
    const bool cut = nodes.at_lower || nodes.at_upper;
    return std::abs(sums[0] - sums[1]) <= (cut ? 10.0 : 1.0) * kMostDisagreement * total;
  }

  [[nodiscard]] Slice summed(const Line& nodes, std::size_t level) const {
    Slice total;
    for (const Run& run : nodes.runs) {
      for (const Slice& s : run.slices) {
        if (s.ln_peak > total.ln_peak) {
          total.peak = s.peak;
          total.ln_peak = s.ln_peak;
        }
        total.ln_mass = std::max(total.ln_mass, s.ln_mass);
      }
    }
    if (!std::isfinite(total.ln_mass)) return total;
    const double highest = total.ln_mass;
    double mass = 0.0;
    for (const Run& run : nodes.runs) {
      for (int number = run.first; number <= run.last(); ++number) {
        const Slice& s = run.slices[static_cast<std::size_t>(number - run.first)];
        double share = std::exp(s.ln_mass - highest);
        if (nodes.at_lower && &run == &nodes.runs.front()) share *= end_weight(number - run.first);
        if (nodes.at_upper && &run == &nodes.runs.back()) share *= end_weight(run.last() - number);
        mass += share;
        total.mean[static_cast<std::size_t>(order_[level])] += share * nodes.value(number);
        for (std::size_t inner = level + 1; inner < order_.size(); ++inner) {
          const auto k = static_cast<std::size_t>(order_[inner]);
          total.mean[k] += share * s.mean[k];
        }
      }
    }
    for (std::size_t inner = level; inner < order_.size(); ++inner) {
      total.mean[static_cast<std::size_t>(order_[inner])] /= mass;
    }
    total.ln_mass = highest + std::log(mass * nodes.step);
    return total;
  }

  const BoundedDensity& density_;
  std::vector<Eigen::Index> order_;
  std::vector<double> steps_;
  Eigen::VectorXd point_;
  std::int64_t evaluations_ = 0;
  bool resolved_ = true;
};

void require(const BoundedDensity& density) {
  const Eigen::Index size = density.lower.size();
  if (size < 1 || size > kMostQuadratureParameters) {
    throw DomainError("parameters", static_cast<double>(size), "1 to 3; more are for the sampler");
  }
  if (density.upper.size() != size || density.information.rows() != size ||
      density.information.cols() != size) {
    throw DomainError("upper, information", static_cast<double>(density.upper.size()),
                      "of the size of lower");
  }
  if (!(density.lower.array() < density.upper.array()).all())
    throw DomainError("lower", density.lower[0], "below upper");
  if (density.peaks.empty()) throw DomainError("peaks.size()", 0.0, "at least 1");
  for (const Eigen::VectorXd& peak : density.peaks) {
    if (peak.size() != size)
      throw DomainError("peak.size()", static_cast<double>(peak.size()), "of the size of lower");
    if (!std::isfinite(density.cost(peak))) throw DomainError("peak", peak[0], "where cost is finite");
  }
}

/// ln of the density at the nodes of a line from its first to its last, nothing in the gaps.
Eigen::VectorXd ln_densities(const Line& line) {
  const int first = line.runs.front().first;
  Eigen::VectorXd ln = Eigen::VectorXd::Constant(line.runs.back().last() - first + 1, kNothing);
  for (const Run& run : line.runs) {
    for (int number = run.first; number <= run.last(); ++number) {
      ln[number - first] = run.slices[static_cast<std::size_t>(number - run.first)].ln_mass;
    }
  }
  return ln;
}

MarginalDensity marginal_of_line(const Line& line) {
  const Eigen::VectorXd ln = ln_densities(line);
  MarginalDensity marginal = marginal_of(line.value(line.runs.front().first), line.step, ln);
  const double seen = ln.maxCoeff() + std::log(kCutDensity);
  marginal.cut_low = line.at_lower && ln[0] > seen;
  marginal.cut_high = line.at_upper && ln[ln.size() - 1] > seen;
  return marginal;
}

/// Row k of the covariance, k outermost: means of the others along the line.
Eigen::VectorXd covariance_row(const Line& line, Eigen::Index k, const Slice& total, Eigen::Index size) {
  Eigen::VectorXd row = Eigen::VectorXd::Zero(size);
  double mass = 0.0;
  for (const Run& run : line.runs) {
    for (int number = run.first; number <= run.last(); ++number) {
      const Slice& s = run.slices[static_cast<std::size_t>(number - run.first)];
      const double share = std::exp(s.ln_mass - total.ln_mass);
      const double off = line.value(number) - total.mean[static_cast<std::size_t>(k)];
      mass += share;
      for (Eigen::Index j = 0; j < size; ++j) {
        const auto other = static_cast<std::size_t>(j);
        row[j] += share * off * (j == k ? off : s.mean[other] - total.mean[other]);
      }
    }
  }
  return row / mass;
}

}  // namespace

DensityIntegral integrate_density(const BoundedDensity& density) {
  require(density);
  const Eigen::Index size = density.lower.size();
  DensityIntegral result;
  result.usable = true;
  result.mean.resize(size);
  result.covariance.resize(size, size);
  for (Eigen::Index k = 0; k < size; ++k) {
    std::vector<Eigen::Index> order{k};
    for (Eigen::Index j = size - 1; j >= 0; --j) {
      if (j != k) order.push_back(j);
    }
    NestedSums sums(density, order);
    const Line line = sums.outermost();
    const Slice total = sums.total(line);
    result.evaluations += sums.evaluations();
    result.usable = result.usable && sums.resolved() && line.resolved && std::isfinite(total.ln_mass);
    if (!result.usable) return result;
    // A branch that one order of the parameters misses, another one may not.
    if (k > 0 && std::abs(total.ln_mass - result.ln_total) > kMostOrderDifference) {
      result.usable = false;
      return result;
    }
    result.ln_total = total.ln_mass;
    result.mean[k] = total.mean[static_cast<std::size_t>(k)];
    result.covariance.row(k) = covariance_row(line, k, total, size);
    result.marginals.push_back(marginal_of_line(line));
  }
  result.covariance = (0.5 * (result.covariance + result.covariance.transpose())).eval();
  return result;
}

}  // namespace trotline
