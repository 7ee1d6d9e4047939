#include "start_states.hpp"

#include <algorithm>
#include <cmath>

namespace trotline {
namespace {

constexpr int kTemperaturesOfOne = 24;  // of one component
constexpr int kTemperaturesOfMore = 8;  // of each of several
constexpr int kSizes = 4;
constexpr double kOpaqueSteps[] = {0.0, 1.5, 3.0, 5.0, 8.0, 12.0};  // e-folds of N above the thin estimate
constexpr double kThinLnColumn = 11.5;                              // 1e5 cm^-2: no line is opaque
constexpr int kColumnSteps = 3;
constexpr double kAlike = 0.3;  // starts nearer than this in every entry (e-folds) are one

struct Start {
  Eigen::VectorXd free;
  double cost;
};

/// Even steps inside [low, high], half a step off the ends.
std::vector<double> spread(double low, double high, int count) {
  std::vector<double> values;
  for (int i = 0; i < count; ++i) values.push_back(low + (high - low) * (i + 0.5) / count);
  return values;
}

/// Free entries sorted by what they are.
class StartGrid {
 public:
  StartGrid(const IntensityLikelihood& likelihood, LikelihoodWorkspace& workspace)
      : likelihood_(likelihood), workspace_(workspace), base_(likelihood.free_count()) {
    const StateLayout& layout = likelihood.model().layout();
    lower_ = likelihood.lower_bounds();
    upper_ = likelihood.upper_bounds();
    for (Eigen::Index k = 0; k < base_.size(); ++k) {
      const int entry = likelihood.free_entries()[static_cast<std::size_t>(k)];
      base_[k] = std::clamp(likelihood.problem().parameters[static_cast<std::size_t>(entry)].value, lower_[k],
                            upper_[k]);
      if (entry == layout.background()) continue;
      const int place = entry % (layout.isomers + 2);
      if (place < layout.isomers) {
        columns_.push_back(k);
      } else if (place == layout.isomers) {
        temperatures_.push_back(k);
      } else {
        sizes_.push_back(k);
      }
    }
  }

  [[nodiscard]] std::vector<Start> starts() {
    std::vector<Start> starts;
    for (const Eigen::VectorXd& shape : shapes()) {
      const Eigen::VectorXd thin = with_thin_columns(shape);
      for (const double opaque : kOpaqueSteps) {
        if (opaque > 0.0 && columns_.empty()) break;
        Eigen::VectorXd free = thin;
        for (const Eigen::Index k : columns_) free[k] = std::clamp(free[k] + opaque, lower_[k], upper_[k]);
        approach_columns(free);
        const double cost = likelihood_.cost(free, workspace_);
        if (std::isfinite(cost)) starts.push_back({free, cost});
      }
    }
    return starts;
  }

 private:
  /// All combinations of temperatures (rising from component to component) and sizes.
  [[nodiscard]] std::vector<Eigen::VectorXd> shapes() const {
    std::vector<Eigen::VectorXd> shapes{base_};
    const int temperatures = temperatures_.size() > 1 ? kTemperaturesOfMore : kTemperaturesOfOne;
    for (std::size_t t = 0; t < temperatures_.size(); ++t) {
      const Eigen::Index k = temperatures_[t];
      std::vector<Eigen::VectorXd> more;
      for (const Eigen::VectorXd& shape : shapes) {
        for (const double value : spread(lower_[k], upper_[k], temperatures)) {
          if (t > 0 && value <= shape[temperatures_[t - 1]]) continue;
          more.push_back(shape);
          more.back()[k] = value;
        }
      }
      shapes = more;
    }
    for (const Eigen::Index k : sizes_) {
      std::vector<Eigen::VectorXd> more;
      for (const Eigen::VectorXd& shape : shapes) {
        for (const double value : spread(lower_[k], upper_[k], kSizes)) {
          more.push_back(shape);
          more.back()[k] = value;
        }
      }
      shapes = more;
    }
    return shapes;
  }

