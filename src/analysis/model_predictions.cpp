#include "model_predictions.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <numbers>

#include "diagram_results.hpp"
#include "fitted_covariance.hpp"

namespace trotline {
namespace {

using State = Eigen::VectorXd;

/// One line as the state has it, blends not regarded.
struct MemberPrediction {
  double population = 0.0;  // N_u/g_u, summed over the components
  double intensity = 0.0;
  double optical_depth = kNotKnown;
  double filling = 1.0;  // of the component that is brightest in the line
};

class Predictor {
 public:
  Predictor(const FittedModel& fitted, const RunOptions& options)
      : fitted_(fitted), layout_(fitted.setup.model->layout()), options_(options) {}

  [[nodiscard]] MemberPrediction operator()(const PreparedLine& line) const {
    MemberPrediction sum;
    double brightest = -HUGE_VAL;
    const std::size_t isomer = isomer_of(line);
    for (int c = 0; c < layout_.components; ++c) {
      const double temperature_k = std::exp(state()[layout_.ln_temperature(c)]);
      const double ln_q =
          fitted_.setup.model->partition(static_cast<int>(isomer)).at(std::log(temperature_k)).ln_q;
      const double population = std::exp(state()[layout_.ln_column(c, static_cast<int>(isomer))] - ln_q -
                                         line.constants.upper_energy_k / temperature_k);
      const MemberPrediction one = of_component(line, population, temperature_k, filling_of(line, c));
      sum.population += population;
      sum.intensity += one.intensity;
      if (!(sum.optical_depth >= one.optical_depth)) sum.optical_depth = one.optical_depth;
      if (one.intensity > brightest) {
        brightest = one.intensity;
        sum.filling = one.filling;
      }
    }
    return sum;
  }

 private:
  [[nodiscard]] const State& state() const { return fitted_.fit.state; }

  [[nodiscard]] std::size_t isomer_of(const PreparedLine& line) const {
    if (layout_.isomers == 1) return 0;
    const auto& names = fitted_.setup.isomers;
    return static_cast<std::size_t>(std::find(names.begin(), names.end(), line.spin) - names.begin());
  }

  [[nodiscard]] double filling_of(const PreparedLine& line, int component) const {
    const double size = std::exp(state()[layout_.ln_size(component)]);
    const double beam = line.result.beam_fwhm_arcsec;
    if (!std::isfinite(size) || !(beam > 0.0)) return 1.0;
    return options_.source_shape == SourceShape::disc ? disc_filling(size, beam)
                                                      : gaussian_filling(size, beam);
  }

  [[nodiscard]] MemberPrediction of_component(const PreparedLine& line, double population,
                                              double temperature_k, double filling) const {
    MemberPrediction one;
    const LineConstants& constants = line.constants;
    const double upper_column = population * constants.upper_degeneracy;
    one.filling = filling;
    const double contrast =
        background_contrast(constants.frequency_hz, temperature_k, state()[layout_.background()]);
    one.intensity = upper_column * intensity_per_upper_column_k_km_s_cm2(constants) * filling * contrast;
    if (!(line.result.fwhm_km_s > 0.0)) return one;
    one.optical_depth = central_optical_depth(constants, upper_column, temperature_k, line.result.fwhm_km_s);
    if (fitted_.setup.kind.opacity != Opacity::thin) {
      const double depth = std::min(one.optical_depth, kMostOpticalDepth);
      one.intensity /= opacity_correction(fitted_.setup.kind.opacity, depth).factor;
    }
    return one;
  }

  const FittedModel& fitted_;
  const StateLayout& layout_;
  const RunOptions& options_;
};

/// Observed less model over its error: with the shared calibration factor taken off where there is one, with
/// the line's own calibration error in the error where there is none.
double residual_of(const Measurement& datum, double model, double factor) {
  if (datum.calibration_group >= 0) return (datum.intensity_k_km_s - factor * model) / datum.sigma_k_km_s;
  return (datum.intensity_k_km_s - model) / std::hypot(datum.sigma_k_km_s, datum.calibration_error * model);
}

void set_member(LineResult& line, const MemberPrediction& member, double whole_model) {
  line.optical_depth = member.optical_depth;
  line.filling = member.filling;
  line.model_intensity_k_km_s = whole_model;
  line.ln_nu_gu = kNotKnown;
  if (line.intensity_k_km_s > 0.0 && whole_model > 0.0) {
    line.ln_nu_gu = std::log(member.population) + std::log(line.intensity_k_km_s / whole_model);
  }
}

void predict_used(const FittedModel& fitted, const Predictor& predictor, std::vector<PreparedLine>& lines) {
  for (std::size_t d = 0; d < fitted.setup.rows_of_datum.size(); ++d) {
    const auto at = static_cast<Eigen::Index>(d);
    const Measurement& datum = fitted.setup.problem.data[d];
    const double model = fitted.fit.intensity_k_km_s[at];
    for (const std::size_t row : fitted.setup.rows_of_datum[d]) {
      LineResult& line = lines[row].result;
      set_member(line, predictor(lines[row]), model);
      if (datum.calibration_group >= 0) line.calibration_factor = fitted.fit.calibration[at];
      line.residual_sigma = residual_of(datum, model, line.calibration_factor);
    }
  }
}

void predict_unused(const Predictor& predictor, std::vector<PreparedLine>& lines) {
  for (PreparedLine& prepared : lines) {
    LineResult& line = prepared.result;
    if (line.used) continue;
    const MemberPrediction member = predictor(prepared);
    set_member(line, member, member.intensity);
    line.residual_sigma = (line.intensity_k_km_s - member.intensity) /
                          std::hypot(line.intensity_error_k_km_s, line.calibration_error * member.intensity);
  }
}

// ---- the diagram's line and curves
// -------------------------------------------------------------------------

/// Height of the diagram's line at one energy for some components of one isomer, with its standard error.
class DiagramHeight {
 public:
  DiagramHeight(const FittedModel& fitted, int isomer)
      : fitted_(fitted), layout_(fitted.setup.model->layout()), isomer_(isomer) {}

