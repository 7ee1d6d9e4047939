// The data about one group of lines, with its baseline: what sums over them are worth.
#pragma once

#include <string>

#include "group_measurement.hpp"

namespace trotline {

/// A sum of the data with weights, and its error.
struct LinearSum {
  double value = 0.0;
  double noise_sigma = 0.0;
  double baseline_sigma = 0.0;
  Eigen::VectorXd total_weights;  ///< of the data of the region, the baseline's part taken off

  [[nodiscard]] double sigma() const { return std::hypot(noise_sigma, baseline_sigma); }
};

/// The data about one group of lines, with its baseline.
/// Prepared once for each group.
class Region {
 public:
  Region(const MeasurementContext& context, const LineGroup& group);

  /// Fits the baseline. @return why the lines cannot be measured; empty when they can
  [[nodiscard]] std::string prepare();

  [[nodiscard]] const BaselineFit& fit() const { return *fit_; }
  [[nodiscard]] const ChannelSpan& window() const {
    return window_;
  }  ///< of the whole group, inside of the band
  [[nodiscard]] const ChannelSpan& wanted() const { return wanted_; }  ///< the same as it was asked for
  [[nodiscard]] const ChannelSpan& span() const {
    return span_;
  }  ///< with the line-free channels on both sides
  [[nodiscard]] Eigen::Index guard() const { return guard_; }
  [[nodiscard]] const Eigen::ArrayXd& baseline() const { return baseline_; }
  [[nodiscard]] Eigen::Ref<const Eigen::ArrayXd> data() const;
  [[nodiscard]] bool is_hole(Eigen::Index channel) const {
    return !std::isfinite(context_.spectrum.intensity(channel));
  }
  [[nodiscard]] Eigen::Index holes() const;  ///< in the window
  [[nodiscard]] bool is_one_sided() const;

  /// Sum over the channels of (T - baseline) dv; holes are bridged by their neighbours.
  [[nodiscard]] LinearSum sum(ChannelSpan channels, double rest_frequency_hz) const;

  /// @param on_data  weights of the data  @param on_baseline  weights of the baseline that is taken off
  [[nodiscard]] LinearSum evaluate(const Eigen::VectorXd& on_data, const Eigen::VectorXd& on_baseline) const;

  [[nodiscard]] double width_km_s(Eigen::Index channel, double rest_frequency_hz) const;
  [[nodiscard]] double frequency_hz(Eigen::Index channel) const;

 private:
  void choose_span();
  [[nodiscard]] BaselineData baseline_data() const;
  [[nodiscard]] bool is_line_free(Eigen::Index channel) const;
  [[nodiscard]] Eigen::VectorXd bridged(const Eigen::VectorXd& ideal) const;
  [[nodiscard]] double doubt(const Eigen::VectorXd& projections) const;
  void move_weight(Eigen::Index hole, Eigen::VectorXd& weights) const;

  const MeasurementContext& context_;
  ChannelSpan window_;
  ChannelSpan wanted_;
  ChannelSpan span_;
  Eigen::Index guard_ = 2;
  std::vector<Eigen::Index> line_free_;  ///< relative to the region
  std::optional<BaselineFit> fit_;
  Eigen::ArrayXd baseline_;
};

}  // namespace trotline
