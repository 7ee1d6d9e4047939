#include <array>

#include <trotline/base/text.hpp>
#include <trotline/observation/line_measurement.hpp>
#include <trotline/physics/constants.hpp>

#include "group_measurement.hpp"

namespace trotline {
namespace {

void require(bool good, const std::string& found, const std::string& expected) {
  if (!good) throw InputError({found, expected});
}

void check(const std::vector<LineRequest>& requests, const MeasurementOptions& options) {
  require(std::isfinite(options.vlsr_km_s) && std::abs(options.vlsr_km_s) < 2.9e5, "V_LSR makes no sense",
          "a velocity below that of light");
  for (const auto& width : {options.window_km_s, options.search_km_s, options.fwhm_km_s}) {
    require(!width || (std::isfinite(*width) && *width > 0.0), "a width is not above 0",
            "a velocity above 0 km/s");
  }
  require(options.calibration_error >= 0.0 && options.calibration_error < 1.0,
          fmt::format("the calibration error is {}", options.calibration_error),
          "a fraction from 0 to below 1");
  require(options.limit_in_sigma > 0.0, "the limit is not above 0 sigma", "a number above 0");
  constexpr int kHighest = 15;  // above, a polynomial follows lines rather than baselines
  require(options.baseline.order.value_or(0) >= 0 && options.baseline.order.value_or(0) <= kHighest &&
              options.baseline.highest_order >= 0 && options.baseline.highest_order <= kHighest,
          "the order of the baseline makes no sense", "a whole number from 0 to 15");
  for (const LineRequest& request : requests) {
    require(std::isfinite(request.rest_frequency_hz) && request.rest_frequency_hz > 0.0,
            fmt::format("line '{}' has the rest frequency {} Hz", printable(request.label),
                        request.rest_frequency_hz),
            "a frequency above 0");
    require(!request.window || request.window->low_km_s < request.window->high_km_s,
            fmt::format("the window of line '{}' is empty", printable(request.label)),
            "the lower velocity first");
  }
}

VelocityRange about(double centre, double width) { return {centre - 0.5 * width, centre + 0.5 * width}; }

/// What is searched for a window. With what is kept free beside it a window takes 1.5 times its width away
/// from the baseline: a third of the band leaves half of it. Polynomials that cross two thirds of a band, of
/// orders that the data choose, follow the line.
double search_width_km_s(const Spectrum& spectrum, const MeasurementOptions& options) {
  if (options.search_km_s) return *options.search_km_s;
  constexpr double kOfTheBand = 1.0 / 3.0;
  const auto channels = static_cast<double>(std::max<Eigen::Index>(1, spectrum.intensity.size()));
  const double with_value = static_cast<double>(spectrum.intensity.isFinite().count()) / channels;
  const double low = spectrum.axis.low_hz();
  const double high = spectrum.axis.high_hz();
  const double band_km_s = constants::kLightMPerS * 1e-3 * 2.0 * (high - low) / (high + low) * with_value;
  return band_km_s > 0.0 ? std::min(kSearchKmS, kOfTheBand * band_km_s) : kSearchKmS;
}

class Measurer {
 public:
  Measurer(const Spectrum& spectrum, const std::vector<LineRequest>& requests,
           const MeasurementOptions& options)
      : spectrum_(spectrum),
        requests_(requests),
        options_(options),
        search_km_s_(search_width_km_s(spectrum, options)) {}

  SpectrumMeasurement run() {
    result_.spectrum = spectrum_.name;
    result_.object = spectrum_.object;
    result_.scale = spectrum_.scale;
    result_.beam_fwhm_rad = spectrum_.beam_fwhm_rad;
    result_.forward_efficiency = spectrum_.forward_efficiency;
    result_.main_beam_efficiency = spectrum_.main_beam_efficiency;
    result_.window = about(options_.vlsr_km_s, options_.window_km_s.value_or(search_km_s_));
    place_all();
    if (!options_.window_km_s) find_window();
    std::vector<std::optional<LineMeasurement>> by_request(requests_.size());
    const MeasurementContext context = make_context();
    for (const LineGroup& group : grouped(wanted_)) {
      auto measured = measure_group(context, group);
      for (std::size_t i = 0; i < group.size(); ++i) by_request[group[i].index] = std::move(measured[i]);
    }
    for (std::size_t i = 0; i < requests_.size(); ++i) {
      if (requests_[i].measure)
        result_.lines.push_back(by_request[i] ? std::move(*by_request[i]) : outside(requests_[i]));
    }
    return std::move(result_);
  }

