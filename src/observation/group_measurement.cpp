#include "group_measurement.hpp"

#include <trotline/base/text.hpp>
#include <trotline/physics/constants.hpp>

#include "group_fit.hpp"
#include "region.hpp"

namespace trotline {
namespace {

constexpr double kLight = constants::kLightMPerS * 1e-3;  // km/s

class GroupMeasurement {
 public:
  GroupMeasurement(const MeasurementContext& context, const LineGroup& group)
      : context_(context), group_(group), region_(context, group) {}

  std::vector<LineMeasurement> run() {
    std::vector<LineMeasurement> results;
    for (const PlacedLine& line : group_) results.push_back(begin(line));
    if (const std::string trouble = region_.prepare(); !trouble.empty()) {
      for (LineMeasurement& result : results) result.trouble = trouble;
      return results;
    }
    const LinearSum whole = region_.sum(region_.window(), mean_rest_hz());
    for (LineMeasurement& result : results) describe(result);
    std::optional<FittedLines> fit;
    constexpr double kWorthAFit = 4.0;
    if (whole.value > kWorthAFit * whole.sigma()) fit = fit_group(context_, group_, region_);
    if (group_.size() > 1) {
      fill_several(results, whole, fit);
    } else {
      fill(results[0], whole, "sum over the window");
      if (fit && fit->trouble.empty()) attach(results[0], *fit, 0);
    }
    const std::vector<LineFlag> flags = common_flags(whole);
    for (LineMeasurement& result : results) finish(result, flags, fit);
    return results;
  }

 private:
  [[nodiscard]] double mean_rest_hz() const {
    double sum = 0.0;
    for (const PlacedLine& line : group_) sum += line.request->rest_frequency_hz;
    return sum / static_cast<double>(group_.size());
  }

  [[nodiscard]] static LineMeasurement begin(const PlacedLine& line) {
    LineMeasurement result;
    result.label = line.request->label;
    result.tag = line.request->tag;
    result.rest_frequency_hz = line.request->rest_frequency_hz;
    result.window = line.window;
    return result;
  }

  void describe(LineMeasurement& result) const {
    result.channels = static_cast<std::size_t>(region_.window().size());
    result.channel_km_s = region_.width_km_s(region_.window().begin, result.rest_frequency_hz);
    result.rms = region_.fit().rms;
    result.channels_per_independent_one = context_.correlation.channels_per_independent_one();
    result.baseline_order = region_.fit().baseline.most_probable_order();
    result.baseline_channels = region_.fit().channels.size();
    if (group_.size() == 1) return;
    result.window = {velocity_km_s(edge_hz(true), mean_rest_hz()),
                     velocity_km_s(edge_hz(false), mean_rest_hz())};
    if (result.window.low_km_s > result.window.high_km_s)
      std::swap(result.window.low_km_s, result.window.high_km_s);
  }

  [[nodiscard]] double edge_hz(bool first) const {
    return context_.spectrum.axis.frequency_hz(
        static_cast<double>(first ? region_.window().begin : region_.window().end) - 0.5);
  }

  void fill(LineMeasurement& result, const LinearSum& sum, const char* method) const {
    result.status = LineStatus::measured;
    result.method = method;
    result.intensity = sum.value;
    result.noise_sigma = sum.noise_sigma;
    result.baseline_sigma = sum.baseline_sigma;
    result.calibration_sigma = std::abs(sum.value) * context_.spectrum.calibration_error.value_or(context_.options.calibration_error);
    result.limit = context_.options.limit_in_sigma * sum.sigma();
    result.detected = sum.value >= result.limit;
  }

  static void attach(LineMeasurement& result, const FittedLines& fit, std::size_t k) {
    result.gaussian = fit.lines[k];
  }

  /// Lines closer than this cannot be told apart: two channels, the resolution, 0.7 of the width.
  [[nodiscard]] double least_distance_km_s(double fwhm_km_s) const {
    constexpr double kOfTheWidth = 0.7;
    double needed = 2.0 * region_.width_km_s(region_.window().begin, mean_rest_hz());
    if (context_.spectrum.resolution_hz)
      needed = std::max(needed, kLight * *context_.spectrum.resolution_hz / mean_rest_hz());
    return std::max(needed, kOfTheWidth * fwhm_km_s);
  }

  [[nodiscard]] bool are_one(const FittedLines& fit, std::size_t i, std::size_t k, double least_km_s) const {
    constexpr double kMostCorrelation = 0.9;
    const double apart = kLight *
                         std::abs(group_[i].request->rest_frequency_hz - group_[k].request->rest_frequency_hz) /
                         mean_rest_hz();
    const double correlation = fit.correlation(static_cast<Eigen::Index>(i), static_cast<Eigen::Index>(k));
    return apart < least_km_s || std::abs(correlation) > kMostCorrelation;
  }

