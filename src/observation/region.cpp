#include "region.hpp"

#include <trotline/physics/constants.hpp>

namespace trotline {
namespace {

constexpr double kLightKmPerS = constants::kLightMPerS * 1e-3;

}  // namespace

Region::Region(const MeasurementContext& context, const LineGroup& group)
    : context_(context), window_(group[0].inside), wanted_(group[0].wanted) {
  for (const PlacedLine& line : group) {
    window_ = {std::min(window_.begin, line.inside.begin), std::max(window_.end, line.inside.end)};
    wanted_ = {std::min(wanted_.begin, line.wanted.begin), std::max(wanted_.end, line.wanted.end)};
  }
  guard_ = std::max<Eigen::Index>(2, wanted_.size() / 4);
  choose_span();
}

std::string Region::prepare() {
  if (window_.size() == 0) return "the window holds no channel";
  constexpr double kMostHoles = 0.2;
  if (static_cast<double>(holes()) > kMostHoles * static_cast<double>(window_.size())) {
    return fmt::format("{} of {} channels of the window have no value", holes(), window_.size());
  }
  auto fit = fit_baseline(baseline_data(), line_free_, context_.correlation, context_.options.baseline);
  if (!fit) {
    return fmt::format(
        "{} line-free channels are too few for the baseline: --window or --search make the windows narrower",
        line_free_.size());
  }
  fit_ = std::move(*fit);
  if (context_.spectrum.noise_sigma) fit_->rms = *context_.spectrum.noise_sigma;
  if (!(fit_->rms > 0.0)) return "the spectrum has no noise, so that no error can be given";
  baseline_ = fit_->baseline.values();
  return {};
}

/// Polynomials of frequency, which is what receivers and spectrometers shape, whatever the axis is written
/// in.
BaselineData Region::baseline_data() const {
  BaselineData result{Eigen::ArrayXd(span_.size()), data()};
  const double first = frequency_hz(span_.begin);
  const double last = frequency_hz(span_.end - 1);
  for (Eigen::Index i = 0; i < span_.size(); ++i) {
    result.coordinate(i) = 2.0 * (frequency_hz(span_.begin + i) - first) / (last - first) - 1.0;
  }
  return result;
}

Eigen::Ref<const Eigen::ArrayXd> Region::data() const {
  return context_.spectrum.intensity.segment(span_.begin, span_.size());
}

Eigen::Index Region::holes() const {
  Eigen::Index count = 0;
  for (Eigen::Index i = window_.begin; i < window_.end; ++i) count += is_hole(i) ? 1 : 0;
  return count;
}

bool Region::is_one_sided() const {
  std::size_t before = 0;
  for (const Eigen::Index i : fit_->channels) before += i + span_.begin < window_.begin ? 1 : 0;
  const std::size_t fewer = std::min(before, fit_->channels.size() - before);
  return 10 * fewer < fit_->channels.size();
}

LinearSum Region::sum(ChannelSpan channels, double rest_frequency_hz) const {
  Eigen::VectorXd ideal = Eigen::VectorXd::Zero(span_.size());
  for (Eigen::Index i = channels.begin; i < channels.end; ++i) {
    ideal(i - span_.begin) = width_km_s(i, rest_frequency_hz);
  }
  return evaluate(bridged(ideal), ideal);
}

LinearSum Region::evaluate(const Eigen::VectorXd& on_data, const Eigen::VectorXd& on_baseline) const {
  const Baseline& baseline = fit_->baseline;
  const Eigen::VectorXd projections = baseline.projections(on_baseline);
  LinearSum result;
  result.total_weights = on_data - baseline.spread_basis() * baseline.shares().cwiseProduct(projections);
  for (Eigen::Index i = 0; i < on_data.size(); ++i) {
    if (on_data(i) != 0.0) result.value += on_data(i) * data()(i);
  }
  result.value -= baseline.shares().dot(baseline.coefficients().cwiseProduct(projections));
  const std::size_t measured = context_.spectrum.noise_sigma ? 0 : fit_->channels.size();
  const double unit =
      fit_->rms * fit_->rms * (1.0 + context_.correlation.scatter_of_variance(measured));
  const double noise = unit * context_.correlation.variance_of(on_data);
  const double total = unit * (context_.correlation.variance_of(result.total_weights) + doubt(projections));
  result.noise_sigma = std::sqrt(noise);
  result.baseline_sigma = std::sqrt(std::max(0.0, total - noise));
  return result;
}

/// What the choice of the order adds to the variance, over that of a channel. A coefficient whose share is s is
/// one that a Gaussian prior of variance s / (1 - s) times its own variance shrinks; what is then missing has
/// the expected square s (1 - s) times that variance. 0 for a baseline of one order.
double Region::doubt(const Eigen::VectorXd& projections) const {
  const Baseline& baseline = fit_->baseline;
  double sum = 0.0;
  for (Eigen::Index k = 0; k < projections.size(); ++k) {
    const double share = baseline.shares()(k);
    if (share == 1.0) continue;
    sum += share * (1.0 - share) * projections(k) * projections(k) *
           context_.correlation.variance_of(baseline.spread_basis().col(k));
  }
  return sum;
}

double Region::width_km_s(Eigen::Index channel, double rest_frequency_hz) const {
  return kLightKmPerS * context_.spectrum.axis.width_hz(static_cast<std::size_t>(channel)) /
         rest_frequency_hz;
}

double Region::frequency_hz(Eigen::Index channel) const {
  return context_.spectrum.axis.frequency_hz(static_cast<double>(channel));
}

/// Walks outward on both sides until there are enough line-free channels.
void Region::choose_span() {
  constexpr Eigen::Index kFewest = 128;
  constexpr Eigen::Index kMost = 1024;
  const Eigen::Index enough = std::clamp(2 * wanted_.size(), kFewest, kMost);
  const Eigen::Index channels = context_.spectrum.intensity.size();
  span_ = {std::max<Eigen::Index>(0, window_.begin - guard_), std::min(channels, window_.end + guard_)};
  std::vector<Eigen::Index> below;
  const Eigen::Index lowest = std::max<Eigen::Index>(0, window_.begin - 4 * enough);
  for (Eigen::Index i = window_.begin - 1; i >= lowest && static_cast<Eigen::Index>(below.size()) < enough;
       --i) {
    if (is_line_free(i)) below.push_back(i);
  }
  std::vector<Eigen::Index> above;
  const Eigen::Index highest = std::min(channels, window_.end + 4 * enough);
  for (Eigen::Index i = window_.end; i < highest && static_cast<Eigen::Index>(above.size()) < enough; ++i) {
    if (is_line_free(i)) above.push_back(i);
  }
  if (!below.empty()) span_.begin = std::min(span_.begin, below.back());
  if (!above.empty()) span_.end = std::max(span_.end, above.back() + 1);
  line_free_.assign(below.rbegin(), below.rend());
  line_free_.insert(line_free_.end(), above.begin(), above.end());
  for (Eigen::Index& channel : line_free_) channel -= span_.begin;
}

bool Region::is_line_free(Eigen::Index channel) const {
  return !context_.excluded[static_cast<std::size_t>(channel)] && !is_hole(channel);
}

/// Moves the weight of holes to the nearest channels with a value on both sides, as straight interpolation
/// does.
Eigen::VectorXd Region::bridged(const Eigen::VectorXd& ideal) const {
  Eigen::VectorXd weights = ideal;
  for (Eigen::Index i = 0; i < ideal.size(); ++i) {
    if (ideal(i) != 0.0 && is_hole(i + span_.begin)) move_weight(i, weights);
  }
  return weights;
}

void Region::move_weight(Eigen::Index hole, Eigen::VectorXd& weights) const {
  const double weight = weights(hole);
  weights(hole) = 0.0;
  Eigen::Index below = hole;
  while (below >= 0 && is_hole(below + span_.begin)) --below;
  Eigen::Index above = hole;
  while (above < weights.size() && is_hole(above + span_.begin)) ++above;
  const bool has_below = below >= 0;
  const bool has_above = above < weights.size();
  if (has_below && has_above) {
    const double share = static_cast<double>(hole - below) / static_cast<double>(above - below);
    weights(below) += (1.0 - share) * weight;
    weights(above) += share * weight;
  } else if (has_below || has_above) {
    weights(has_below ? below : above) += weight;
  }
}

}  // namespace trotline