 private:
  [[nodiscard]] MeasurementContext make_context() const {
    return {spectrum_, options_, result_.correlation, excluded_, neighbours_};
  }

  void place_all() {
    std::vector<PlacedLine> covered;
    wanted_.clear();
    neighbours_.clear();
    for (std::size_t i = 0; i < requests_.size(); ++i) {
      const PlacedLine line = place(requests_[i], i, result_.window, spectrum_.axis);
      if (line.inside.size() == 0) continue;
      covered.push_back(line);
      (requests_[i].measure ? wanted_ : neighbours_).push_back(line);
    }
    excluded_ = excluded_channels(covered, spectrum_.axis.size());
    result_.correlation = estimate_noise_correlation(spectrum_.intensity, excluded_);
    if (result_.correlation.channels == 0 && !wanted_.empty()) {
      result_.warnings.emplace_back(
          "there are too few line-free channels to see whether the noise is correlated");
    }
  }

  /// The window of all lines from the one that stands out most: 1.5 widths to each side, which hold all but
  /// 4e-4 of a Gaussian, and five channels at least.
  void find_window() {
    constexpr double kEnough = 5.0;
    if (wanted_.empty()) return;
    const auto best = fit_best_line(make_context(), grouped(wanted_));
    if (!best || best->signal_to_noise < kEnough) {
      result_.warnings.push_back(fmt::format(
          "no line stands out: the windows are the {:.4g} km/s that were searched, which "
          "costs sensitivity. --search sets another width to look in, --window that of the windows",
          search_km_s_));
      return;
    }
    result_.window_snr = best->signal_to_noise;
    result_.window = about(best->velocity_km_s, std::max(3.0 * best->fwhm_km_s, 5.0 * best->channel_km_s));
    place_all();
  }

  [[nodiscard]] LineMeasurement outside(const LineRequest& request) const {
    LineMeasurement line;
    line.label = request.label;
    line.tag = request.tag;
    line.rest_frequency_hz = request.rest_frequency_hz;
    line.window = request.window.value_or(result_.window);
    line.status = LineStatus::not_covered;
    line.trouble = "outside of the band";
    return line;
  }

  const Spectrum& spectrum_;
  const std::vector<LineRequest>& requests_;
  const MeasurementOptions& options_;
  double search_km_s_;
  std::vector<PlacedLine> wanted_;
  std::vector<PlacedLine> neighbours_;
  std::vector<bool> excluded_;
  SpectrumMeasurement result_;
};

}  // namespace

std::string_view name_of(LineFlag flag) {
  static constexpr std::array<std::string_view, 9> kNames = {"saturation", "edge",          "hole",
                                                             "wing",       "negative bowl", "neighbour",
                                                             "one-sided",  "uneven noise",  "narrow"};
  return kNames.at(static_cast<std::size_t>(flag));
}

double LineMeasurement::sigma() const { return std::hypot(noise_sigma, baseline_sigma); }

bool LineMeasurement::has(LineFlag flag) const {
  return std::find(flags.begin(), flags.end(), flag) != flags.end();
}

bool LineMeasurement::is_trusted() const {
  return status == LineStatus::measured && !has(LineFlag::saturation) && !has(LineFlag::edge) &&
         !has(LineFlag::hole);
}

SpectrumMeasurement measure_lines(const Spectrum& spectrum, const std::vector<LineRequest>& requests,
                                  const MeasurementOptions& options) {
  check(requests, options);
  if (static_cast<std::size_t>(spectrum.intensity.size()) != spectrum.axis.size()) {
    throw DomainError("intensity", static_cast<double>(spectrum.intensity.size()),
                      "one value for each channel of the axis");
  }
  return Measurer(spectrum, requests, options).run();
}

}  // namespace trotline
