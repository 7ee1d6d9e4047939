#include <trotline/observation/baseline.hpp>

#include "legendre.hpp"

namespace trotline {
namespace {

constexpr std::size_t kFewestChannels = 8;
constexpr std::size_t kChannelsACoefficient = 3;
constexpr double kClip = 4.0;

bool are_enough(std::size_t channels, int order) {
  return channels >= kFewestChannels &&
         channels >= kChannelsACoefficient * (static_cast<std::size_t>(order) + 1);
}

Eigen::ArrayXd residuals(const BaselineData& data, const Baseline& baseline,
                         const std::vector<Eigen::Index>& channels) {
  const Eigen::ArrayXd values = baseline.values();
  Eigen::ArrayXd left(static_cast<Eigen::Index>(channels.size()));
  for (Eigen::Index k = 0; k < left.size(); ++k) {
    const Eigen::Index i = channels[static_cast<std::size_t>(k)];
    left(k) = data.intensity(i) - values(i);
  }
  return left;
}

double mad_of(const Eigen::ArrayXd& left) {
  return scaled_mad_about_zero(std::vector<double>(left.data(), left.data() + left.size()));
}

/// Standard deviation of a channel: the fit takes trace(H R) channels away, H its projection and R the
/// correlation.
double rms_from(const Eigen::ArrayXd& left, const Baseline& baseline, const NoiseCorrelation& correlation) {
  double lost = 0.0;
  for (Eigen::Index k = 0; k < baseline.spread_basis().cols(); ++k) {
    lost += correlation.variance_of(baseline.spread_basis().col(k));
  }
  const auto n = static_cast<double>(left.size());
  return std::sqrt(left.square().sum() / std::max(n - lost, 0.25 * n));
}

BaselineFit finished(const BaselineData& data, Baseline baseline, std::vector<Eigen::Index> channels,
                     const NoiseCorrelation& correlation) {
  const Eigen::ArrayXd left = residuals(data, baseline, channels);
  const double rms = rms_from(left, baseline, correlation);
  return BaselineFit{std::move(baseline), std::move(channels), rms, mad_of(left)};
}

double limit_of(double mad) { return mad > 0.0 ? kClip * mad : std::numeric_limits<double>::infinity(); }

/// True for what lies beyond the limit. Three in a row on one side are no spike but a line that nobody listed:
/// its wings below the limit go too, as far again on both sides as the run is long.
std::vector<bool> outliers(const Eigen::ArrayXd& left, double limit) {
  constexpr Eigen::Index kLeastRun = 3;
  std::vector<bool> out(static_cast<std::size_t>(left.size()), false);
  for (Eigen::Index begin = 0; begin < left.size();) {
    Eigen::Index end = begin;
    const bool above = left(begin) > 0.0;
    while (end < left.size() && std::abs(left(end)) > limit && (left(end) > 0.0) == above) ++end;
    const Eigen::Index run = end - begin;
    const Eigen::Index wings = run >= kLeastRun ? run : 0;
    for (Eigen::Index i = std::max<Eigen::Index>(0, begin - wings); i < std::min(left.size(), end + wings); ++i) {
      if (run > 0) out[static_cast<std::size_t>(i)] = true;
    }
    begin = std::max(end, begin + 1);
  }
  return out;
}

bool has_feature(const std::vector<bool>& out) {
  constexpr std::ptrdiff_t kMany = 9;  // what a run of three takes with its wings
  return std::count(out.begin(), out.end(), true) >= kMany;
}

/// Residuals of a fit that lines nobody listed hardly pull: least squares with weights, first Huber's, then
/// Tukey's biweight (Maronna, Martin & Yohai 2006, Robust Statistics, sections 2.2 and 5.5).
Eigen::ArrayXd robust_residuals(const BaselineData& data, const std::vector<Eigen::Index>& channels, int order) {
  constexpr int kPasses = 20;
  constexpr double kBiweight = 4.685;
  const auto n = static_cast<Eigen::Index>(channels.size());
  Eigen::MatrixXd basis(n, order + 1);
  Eigen::VectorXd y(n);
  for (Eigen::Index k = 0; k < n; ++k) {
    const Eigen::Index channel = channels[static_cast<std::size_t>(k)];
    basis.row(k) = legendre_row(data.coordinate(channel), order);
    y(k) = data.intensity(channel);
  }
  Eigen::ArrayXd weights = Eigen::ArrayXd::Ones(n);
  Eigen::ArrayXd left = y.array();
  for (int pass = 0; pass < kPasses; ++pass) {
    const Eigen::MatrixXd weighted = weights.matrix().asDiagonal() * basis;
    left = (y - basis * (weighted.transpose() * basis).ldlt().solve(weighted.transpose() * y)).array();
    const Eigen::ArrayXd t = left.abs() / std::max(mad_of(left), std::numeric_limits<double>::min());
    weights = pass < kPasses / 2 ? Eigen::ArrayXd(1.0 / t.max(1.0))
                                 : Eigen::ArrayXd((1.0 - (t / kBiweight).square()).max(0.0).square());
  }
  return left;
}

/// Clips and refits until nothing changes.
std::optional<BaselineFit> fit_order(const BaselineData& data, std::vector<Eigen::Index> channels,
                                     const NoiseCorrelation& correlation, int order) {
  constexpr int kMostPasses = 6;
  for (int pass = 0; are_enough(channels.size(), order); ++pass) {
    Baseline baseline(data, channels, order);
    const Eigen::ArrayXd left = residuals(data, baseline, channels);
    const double mad = mad_of(left);
    std::vector<bool> out = outliers(left, limit_of(mad));
    if (pass == 0 && has_feature(out)) {
      const Eigen::ArrayXd robust = robust_residuals(data, channels, order);
      out = outliers(robust, limit_of(mad_of(robust)));
    }
    std::vector<Eigen::Index> kept;
    for (std::size_t i = 0; i < channels.size(); ++i) {
      if (!out[i]) kept.push_back(channels[i]);
    }
    if (kept.size() == channels.size() || pass == kMostPasses) {
      return finished(data, std::move(baseline), std::move(channels), correlation);
    }
    channels = std::move(kept);
  }
  return std::nullopt;
}

/// Weights of the orders by their likelihood, exp(-C / 2) with C = n ln(S_p / n), n the number of independent
/// channels and S_p the sum of squares that is left. All orders are compared on the channels that the highest
/// one keeps, where leaving a polynomial out adds the square of its coefficient to the sum. A coefficient costs
/// nothing, unlike with Akaike's criterion (2) or the Bayesian one (ln n): those drop coefficients that do not
/// show in the baseline but change the window that it crosses, and errors came out too small by up to 7 % with
/// a cost of 1. What it takes is sensitivity, up to a third where a flat baseline crosses a wide window; who
/// knows the order states it.
Eigen::VectorXd weights_of_orders(const BaselineFit& highest, const BaselineData& data,
                                  const NoiseCorrelation& correlation) {
  const auto n = static_cast<double>(highest.channels.size());
  const double independent = std::max(2.0, n / std::max(1.0, correlation.channels_per_independent_one()));
  double sum = residuals(data, highest.baseline, highest.channels).square().sum();
  Eigen::VectorXd criterion(highest.baseline.order() + 1);
  for (int order = highest.baseline.order(); order >= 0; --order) {
    const double floor = std::numeric_limits<double>::min();  // data without any noise
    criterion(order) = independent * std::log(std::max(sum, floor) / n);
    const double coefficient = highest.baseline.coefficients()(order);
    sum += coefficient * coefficient;
  }
  const Eigen::ArrayXd weights = (-0.5 * (criterion.array() - criterion.minCoeff())).exp();
  return weights / weights.sum();
}

}  // namespace

Baseline::Baseline(const BaselineData& data, const std::vector<Eigen::Index>& channels, int order)
    : weights_(Eigen::VectorXd::Unit(order + 1, order)), shares_(Eigen::VectorXd::Ones(order + 1)) {
  const auto n = static_cast<Eigen::Index>(channels.size());
  Eigen::MatrixXd legendre(data.coordinate.size(), order + 1);
  for (Eigen::Index i = 0; i < data.coordinate.size(); ++i) {
    legendre.row(i) = legendre_row(data.coordinate(i), order);
  }
  Eigen::MatrixXd on_channels(n, order + 1);
  Eigen::VectorXd y(n);
  for (Eigen::Index k = 0; k < n; ++k) {
    on_channels.row(k) = legendre.row(channels[static_cast<std::size_t>(k)]);
    y(k) = data.intensity(channels[static_cast<std::size_t>(k)]);
  }
  const Eigen::HouseholderQR<Eigen::MatrixXd> qr(on_channels);
  const Eigen::MatrixXd orthonormal = qr.householderQ() * Eigen::MatrixXd::Identity(n, order + 1);
  const Eigen::MatrixXd upper = qr.matrixQR().topRows(order + 1).triangularView<Eigen::Upper>();
  everywhere_ = upper.transpose().triangularView<Eigen::Lower>().solve(legendre.transpose()).transpose();
  coefficients_ = orthonormal.transpose() * y;
  spread_ = Eigen::MatrixXd::Zero(everywhere_.rows(), order + 1);
  for (Eigen::Index k = 0; k < n; ++k)
    spread_.row(channels[static_cast<std::size_t>(k)]) = orthonormal.row(k);
}

void Baseline::average(Eigen::VectorXd weights) {
  weights_ = std::move(weights);
  double share = 0.0;
  for (Eigen::Index k = weights_.size() - 1; k >= 0; --k) {
    share += weights_(k);
    shares_(k) = share;
  }
}

int Baseline::most_probable_order() const {
  Eigen::Index best = 0;
  weights_.maxCoeff(&best);
  return static_cast<int>(best);
}

Eigen::ArrayXd Baseline::values() const {
  return (everywhere_ * shares_.cwiseProduct(coefficients_)).array();
}

Eigen::VectorXd Baseline::projections(const Eigen::Ref<const Eigen::VectorXd>& a) const {
  return everywhere_.transpose() * a;
}

std::optional<BaselineFit> fit_baseline(const BaselineData& data, const std::vector<Eigen::Index>& line_free,
                                        const NoiseCorrelation& correlation, const BaselineOptions& options) {
  if (options.order) return fit_order(data, line_free, correlation, *options.order);
  for (int order = options.highest_order; order >= 0; --order) {
    auto fit = fit_order(data, line_free, correlation, order);
    if (!fit) continue;  // too few channels for so many coefficients
    // The noise stays that of the highest order, which no baseline that was left out adds to.
    fit->baseline.average(weights_of_orders(*fit, data, correlation));
    return fit;
  }
  return std::nullopt;
}

}  // namespace trotline