  /// Lines that cannot be told apart, in chains: for each line the first one of its chain.
  [[nodiscard]] std::vector<std::size_t> chains(const FittedLines& fit) const {
    const double least_km_s = least_distance_km_s(fit.lines[0].fwhm_km_s.value);
    std::vector<std::size_t> first(group_.size());
    for (std::size_t i = 0; i < group_.size(); ++i) {
      first[i] = i;
      for (std::size_t k = 0; k < i; ++k) {
        if (!are_one(fit, i, k, least_km_s) || first[i] == first[k]) continue;
        const std::size_t from = std::max(first[i], first[k]);
        const std::size_t to = std::min(first[i], first[k]);
        for (std::size_t j = 0; j <= i; ++j) first[j] = first[j] == from ? to : first[j];
      }
    }
    return first;
  }

  void fill_several(std::vector<LineMeasurement>& results, const LinearSum& whole,
                    const std::optional<FittedLines>& fit) const {
    std::vector<std::size_t> first(group_.size(), 0);
    if (fit && fit->trouble.empty()) first = chains(*fit);
    const bool all_one = std::all_of(first.begin(), first.end(), [](std::size_t i) { return i == 0; });
    if (all_one) return fill_blend(results, whole, "sum over the window of the blend", first, 0);
    for (std::size_t k = 0; k < results.size(); ++k) {
      if (std::count(first.begin(), first.end(), first[k]) == 1) {
        fill(results[k], fit->areas[k], "joint fit of Gaussians");
        name_the_others(results, k);
        attach(results[k], *fit, k);
      } else if (first[k] == k) {
        fill_blend(results, sum_of(*fit, first, k), "joint fit of Gaussians, sum of the blend", first, k);
      }
    }
  }

  static void name_the_others(std::vector<LineMeasurement>& results, std::size_t k) {
    for (std::size_t i = 0; i < results.size(); ++i) {
      if (i != k) results[k].fitted_with.push_back(results[i].label);
    }
  }

  /// The areas of a chain together: well known even where each of them is not.
  [[nodiscard]] LinearSum sum_of(const FittedLines& fit, const std::vector<std::size_t>& first,
                                 std::size_t chain) const {
    Eigen::VectorXd weights = Eigen::VectorXd::Zero(region_.span().size());
    double value = 0.0;
    for (std::size_t i = 0; i < first.size(); ++i) {
      if (first[i] != chain) continue;
      weights += fit.weights[i];
      value += fit.areas[i].value;
    }
    LinearSum sum = region_.evaluate(weights, weights);
    sum.value = value;
    return sum;
  }

  void fill_blend(std::vector<LineMeasurement>& results, const LinearSum& sum, const char* method,
                  const std::vector<std::size_t>& first, std::size_t chain) const {
    double frequency = 0.0;
    double members = 0.0;
    for (std::size_t i = 0; i < first.size(); ++i) {
      if (first[i] != chain) continue;
      frequency += group_[i].request->rest_frequency_hz;
      members += 1.0;
    }
    const std::string mark = fmt::format("{:.6f} GHz", frequency / members * 1e-9);
    for (std::size_t i = 0; i < first.size(); ++i) {
      if (first[i] != chain) continue;
      fill(results[i], sum, method);
      results[i].blend = mark;
    }
  }

  [[nodiscard]] std::vector<LineFlag> common_flags(const LinearSum& whole) const {
    std::vector<LineFlag> flags;
    if (is_saturated()) flags.push_back(LineFlag::saturation);
    if (region_.wanted().begin < region_.window().begin || region_.wanted().end > region_.window().end) {
      flags.push_back(LineFlag::edge);
    }
    if (region_.holes() > 0) flags.push_back(LineFlag::hole);
    add_wings(whole, flags);
    if (region_.is_one_sided()) flags.push_back(LineFlag::one_sided);
    const double ratio = region_.fit().rms_mad > 0.0 ? region_.fit().rms / region_.fit().rms_mad : 1.0;
    // The two agree within 1.17 / sqrt(2 n), n independent channels: five times that is no accident.
    const auto channels = static_cast<double>(region_.fit().channels.size());
    const double independent = channels / std::max(1.0, context_.correlation.channels_per_independent_one());
    if (std::abs(ratio - 1.0) > std::max(0.15, 5.0 * 1.17 / std::sqrt(2.0 * independent)))
      flags.push_back(LineFlag::uneven_noise);
    return flags;
  }

  /// Three equal values in a row that are the highest of the region.
  [[nodiscard]] bool is_saturated() const {
    double highest = -std::numeric_limits<double>::infinity();
    for (const double value : region_.data()) {
      if (std::isfinite(value)) highest = std::max(highest, value);
    }
    int run = 0;
    for (Eigen::Index i = region_.window().begin; i < region_.window().end; ++i) {
      run = context_.spectrum.intensity(i) == highest ? run + 1 : 0;
      if (run == 3) return true;
    }
    return false;
  }

