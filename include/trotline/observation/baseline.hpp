#pragma once

#include <Eigen/Core>

#include <optional>
#include <vector>

#include <trotline/observation/noise.hpp>

namespace trotline {

/// What a baseline is fitted to: one value a channel of a region about a line.
struct BaselineData {
  Eigen::ArrayXd coordinate;  ///< of which the baseline is a polynomial; from -1 to 1 or so
  Eigen::ArrayXd intensity;   ///< NaN is a hole
};

/// A polynomial through the line-free channels about a line, or the average over polynomials of several
/// orders.
///
/// The polynomials are orthonormal on the line-free channels, so that an average over orders with weights w_p
/// is the polynomial of the highest order whose coefficient k is multiplied with the sum of w_p over p >= k.
/// Either way the baseline is a linear function of the data, and keeps what is needed to carry their noise
/// on: its part in a sum sum_i a_i B(i) is a sum of the data with other weights.
class Baseline {
 public:
  /// @param data      of the region
  /// @param channels  the line-free ones, rising, all finite
  /// @param order     0 and above, below the number of channels
  Baseline(const BaselineData& data, const std::vector<Eigen::Index>& channels, int order);

  /// Averages over orders. @param weights  of orders 0, 1, ... up to order(); their sum is 1
  void average(Eigen::VectorXd weights);

  [[nodiscard]] int order() const { return static_cast<int>(weights_.size()) - 1; }

  /// The order with the largest weight.
  [[nodiscard]] int most_probable_order() const;
  [[nodiscard]] const Eigen::VectorXd& weights() const { return weights_; }

  /// Of the polynomials that are orthonormal on the line-free channels, by rising order; before averaging.
  [[nodiscard]] const Eigen::VectorXd& coefficients() const { return coefficients_; }

  /// The baseline at every channel of the region.
  [[nodiscard]] Eigen::ArrayXd values() const;

  /// sum_i a_i P_k(i) over the region for each polynomial.
  [[nodiscard]] Eigen::VectorXd projections(const Eigen::Ref<const Eigen::VectorXd>& a) const;

  /// The orthonormal polynomials on the line-free channels, one a column, spread over the region.
  [[nodiscard]] const Eigen::MatrixXd& spread_basis() const { return spread_; }

  /// The sums of the weights of this order and those above.
  [[nodiscard]] const Eigen::VectorXd& shares() const { return shares_; }

 private:
  Eigen::VectorXd weights_;
  Eigen::VectorXd shares_;
  Eigen::MatrixXd spread_;
  Eigen::MatrixXd everywhere_;  ///< the polynomials at all channels of the region
  Eigen::VectorXd coefficients_;
};

/// What is left after a baseline, and how noisy it is.
struct BaselineFit {
  Baseline baseline;
  std::vector<Eigen::Index> channels;  ///< line-free channels that were kept
  double rms =
      0.0;  ///< standard deviation of the noise of one channel, for the coefficients taken away corrected
  double rms_mad = 0.0;  ///< the same from the median absolute deviation
};

struct BaselineOptions {
  std::optional<int>
      order;  ///< nothing: averaged over orders, each weighing as the data ask for it
  int highest_order = 5;  ///< of the automatic choice
};

/// Fits a baseline and throws out outliers beyond 4 times the scaled median absolute deviation (lines that
/// nobody listed, spikes). @return nothing where fewer than 8 channels, or fewer than 3 a coefficient, are
/// left
[[nodiscard]] std::optional<BaselineFit> fit_baseline(const BaselineData& data,
                                                      const std::vector<Eigen::Index>& line_free,
                                                      const NoiseCorrelation& correlation,
                                                      const BaselineOptions& options);

}  // namespace trotline