  /// Column densities that fit best if all lines are thin: a linear problem.
  [[nodiscard]] Eigen::VectorXd with_thin_columns(const Eigen::VectorXd& shape) {
    if (columns_.empty()) return shape;
    Eigen::VectorXd free = shape;
    for (const Eigen::Index k : columns_) free[k] = kThinLnColumn;
    (void)likelihood_.linearise(free, workspace_);
    const auto count = static_cast<Eigen::Index>(columns_.size());
    Eigen::MatrixXd design(likelihood_.data_count(), count);
    Eigen::VectorXd observed(likelihood_.data_count());
    for (Eigen::Index i = 0; i < observed.size(); ++i) {
      const Measurement& datum = likelihood_.problem().data[static_cast<std::size_t>(i)];
      observed[i] = datum.is_limit ? 0.0 : datum.intensity_k_km_s / datum.sigma_k_km_s;
      for (Eigen::Index j = 0; j < count; ++j) {
        design(i, j) = workspace_.slopes(i, columns_[static_cast<std::size_t>(j)]) / datum.sigma_k_km_s;
      }
    }
    const Eigen::VectorXd scale = design.colwise().norm().cwiseMax(1e-300);
    design.array().rowwise() /= scale.transpose().array();
    Eigen::VectorXd amplitude = design.colPivHouseholderQr().solve(observed);
    // A column that would be negative starts at its share of the noise.
    const double least = std::max(1.0, 0.02 * amplitude.cwiseAbs().maxCoeff());
    for (Eigen::Index j = 0; j < count; ++j) {
      const Eigen::Index k = columns_[static_cast<std::size_t>(j)];
      free[k] = std::clamp(kThinLnColumn + std::log(std::max(amplitude[j], least) / scale[j]), lower_[k],
                           upper_[k]);
    }
    return free;
  }

  /// A few Gauss-Newton steps in the column densities alone.
  void approach_columns(Eigen::VectorXd& free) {
    if (columns_.empty()) return;
    const auto count = static_cast<Eigen::Index>(columns_.size());
    Eigen::MatrixXd design(likelihood_.residual_count(), count);
    for (int step = 0; step < kColumnSteps; ++step) {
      (void)likelihood_.linearise(free, workspace_);
      for (Eigen::Index j = 0; j < count; ++j) {
        design.col(j) = workspace_.jacobian.col(columns_[static_cast<std::size_t>(j)]);
      }
      const Eigen::MatrixXd normal =
          design.transpose() * design + 1e-12 * Eigen::MatrixXd::Identity(count, count);
      const Eigen::VectorXd change = normal.ldlt().solve(-design.transpose() * workspace_.residuals);
      if (!change.allFinite()) return;
      for (Eigen::Index j = 0; j < count; ++j) {
        const Eigen::Index k = columns_[static_cast<std::size_t>(j)];
        free[k] = std::clamp(free[k] + std::clamp(change[j], -1.5, 1.5), lower_[k], upper_[k]);
      }
    }
  }

  const IntensityLikelihood& likelihood_;
  LikelihoodWorkspace& workspace_;
  Eigen::VectorXd base_;
  Eigen::VectorXd lower_;
  Eigen::VectorXd upper_;
  std::vector<Eigen::Index> columns_;
  std::vector<Eigen::Index> temperatures_;
  std::vector<Eigen::Index> sizes_;
};

}  // namespace

std::vector<Eigen::VectorXd> start_states(const IntensityLikelihood& likelihood,
                                          LikelihoodWorkspace& workspace, int most) {
  std::vector<Start> starts = StartGrid(likelihood, workspace).starts();
  std::stable_sort(starts.begin(), starts.end(),
                   [](const Start& a, const Start& b) { return a.cost < b.cost; });
  std::vector<Eigen::VectorXd> kept;
  for (const Start& start : starts) {
    if (static_cast<int>(kept.size()) >= most) break;
    const bool known = std::any_of(kept.begin(), kept.end(), [&](const Eigen::VectorXd& other) {
      return (other - start.free).cwiseAbs().maxCoeff() < kAlike;
    });
    if (!known) kept.push_back(start.free);
  }
  return kept;
}

}  // namespace trotline
