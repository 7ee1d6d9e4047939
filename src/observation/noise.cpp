#include <trotline/observation/noise.hpp>

#include "legendre.hpp"

namespace trotline {
namespace {

constexpr Eigen::Index kBlock = 512;
constexpr Eigen::Index kFewest = 32;  ///< channels of a block that say something
constexpr Eigen::Index kMostLags = 64;
constexpr int kOrder = 3;
constexpr double kClip = 4.0;
constexpr double kScatters = 1.7;

/// The residuals of one block after its polynomial; NaN where there is none.
Eigen::ArrayXd detrended(const Eigen::ArrayXd& values) {
  std::vector<Eigen::Index> used;
  for (Eigen::Index i = 0; i < values.size(); ++i) {
    if (std::isfinite(values(i))) used.push_back(i);
  }
  Eigen::ArrayXd residual = Eigen::ArrayXd::Constant(values.size(), std::numeric_limits<double>::quiet_NaN());
  for (int pass = 0; pass < 3 && static_cast<Eigen::Index>(used.size()) >= kFewest; ++pass) {
    Eigen::MatrixXd basis(static_cast<Eigen::Index>(used.size()), kOrder + 1);
    Eigen::VectorXd y(basis.rows());
    for (Eigen::Index k = 0; k < basis.rows(); ++k) {
      const Eigen::Index i = used[static_cast<std::size_t>(k)];
      basis.row(k) =
          legendre_row(2.0 * static_cast<double>(i) / static_cast<double>(values.size() - 1) - 1.0, kOrder);
      y(k) = values(i);
    }
    const Eigen::VectorXd left = y - basis * (basis.transpose() * basis).ldlt().solve(basis.transpose() * y);
    const double limit =
        kClip * scaled_mad_about_zero(std::vector<double>(left.data(), left.data() + left.size()));
    std::vector<Eigen::Index> kept;
    residual.setConstant(std::numeric_limits<double>::quiet_NaN());
    for (Eigen::Index k = 0; k < left.size(); ++k) {
      if (!(std::abs(left(k)) <= limit)) continue;
      kept.push_back(used[static_cast<std::size_t>(k)]);
      residual(kept.back()) = left(k);
    }
    if (kept.size() == used.size()) break;
    used = std::move(kept);
  }
  return residual;
}

/// Sums of products at each lag, over all blocks, each block weighing by its number of channels.
struct Autocovariance {
  Eigen::ArrayXd sum = Eigen::ArrayXd::Zero(kMostLags + 1);
  Eigen::ArrayXd weight = Eigen::ArrayXd::Zero(kMostLags + 1);
  double channels = 0.0;
  double blocks = 0.0;

