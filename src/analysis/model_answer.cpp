#include "model_answer.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <numbers>

#include <trotline/inference/least_squares.hpp>

#include "diagram_results.hpp"

namespace trotline {
namespace {

using State = Eigen::VectorXd;

Eigen::Index free_index(const FittedModel& fitted, int entry) {
  const auto& free = fitted.likelihood->free_entries();
  const auto found = std::find(free.begin(), free.end(), entry);
  return found == free.end() ? -1 : found - free.begin();
}

/// The exact curvature where it is positive; it heeds limits and outliers, which the expected one does not.
const Eigen::MatrixXd& covariance_of(const LikelihoodFit& fit) {
  for (Eigen::Index k = 0; k < fit.covariance.rows(); ++k) {
    if (std::isfinite(fit.covariance(k, k)) && !std::isfinite(fit.curvature_covariance(k, k)))
      return fit.covariance;
  }
  return fit.curvature_covariance;
}

double covariance_between(const FittedModel& fitted, int entry, int other) {
  const Eigen::Index i = free_index(fitted, entry);
  const Eigen::Index j = free_index(fitted, other);
  return i < 0 || j < 0 ? 0.0 : covariance_of(fitted.fit)(i, j);
}

/// The standard deviation and equal-tailed ranges of the posterior about the best fit. An end that a bound of
/// the parameter sets, and not the data, is left out.
Estimate posterior_estimate(const Posterior& posterior, Eigen::Index k, Estimate estimate) {
  if (!posterior.usable()) return estimate;
  const MarginalDensity& marginal = posterior.marginals[static_cast<std::size_t>(k)];
  estimate.error = marginal.sigma;
  if (!marginal.cut_low) {
    estimate.low68 = marginal.central68.low;
    estimate.low95 = marginal.central95.low;
  }
  if (!marginal.cut_high) {
    estimate.high68 = marginal.central68.high;
    estimate.high95 = marginal.central95.high;
  }
  return estimate;
}

/// Value, error and intervals of one entry of the state, in its own scale (ln, or K for the background).
Estimate entry_estimate(const FittedModel& fitted, int entry, const RunOptions& options) {
  Estimate estimate;
  estimate.value = fitted.fit.state[entry];
  const Eigen::Index k = free_index(fitted, entry);
  if (k < 0) return estimate;
  estimate.error = std::sqrt(covariance_of(fitted.fit)(k, k));
  if (options.intervals == "curvature") return plain_estimate(estimate.value, estimate.error);
  if (fitted.posterior) return posterior_estimate(*fitted.posterior, k, estimate);
  const auto which = static_cast<int>(k);
  const Interval one = profile_interval(*fitted.likelihood, fitted.fit, which, 1.0);
  const Interval two = profile_interval(*fitted.likelihood, fitted.fit, which, kZ95);
  estimate.low68 = one.low;
  estimate.high68 = one.high;
  estimate.low95 = two.low;
  estimate.high95 = two.high;
  return estimate;
}

/// Keeps a value only where its own 95 % range is closed; ranges always stay.
Estimate as_range(Estimate estimate, bool several) {
  const bool closed = std::isfinite(estimate.low95) && std::isfinite(estimate.high95);
  if (several || !closed) estimate.value = estimate.error = kNotKnown;
  return estimate;
}

/// The same from draws of the posterior.
Estimate drawn_sum(const FittedModel& fitted, const std::vector<int>& entries, double value) {
  const Eigen::MatrixXd& all = fitted.posterior->sample->all;
  Eigen::VectorXd sums = Eigen::VectorXd::Zero(all.cols());
  for (const int entry : entries) {
    const Eigen::Index k = free_index(fitted, entry);
    if (k >= 0) sums += all.row(k).transpose().array().exp().matrix();
  }
  const MarginalDensity marginal = marginal_of(Eigen::VectorXd(sums.array().log().matrix()));
  return {value,
          marginal.sigma,
          marginal.central68.low,
          marginal.central68.high,
          marginal.central95.low,
          marginal.central95.high};
}

/// ln of a sum of column densities from their logarithms, with the error and the ranges of the curvature.
Estimate ln_sum(const FittedModel& fitted, const std::vector<int>& entries) {
  double sum = 0.0;
  for (const int entry : entries) sum += std::exp(fitted.fit.state[entry]);
  double variance = 0.0;
  for (const int a : entries) {
    for (const int b : entries) {
      variance += std::exp(fitted.fit.state[a] + fitted.fit.state[b]) / (sum * sum) *
                  covariance_between(fitted, a, b);
    }
  }
  const Estimate plain = plain_estimate(std::log(sum), std::sqrt(variance));
  const bool drawn = fitted.posterior && fitted.posterior->sample && fitted.posterior->sample->usable();
  return drawn ? drawn_sum(fitted, entries, plain.value) : plain;
}

/// Components by rising temperature.
std::vector<int> order_of_components(const FittedModel& fitted) {
  const StateLayout& layout = fitted.setup.model->layout();
  std::vector<int> order(static_cast<std::size_t>(layout.components));
  for (int c = 0; c < layout.components; ++c) order[static_cast<std::size_t>(c)] = c;
  std::stable_sort(order.begin(), order.end(), [&](int a, int b) {
    return fitted.fit.state[layout.ln_temperature(a)] < fitted.fit.state[layout.ln_temperature(b)];
  });
  return order;
}

std::vector<int> columns_of_component(const StateLayout& layout, int component) {
  std::vector<int> entries;
  for (int isomer = 0; isomer < layout.isomers; ++isomer)
    entries.push_back(layout.ln_column(component, isomer));
  return entries;
}

void set_column_of(Component& component, const Estimate& ln_column) {
  component.column_density_cm2 = exponential(ln_column);
  component.log10_column_density_cm2 = to_log10(ln_column);
}

double size_arcsec(const FittedModel& fitted, int component) {
  const double size = std::exp(fitted.fit.state[fitted.setup.model->layout().ln_size(component)]);
  return std::isfinite(size) ? size : kNotKnown;
}

void add_isomers(Result& result, const FittedModel& fitted, const RunOptions& options) {
  const StateLayout& layout = fitted.setup.model->layout();
  for (int isomer = 0; isomer < layout.isomers; ++isomer) {
    Component part;
    part.name = fitted.setup.isomers[static_cast<std::size_t>(isomer)];
    part.temperature_k = result.temperature_k;
    set_column_of(part, entry_estimate(fitted, layout.ln_column(0, isomer), options));
    part.source_size_arcsec = size_arcsec(fitted, 0);
    result.components.push_back(part);
  }
}

void add_components(Result& result, const FittedModel& fitted, const RunOptions& options) {
  const StateLayout& layout = fitted.setup.model->layout();
  for (const int c : order_of_components(fitted)) {
    Component part;
    part.name = fmt::format("component {}", result.components.size() + 1);
    part.temperature_k = exponential(entry_estimate(fitted, layout.ln_temperature(c), options));
    set_column_of(part, layout.isomers == 1 ? entry_estimate(fitted, layout.ln_column(c), options)
                                            : ln_sum(fitted, columns_of_component(layout, c)));
    part.source_size_arcsec = size_arcsec(fitted, c);
    result.components.push_back(part);
  }
}

/// T of the component that holds most of the molecules, N of all.
void set_total(Result& result, const FittedModel& fitted) {
  const StateLayout& layout = fitted.setup.model->layout();
  std::vector<int> entries;
  for (int c = 0; c < layout.components; ++c) {
    for (const int entry : columns_of_component(layout, c)) entries.push_back(entry);
  }
  set_column(result, ln_sum(fitted, entries));
  if (layout.components == 1) return;
  const auto most = std::max_element(result.components.begin(), result.components.end(),
                                     [](const Component& a, const Component& b) {
                                       return a.column_density_cm2.value < b.column_density_cm2.value;
                                     });
  result.temperature_k = most->temperature_k;
  result.warnings.push_back(
      fmt::format("T is that of {}, which holds most of the molecules; N is the sum of all "
                  "components",
                  most->name));
}

void set_single(Result& result, const FittedModel& fitted, const RunOptions& options, bool only_ranges) {
  const StateLayout& layout = fitted.setup.model->layout();
  const bool several = result.status == Status::several;
  Estimate ln_t = entry_estimate(fitted, layout.ln_temperature(0), options);
  Estimate ln_n = entry_estimate(fitted, layout.ln_column(0), options);
  if (only_ranges) {
    if (!result.temperature_fixed) ln_t = as_range(ln_t, several);
    ln_n = as_range(ln_n, several);
  }
  result.temperature_k = exponential(ln_t);
  set_column(result, ln_n);
  const double mixed = covariance_between(fitted, layout.ln_column(0), layout.ln_temperature(0));
  if (!result.temperature_fixed && !only_ranges)
    result.correlation_ln_n_t = mixed / (ln_t.error * ln_n.error);
}

std::string parameter_name(const FittedModel& fitted, int entry) {
  const StateLayout& layout = fitted.setup.model->layout();
  if (entry == layout.background()) return "background_k";
  const int place = entry % (layout.isomers + 2);
  std::string name = place < layout.isomers    ? "ln_column_density_cm2"
                     : place == layout.isomers ? "ln_temperature_k"
                                               : "ln_source_size_arcsec";
  if (layout.isomers > 1 && place < layout.isomers) {
    name += "_" + fitted.setup.isomers[static_cast<std::size_t>(place)];
  }
  if (layout.components > 1) {
    const std::vector<int> order = order_of_components(fitted);
    const auto at = std::find(order.begin(), order.end(), entry / (layout.isomers + 2));
    name += fmt::format("_{}", at - order.begin() + 1);
  }
  return name;
}

void set_parameters(Result& result, const FittedModel& fitted) {
  const Eigen::MatrixXd& covariance = covariance_of(fitted.fit);
  for (Eigen::Index k = 0; k < fitted.fit.free.size(); ++k) {
    const int entry = fitted.likelihood->free_entries()[static_cast<std::size_t>(k)];
    result.parameters.push_back(
        {parameter_name(fitted, entry), fitted.fit.free[k], std::sqrt(covariance(k, k))});
    result.parameter_covariance.emplace_back();
    for (Eigen::Index j = 0; j < covariance.cols(); ++j) {
      result.parameter_covariance.back().push_back(covariance(k, j));
    }
  }
}

void set_goodness(Result& result, const FittedModel& fitted) {
  result.dof = fitted.fit.dof;
  if (fitted.setup.kind.noise != NoiseModel::gaussian) return;  // a heavy tail has no chi2
  result.chi2 = fitted.fit.chi2;
  result.p_value = chi2_survival(fitted.fit.chi2, fitted.fit.dof);
}

// ---- predictions
// -------------------------------------------------------------------------------------------

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

void set_estimates(Result& result, const FittedModel& fitted, const Species& species,
                   const RunOptions& options, bool only_ranges) {
  const StateLayout& layout = fitted.setup.model->layout();
  const bool several_parts = layout.components > 1 || layout.isomers > 1;
  set_parameters(result, fitted);
  set_goodness(result, fitted);
  result.background_k = fitted.fit.state[layout.background()];
  if (!several_parts) {
    set_single(result, fitted, options, only_ranges);
  } else if (!only_ranges) {
    if (layout.components == 1) {
      result.temperature_k = exponential(entry_estimate(fitted, layout.ln_temperature(0), options));
      add_isomers(result, fitted, options);
    } else {
      add_components(result, fitted, options);
    }
    set_total(result, fitted);
  }
  if (options.source_size_free && layout.components == 1) {
    Estimate ln_size = entry_estimate(fitted, layout.ln_size(0), options);
    if (only_ranges || std::isnan(ln_size.high95))
      ln_size = as_range(ln_size, result.status == Status::several);
    result.source_size_fit_arcsec = exponential(ln_size);
    result.source_size_arcsec = result.source_size_fit_arcsec.value;
  }
  const double t = std::exp(fitted.fit.state[layout.ln_temperature(0)]);
  if (std::isfinite(result.temperature_k.value) && layout.components == 1) {
    set_partition(
        result,
        species.partition->at(std::clamp(t, species.partition->lowest_k(), species.partition->highest_k())),
        *species.partition);
  }
}

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
