#include "column_scan.hpp"

#include <algorithm>
#include <cmath>
#include <iterator>

#include "diagram_results.hpp"

namespace trotline {
namespace {

/// The likelihood of ln N at one temperature, looked at over the whole of its range.
class ColumnScan {
 public:
  explicit ColumnScan(const ModelSetup& setup)
      : likelihood_(*setup.model, setup.problem), workspace_(likelihood_.workspace()), free_(1) {
    low_ = likelihood_.lower_bounds()[0];
    high_ = likelihood_.upper_bounds()[0];
    best_ = low_;
    best_cost_ = cost(low_);
    for (int i = 1; i <= kSteps; ++i) consider(low_ + (high_ - low_) * i / kSteps);
    for (double step = (high_ - low_) / kSteps; step > 1e-9; step *= 0.5) {
      consider(best_ - step);
      consider(best_ + step);
    }
  }

  [[nodiscard]] double best() const { return best_; }
  [[nodiscard]] double best_cost() const { return best_cost_; }
  [[nodiscard]] double detection() { return 2.0 * (cost(low_) - best_cost_); }

  /// Standard error of ln N from the second difference of the cost.
  [[nodiscard]] double sigma() {
    constexpr double kStep = 1e-3;
    const double second = (cost(best_ + kStep) - 2.0 * best_cost_ + cost(best_ - kStep)) / (kStep * kStep);
    return second > 0.0 ? 1.0 / std::sqrt(second) : kNotKnown;
  }

  /// The ln N above the best one at which the cost has grown by `rise`; NaN where it never does.
  [[nodiscard]] double upper(double rise) {
    if (cost(high_) - best_cost_ < rise) return kNotKnown;
    double inside = best_;
    double outside = high_;
    while (outside - inside > 1e-9) {
      const double middle = 0.5 * (inside + outside);
      (cost(middle) - best_cost_ < rise ? inside : outside) = middle;
    }
    return outside;
  }

  [[nodiscard]] bool only_limits() const { return likelihood_.measured_count() == 0; }

 private:
  static constexpr int kSteps = 100;
  double cost(double ln_column) {
    free_[0] = ln_column;
    return likelihood_.cost(free_, workspace_);
  }
  void consider(double ln_column) {
    if (ln_column < low_ || ln_column > high_) return;
    const double here = cost(ln_column);
    if (here >= best_cost_) return;
    best_ = ln_column;
    best_cost_ = here;
  }

  IntensityLikelihood likelihood_;
  LikelihoodWorkspace workspace_;
  Eigen::VectorXd free_;
  double low_;
  double high_;
  double best_;
  double best_cost_;
};

ColumnAtTemperature column_at(const ModelSetup& setup, double temperature_k) {
  constexpr double kDetected = 9.0;    // 3 sigma
  constexpr double kRise = 1.3527;     // half of 1.645^2: one-sided 95 % for measurements [Wilks1938]
  constexpr double kSilence = 2.9957;  // -ln 0.05: the chance that noise hides the lines is 5 %
  ColumnScan scan(setup);
  ColumnAtTemperature row{temperature_k, kNotKnown, kNotKnown, false};
  if (!scan.only_limits() && scan.detection() >= kDetected) {
    row.column_density_cm2 = std::exp(scan.best());
    row.error_cm2 = row.column_density_cm2 * scan.sigma();
    return row;
  }
  row.upper_limit = true;
  const double rise = scan.only_limits() ? kSilence - scan.best_cost() : kRise;
  row.column_density_cm2 = std::exp(scan.upper(rise));
  return row;
}

std::vector<double> temperatures_to_list(const RunOptions& options) {
  if (options.temperature_k) return {*options.temperature_k};
  if (!options.temperature_range_k) return {std::begin(kListedTemperaturesK), std::end(kListedTemperaturesK)};
  constexpr int kCount = 7;
  std::vector<double> temperatures;
  const double low = std::max(options.temperature_range_k->low, 1.0);
  for (int i = 0; i < kCount; ++i) {
    temperatures.push_back(low * std::pow(options.temperature_range_k->high / low, i / (kCount - 1.0)));
  }
  return temperatures;
}

}  // namespace

void list_columns(Result& result, const std::vector<PreparedLine>& lines, const Species& species,
                  const RunOptions& options, const ModelKind& kind) {
  RunOptions single = options;
  if (options.source_size_free) {
    result.warnings.push_back("the size cannot be fitted: N is listed for a source that fills every beam");
    single.source_size_free = false;
  }
  single.background_free = false;
  single.column_density_per_cm2.reset();
  single.temperature_range_k.reset();
  ModelKind one = kind;
  one.components = 1;
  one.isomers_apart = false;
  for (const double temperature_k : temperatures_to_list(options)) {
    const bool inside = temperature_k > 1.05 * options.background_k &&
                        temperature_k >= species.partition->lowest_k() &&
                        temperature_k <= species.partition->highest_k();
    if (!inside) continue;
    single.temperature_k = temperature_k;
    result.columns_at_temperatures.push_back(
        column_at(set_up_model(lines, species, single, one), temperature_k));
  }
}

}  // namespace trotline
