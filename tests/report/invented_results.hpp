// Results made by hand for the tests of this room: an invented symmetric top toward an invented source.
#pragma once

#include <boost/math/special_functions/gamma.hpp>
#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <random>
#include <string>
#include <vector>

#include <trotline/analysis/result.hpp>

namespace trotline::testing_room {

struct Invention {
  std::size_t lines = 9;
  double temperature_k = 62.0;
  double log10_column_density_cm2 = 14.09;
  double relative_error = 0.08;
  bool ladders = true;     ///< several K to each J; false: one line to each J
  std::size_t limits = 0;  ///< the last lines become upper limits
  std::size_t unused = 0;  ///< the first lines are left out
  unsigned seed = 5;
};

inline LineResult invented_line(const Invention& invention, std::size_t i) {
  constexpr double kEnergyStep = 0.44;  // [K], about h B / k for B = 9.2 GHz
  const int per_ladder = invention.ladders ? 5 : 1;
  const int j = (invention.ladders ? 5 : 1) + static_cast<int>(i) / per_ladder * (invention.ladders ? 3 : 1);
  const int k = static_cast<int>(i) % per_ladder;
  const double scale = invention.ladders ? 1.0 : 6.0;
  LineResult line;
  line.transition =
      invention.ladders ? fmt::format("{}({})-{}({})", j, k, j - 1, k) : fmt::format("{}-{}", j, j - 1);
  line.frequency_mhz = 18397.8 * j * scale - 0.4 * k * k * j;
  line.upper_energy_k = scale * kEnergyStep * j * (j + 1) + 7.13 * k * k;
  line.upper_degeneracy = (2 * j + 1) * (k > 0 && k % 3 == 0 ? 4 : 2);
  line.einstein_a_s1 = 3.1e-9 * std::pow(scale * j, 3) * (1.0 - static_cast<double>(k * k) / (j * j));
  line.table_line = i + 2;
  line.beam_fwhm_arcsec = 2460.0 / (line.frequency_mhz / 1000.0);
  line.fwhm_km_s = 4.2;
  return line;
}

/// N_u = 1.943e3 nu[GHz]^2 W / A for thin lines without background; the factor is 8 pi k / (h c^3) in
/// these units.
inline double column_to_intensity(const LineResult& line) {
  return line.einstein_a_s1 / (1.943e3 * std::pow(line.frequency_mhz / 1000.0, 2));
}

/// Weighted straight line through the lines in use; fills the diagram line, T, N and chi2.
inline void fit_straight_line(Result& result) {
  double s = 0, sx = 0, sy = 0, sxx = 0, sxy = 0;
  for (const LineResult& line : result.lines) {
    if (!line.used || line.limit) continue;
    const double w = 1.0 / (line.ln_nu_gu_error * line.ln_nu_gu_error);
    s += w;
    sx += w * line.upper_energy_k;
    sy += w * line.ln_nu_gu;
    sxx += w * line.upper_energy_k * line.upper_energy_k;
    sxy += w * line.upper_energy_k * line.ln_nu_gu;
    ++result.dof;
  }
  const double determinant = s * sxx - sx * sx;
  const double slope = (s * sxy - sx * sy) / determinant;
  const double intercept = (sxx * sy - sx * sxy) / determinant;
  result.dof -= 2;
  result.diagram_line = {intercept, slope, sxx / determinant, s / determinant, -sx / determinant};
}

inline Estimate symmetric_estimate(double value, double error) {
  return {value, error, value - error, value + error, value - 2 * error, value + 2 * error};
}

inline void fill_model(Result& result) {
  const DiagramLine& fit = result.diagram_line;
  result.chi2 = 0.0;
  for (LineResult& line : result.lines) {
    const double y = fit.intercept + fit.slope_per_k * line.upper_energy_k;
    line.model_intensity_k_km_s = std::exp(y) * line.upper_degeneracy * column_to_intensity(line);
    line.residual_sigma = (line.ln_nu_gu - y) / line.ln_nu_gu_error;
    if (line.used && !line.limit) result.chi2 += line.residual_sigma * line.residual_sigma;
  }
}

inline void fill_estimates(Result& result) {
  const DiagramLine& fit = result.diagram_line;
  const double t = -1.0 / fit.slope_per_k;
  result.temperature_k = symmetric_estimate(t, t * t * std::sqrt(fit.slope_variance));
  result.partition_function = 3.9 * std::pow(t, 1.5);
  const double mean_energy = 1.5 * t;
  const double ln_error = std::sqrt(fit.intercept_variance + 2.0 * mean_energy * fit.covariance +
                                    mean_energy * mean_energy * fit.slope_variance);
  const double ln_n = fit.intercept + std::log(result.partition_function);
  result.log10_column_density_cm2 = symmetric_estimate(ln_n / std::log(10.0), ln_error / std::log(10.0));
  const double n = std::exp(ln_n);
  result.column_density_cm2 = {n,
                               n * ln_error,
                               n * std::exp(-ln_error),
                               n * std::exp(ln_error),
                               n * std::exp(-2 * ln_error),
                               n * std::exp(2 * ln_error)};
  result.correlation_ln_n_t = 0.42;
  if (result.dof > 0) result.p_value = boost::math::gamma_q(0.5 * result.dof, 0.5 * result.chi2);
}

inline void describe(Result& result) {
  result.source = "Lantern Cloud 4";
  result.species = "ch3cn-like";
  result.formula = "CH3CN";
  result.method = "rotation diagram";
  result.assumptions = {"LTE: one temperature for every line", "optically thin lines"};
  result.partition_function_source = "sum over levels";
  result.background_k = 2.7255;
  result.verdict = "One temperature describes the lines.";
  result.checks = {{"chi2", 0.37, Outcome::pass, "the scatter is what the errors allow"},
                   {"curvature", 0.6, Outcome::pass, "the points do not bend"},
                   {"limits", kNotKnown, Outcome::not_testable, "the table holds no limit"}};
  result.provenance = {"0.1.0",
                       "lantern.csv",
                       "00aa11bb22cc33dd",
                       "species/ch3cn-like.yaml",
                       "44ee55ff66778899",
                       {"constants: invented for tests"},
                       "CODATA 2018",
                       {{"background", "2.7255 K"}}};
}

inline Result invented_result(const Invention& invention = {}) {
  Result result;
  describe(result);
  std::mt19937_64 random(invention.seed);
  std::normal_distribution<double> noise(0.0, invention.relative_error);
  const double intercept = invention.log10_column_density_cm2 * std::log(10.0) -
                           std::log(3.9 * std::pow(invention.temperature_k, 1.5));
  for (std::size_t i = 0; i < invention.lines; ++i) {
    LineResult line = invented_line(invention, i);
    line.ln_nu_gu = intercept - line.upper_energy_k / invention.temperature_k + noise(random);
    line.ln_nu_gu_error = invention.relative_error;
    line.limit = i + invention.limits >= invention.lines;
    line.used = i >= invention.unused;
    if (line.limit) line.ln_nu_gu += 4.0 * invention.relative_error;
    if (!line.used) line.ln_nu_gu += 6.0 * invention.relative_error;
    if (!line.used) line.why_unused = "left out by request";
    line.intensity_k_km_s = std::exp(line.ln_nu_gu) * line.upper_degeneracy * column_to_intensity(line);
    line.intensity_error_k_km_s = invention.relative_error * line.intensity_k_km_s;
    line.optical_depth = 0.02 * std::exp(-0.3 * static_cast<double>(i));
    result.lines.push_back(line);
  }
  fit_straight_line(result);
  fill_model(result);
  fill_estimates(result);
  result.status = Status::done;
  return result;
}

/// One line, no stated temperature: N(T) and no fit.
inline Result one_line_result() {
  Result result = invented_result({.lines = 3});
  result.lines.resize(1);
  result.lines[0].model_intensity_k_km_s = result.lines[0].residual_sigma = kNotKnown;
  result.status = Status::one_line;
  result.message = "One line gives no temperature; N is given for a range of temperatures.";
  result.temperature_k = result.column_density_cm2 = result.log10_column_density_cm2 = Estimate{};
  result.diagram_line = DiagramLine{};
  result.chi2 = result.p_value = result.correlation_ln_n_t = result.partition_function = kNotKnown;
  result.dof = 0;
  for (const double t : {10.0, 30.0, 100.0, 300.0}) {
    result.columns_at_temperatures.push_back({t, 1.1e12 * std::pow(t, 1.5), 0.9e11 * std::pow(t, 1.5)});
  }
  return result;
}

/// The points rise with energy: the straight line is there, a temperature is not.
inline Result not_thermal_result() {
  Result result = invented_result({.lines = 5});
  result.status = Status::not_thermal;
  result.message = "ln(N_u/g_u) does not fall with E_u.";
  result.diagram_line = {24.0, 0.0012, 0.01, 0.0008 * 0.0008, -4e-6};
  for (std::size_t i = 0; i < result.lines.size(); ++i) {
    result.lines[i].ln_nu_gu = 24.0 + 0.0012 * result.lines[i].upper_energy_k + (i % 2 == 0 ? 0.08 : -0.08);
  }
  fill_model(result);
  result.temperature_k = result.column_density_cm2 = result.log10_column_density_cm2 = Estimate{};
  result.partition_function = result.correlation_ln_n_t = kNotKnown;
  return result;
}

inline Result only_limits_result() {
  Result result = invented_result({.lines = 4, .limits = 2});
  for (LineResult& line : result.lines) {
    line.limit = true;
    line.model_intensity_k_km_s = line.residual_sigma = kNotKnown;
  }
  result.status = Status::only_limits;
  result.message = "No line is detected.";
  result.temperature_k = result.column_density_cm2 = result.log10_column_density_cm2 = Estimate{};
  result.diagram_line = DiagramLine{};
  result.chi2 = result.p_value = result.correlation_ln_n_t = result.partition_function = kNotKnown;
  result.dof = 0;
  return result;
}

/// Texts that attack whatever prints them: quotes, escapes, markup, controls, scripts of the world.
inline const std::vector<std::string>& hostile_texts() {
  static const std::vector<std::string> kTexts = {"\"quoted\" 'single' `touch pwned`",
                                                  "back\\slash \\n \\101 \\\" end\\",
                                                  "a@b_c^d {e} %f $g #h ~i &j ;k |l",
                                                  "line one\nline two\rthree\ttab",
                                                  "<b>&amp;</b> <!-- x --> ]]> &#65; &",
                                                  "星雲 Ωμέγα Жук 🌟 é ß",
                                                  "\"; system('touch pwned') #",
                                                  "'.system(\"touch pwned\").'",
                                                  "@file $0 ${HOME} %s %d {/Symbol a} \\@",
                                                  "#comment",
                                                  "\"",
                                                  "",
                                                  "NaN",
                                                  std::string("nul\0byte", 8),
                                                  "bad\xFF\xC0\xAF utf8",
                                                  "\x1b[31mred\x1b[0m \u202Ereversed\u2066",
                                                  "[1,2]: {a: b}, - c, ? d, ! e, * f",
                                                  std::string(500, 'W')};
  return kTexts;
}

/// Puts `text` wherever a user's text may stand.
inline Result with_hostile_text(Result result, const std::string& text) {
  result.source = result.species = result.formula = result.method = result.message = result.verdict = text;
  result.partition_function_source = text;
  result.assumptions = {text};
  result.warnings = {text, text};
  for (LineResult& line : result.lines) {
    line.transition = line.note = line.blend = line.calibration_group = line.why_unused = text;
  }
  for (Check& check : result.checks) check.name = check.meaning = text;
  result.provenance = {text, text, text, text, text, {text}, text, {{text, text}}};
  return result;
}

}  // namespace trotline::testing_room