  void add_wings(const LinearSum& whole, std::vector<LineFlag>& flags) const {
    constexpr double kSignificant = 5.0;
    for (const ChannelSpan beside :
         {ChannelSpan{region_.window().begin - region_.guard(), region_.window().begin},
          ChannelSpan{region_.window().end, region_.window().end + region_.guard()}}) {
      if (beside.begin < region_.span().begin || beside.end > region_.span().end || has_other_line(beside))
        continue;
      const LinearSum sum = region_.sum(beside, mean_rest_hz());
      if (sum.value > kSignificant * sum.sigma() && whole.value > 0.0) add_once(flags, LineFlag::wing);
      if (sum.value < -kSignificant * sum.sigma()) add_once(flags, LineFlag::negative_bowl);
    }
  }

  static void add_once(std::vector<LineFlag>& flags, LineFlag flag) {
    if (std::find(flags.begin(), flags.end(), flag) == flags.end()) flags.push_back(flag);
  }

  [[nodiscard]] bool has_other_line(const ChannelSpan& channels) const {
    return std::any_of(context_.neighbours.begin(), context_.neighbours.end(), [&](const PlacedLine& line) {
      return line.inside.begin < channels.end && line.inside.end > channels.begin;
    });
  }

  void finish(LineMeasurement& result, const std::vector<LineFlag>& flags,
              const std::optional<FittedLines>& fit) const {
    result.flags.insert(result.flags.end(), flags.begin(), flags.end());
    mark_neighbours(result);
    if (result.gaussian && result.gaussian->fwhm_km_s.value < 2.0 * result.channel_km_s) {
      result.flags.push_back(LineFlag::narrow);
    }
    if (context_.options.keep_panels) result.panel = panel(result, fit);
  }

  void mark_neighbours(LineMeasurement& result) const {
    for (const PlacedLine& line : context_.neighbours) {
      const double here =
          velocity_km_s(frequency_at_hz(context_.options.vlsr_km_s, line.request->rest_frequency_hz),
                        result.rest_frequency_hz);
      if (here < result.window.low_km_s || here > result.window.high_km_s) continue;
      result.neighbours.push_back(
          fmt::format("{} {} at {:.2f} km/s", line.request->tag, line.request->label, here));
    }
    if (!result.neighbours.empty()) result.flags.push_back(LineFlag::neighbour);
  }

  [[nodiscard]] LinePanel panel(const LineMeasurement& result, const std::optional<FittedLines>& fit) const {
    LinePanel panel;
    panel.velocity_km_s.resize(region_.span().size());
    for (Eigen::Index i = 0; i < panel.velocity_km_s.size(); ++i) {
      panel.velocity_km_s(i) =
          velocity_km_s(region_.frequency_hz(region_.span().begin + i), result.rest_frequency_hz);
    }
    panel.intensity = region_.data();
    panel.baseline = region_.baseline();
    if (fit && fit->trouble.empty()) panel.model = fit->model + panel.baseline;
    for (const PlacedLine& line : context_.neighbours) add_mark(line, result, panel);
    for (const PlacedLine& line : group_) {
      if (line.request->rest_frequency_hz != result.rest_frequency_hz) add_mark(line, result, panel);
    }
    return panel;
  }

  /// Where the source's velocity puts another line, if the panel reaches there.
  void add_mark(const PlacedLine& line, const LineMeasurement& result, LinePanel& panel) const {
    const double here =
        velocity_km_s(frequency_at_hz(context_.options.vlsr_km_s, line.request->rest_frequency_hz),
                      result.rest_frequency_hz);
    if (here < panel.velocity_km_s.minCoeff() || here > panel.velocity_km_s.maxCoeff()) return;
    const std::string species = line.request->tag == result.tag ? "" : line.request->tag + " ";
    panel.marks.push_back({here, species + line.request->label});
  }

  const MeasurementContext& context_;
  const LineGroup& group_;
  Region region_;
};

}  // namespace

std::vector<LineMeasurement> measure_group(const MeasurementContext& context, const LineGroup& group) {
  return GroupMeasurement(context, group).run();
}

std::optional<BestLine> fit_best_line(const MeasurementContext& context,
                                      const std::vector<LineGroup>& groups) {
  std::optional<BestLine> best;
  for (const LineGroup& group : groups) {
    for (const LineMeasurement& line : measure_group(context, group)) {
      if (!line.gaussian || !line.is_trusted()) continue;
      const double signal_to_noise = line.gaussian->area.value / line.gaussian->area.sigma;
      if (best && signal_to_noise <= best->signal_to_noise) continue;
      best = BestLine{signal_to_noise, line.gaussian->velocity_km_s.value, line.gaussian->fwhm_km_s.value,
                      line.channel_km_s};
    }
  }
  return best;
}

}  // namespace trotline