  void add(const Eigen::ArrayXd& residual) {
    const Eigen::ArrayXd present = residual.isFinite().cast<double>();
    const Eigen::ArrayXd filled = residual.isFinite().select(residual, 0.0);
    const double n = present.sum();
    const double variance = n > 0.0 ? filled.square().sum() / n : 0.0;
    if (n < static_cast<double>(kFewest) || !(variance > 0.0)) return;
    channels += n;
    blocks += 1.0;
    const Eigen::Index lags = std::min(kMostLags, residual.size() - 1);
    for (Eigen::Index k = 0; k <= lags; ++k) {
      const Eigen::Index pairs = residual.size() - k;
      sum(k) += (filled.head(pairs) * filled.tail(pairs)).sum() / variance;
      weight(k) += (present.head(pairs) * present.tail(pairs)).sum();
    }
  }
};

/// Lags that belong to the correlation, and what the polynomials took from each of them.
struct Extent {
  Eigen::Index lags = 0;
  double lost = 0.0;
};

/// A polynomial with p coefficients takes S p / n from every lag, S the sum of the true autocovariance over
/// all lags: it is put back with the sum over the lags that are known so far. A lag beyond the true ones
/// scatters by sqrt((1 + 2 sum rho^2) / n), the sum over the lags before (Bartlett 1946, Suppl. J. R. Stat.
/// Soc. 8, 27); two in a row within twice that end the correlation.
Extent extent_of(const Eigen::ArrayXd& raw, double channels, double p_over_n) {
  double raw_sum = raw(0);
  double squares = 1.0;
  Extent extent;
  for (Eigen::Index k = 1; k < raw.size(); ++k) {
    const double shrink = std::max(0.2, 1.0 - (2.0 * static_cast<double>(k) - 1.0) * p_over_n);
    extent = {k - 1, std::max(0.0, raw_sum / shrink * p_over_n)};
    const double threshold = kScatters * std::sqrt(squares / channels);
    const double here = raw(k) + extent.lost;
    if (k + 1 < raw.size() && std::abs(here) < threshold && std::abs(raw(k + 1) + extent.lost) < threshold)
      return extent;
    raw_sum += 2.0 * raw(k);
    squares += 2.0 * here * here;
  }
  extent.lags = raw.size() - 1;
  return extent;
}

NoiseCorrelation correlation_of(const Autocovariance& measured) {
  NoiseCorrelation result;
  if (measured.blocks == 0.0) return result;
  const Eigen::ArrayXd raw = measured.sum / measured.weight.max(1.0);
  const double p_over_n = (kOrder + 1.0) * measured.blocks / measured.channels;
  const Extent extent = extent_of(raw, measured.channels, p_over_n);
  result.rho = (raw.head(extent.lags + 1) + extent.lost) / (raw(0) + extent.lost);
  result.channels = static_cast<std::size_t>(measured.channels);
  result.reaches_limit = extent.lags == kMostLags;
  return result;
}

}  // namespace

double NoiseCorrelation::channels_per_independent_one() const { return 2.0 * rho.sum() - 1.0; }

double NoiseCorrelation::scatter_of_variance(std::size_t measured) const {
  double scatter = 0.0;
  if (measured > 0) scatter = 2.0 * (2.0 * rho.square().sum() - 1.0) / static_cast<double>(measured);
  const auto lags = static_cast<double>(rho.size() - 1);
  if (channels > 0 && lags > 0.0) scatter += 2.0 * (2.0 * lags + 1.0) / static_cast<double>(channels);
  return scatter;
}

double NoiseCorrelation::covariance_of(const Eigen::Ref<const Eigen::VectorXd>& a,
                                       const Eigen::Ref<const Eigen::VectorXd>& b) const {
  double total = a.dot(b);
  const Eigen::Index n = a.size();
  for (Eigen::Index k = 1; k < std::min(rho.size(), n); ++k) {
    total += rho(k) * (a.head(n - k).dot(b.tail(n - k)) + a.tail(n - k).dot(b.head(n - k)));
  }
  return total;
}

double NoiseCorrelation::variance_of(const Eigen::Ref<const Eigen::VectorXd>& weights) const {
  // An estimated autocorrelation need not be that of any noise, and might give a negative variance for
  // weights that change sign from channel to channel.
  constexpr double kLeastShare = 0.02;
  return std::max(covariance_of(weights, weights), kLeastShare * weights.squaredNorm());
}

NoiseCorrelation estimate_noise_correlation(const Eigen::Ref<const Eigen::ArrayXd>& intensity,
                                            const std::vector<bool>& excluded) {
  Autocovariance total;
  const Eigen::Index n = intensity.size();
  const Eigen::Index blocks = std::max<Eigen::Index>(1, n / kBlock);
  for (Eigen::Index block = 0; block < blocks; ++block) {
    const Eigen::Index begin = n * block / blocks;
    const Eigen::Index end = n * (block + 1) / blocks;
    Eigen::ArrayXd values = intensity.segment(begin, end - begin);
    for (Eigen::Index i = begin; i < end; ++i) {
      if (excluded[static_cast<std::size_t>(i)]) values(i - begin) = std::numeric_limits<double>::quiet_NaN();
    }
    if (values.size() >= kFewest) total.add(detrended(values));
  }
  return correlation_of(total);
}

double median_in_place(std::vector<double>& values) {
  if (values.empty()) return std::numeric_limits<double>::quiet_NaN();
  const auto middle = values.begin() + static_cast<std::ptrdiff_t>(values.size() / 2);
  std::nth_element(values.begin(), middle, values.end());
  if (values.size() % 2 == 1) return *middle;
  return 0.5 * (*middle + *std::max_element(values.begin(), middle));
}

double scaled_mad_about_zero(std::vector<double> values) {
  constexpr double kSigmaPerMad = 1.482602218505602;  // 1 / Phi^-1(3/4)
  for (double& value : values) value = std::abs(value);
  return kSigmaPerMad * median_in_place(values);
}

}  // namespace trotline