  [[nodiscard]] DiagramCurvePoint at(double energy_k) const {
    std::vector<double> terms;
    for (int c = 0; c < layout_.components; ++c) {
      const double ln_t = fitted_.fit.state[layout_.ln_temperature(c)];
      terms.push_back(fitted_.fit.state[layout_.ln_column(c, isomer_)] - q(c).ln_q -
                      energy_k / std::exp(ln_t));
    }
    const double most = *std::max_element(terms.begin(), terms.end());
    double sum = 0.0;
    for (const double term : terms) sum += std::exp(term - most);
    std::vector<std::pair<int, double>> slopes;
    for (int c = 0; c < layout_.components; ++c) {
      const double share = std::exp(terms[static_cast<std::size_t>(c)] - most) / sum;
      const double t = std::exp(fitted_.fit.state[layout_.ln_temperature(c)]);
      slopes.emplace_back(layout_.ln_column(c, isomer_), share);
      slopes.emplace_back(layout_.ln_temperature(c), share * (energy_k / t - q(c).dlnq_dlnt));
    }
    double variance = 0.0;
    for (const auto& [a, slope_a] : slopes) {
      for (const auto& [b, slope_b] : slopes)
        variance += slope_a * slope_b * covariance_between(fitted_, a, b);
    }
    const double height = most + std::log(sum);
    const double sigma = std::sqrt(variance);
    return {energy_k, height, height - sigma, height + sigma};
  }

 private:
  [[nodiscard]] TabulatedPartition::Value q(int component) const {
    return fitted_.setup.model->partition(isomer_).at(fitted_.fit.state[layout_.ln_temperature(component)]);
  }
  const FittedModel& fitted_;
  const StateLayout& layout_;
  int isomer_;
};

void set_straight_line(Result& result, const FittedModel& fitted) {
  const StateLayout& layout = fitted.setup.model->layout();
  const int n = layout.ln_column(0);
  const int t = layout.ln_temperature(0);
  const double temperature_k = std::exp(fitted.fit.state[t]);
  const auto q = fitted.setup.model->partition(0).at(fitted.fit.state[t]);
  const double nn = covariance_between(fitted, n, n);
  const double nt = covariance_between(fitted, n, t);
  const double tt = covariance_between(fitted, t, t);
  DiagramLine& line = result.diagram_line;  // da = dlnN - (dlnQ/dlnT) dlnT, d(slope) = dlnT / T
  line.intercept = fitted.fit.state[n] - q.ln_q;
  line.slope_per_k = -1.0 / temperature_k;
  line.intercept_variance = nn - 2.0 * q.dlnq_dlnt * nt + q.dlnq_dlnt * q.dlnq_dlnt * tt;
  line.slope_variance = tt / (temperature_k * temperature_k);
  line.covariance = (nt - q.dlnq_dlnt * tt) / temperature_k;
}

void set_curves(Result& result, const FittedModel& fitted, const std::vector<PreparedLine>& lines) {
  constexpr int kPoints = 80;
  constexpr double kBeyond = 1.15;  // of the highest level, so that the curve runs over the whole panel
  double highest = 0.0;
  for (const PreparedLine& line : lines) highest = std::max(highest, line.constants.upper_energy_k);
  for (std::size_t i = 0; i < fitted.setup.isomers.size(); ++i) {
    const DiagramHeight height(fitted, static_cast<int>(i));
    DiagramCurve curve{fitted.setup.isomers[i], {}};
    for (int k = 0; k <= kPoints; ++k) curve.points.push_back(height.at(kBeyond * highest * k / kPoints));
    result.diagram_curves.push_back(curve);
  }
}

// ---- N where there is no temperature
// -----------------------------------------------------------------------

}  // namespace

void set_predictions(Result& result, const FittedModel& fitted, std::vector<PreparedLine>& lines,
                     const RunOptions& options) {
  const Predictor predictor(fitted, options);
  predict_used(fitted, predictor, lines);
  predict_unused(predictor, lines);
  const StateLayout& layout = fitted.setup.model->layout();
  if (layout.components == 1 && layout.isomers == 1) {
    set_straight_line(result, fitted);
  } else {
    set_curves(result, fitted, lines);
  }
}

}  // namespace trotline
