// One datum's share of -ln L, as a function of its predicted intensity m.
#pragma once

#include <cmath>

#include <trotline/inference/intensity_likelihood.hpp>
#include <trotline/inference/normal_tail.hpp>

namespace trotline {

struct DatumTerm {
  double cost;         ///< rho, with constants left out so that it is not below 0
  double slope;        ///< d rho/dm
  double curvature;    ///< d2 rho/dm2
  double information;  ///< what the fit uses in place of the curvature: its expectation, never below 0
  double residual;     ///< signed root of 2 rho, positive where m is too large
  double residual_slope;
};

inline DatumTerm gaussian_term(const Measurement& datum, double m) {
  const double weight = 1.0 / datum.sigma_k_km_s;
  const double e = (m - datum.intensity_k_km_s) * weight;
  return {0.5 * e * e, e * weight, weight * weight, weight * weight, e, weight};
}

inline DatumTerm limit_term(const Measurement& datum, double m) {
  const double weight = 1.0 / datum.sigma_k_km_s;
  const double x = (datum.intensity_k_km_s - m) * weight;
  const double cost = -log_normal_cdf(x);
  const double mills = log_normal_cdf_slope(x);
  const double curvature = mills * (mills + x) * weight * weight;
  const double residual = std::sqrt(2.0 * cost);
  // far below the limit the cost underflows and its root goes flat
  const double residual_slope = residual > 0.0 ? mills * weight / residual : 0.0;
  return {cost, mills * weight, curvature, curvature > 0.0 ? curvature : 0.0, residual, residual_slope};
}

inline DatumTerm student_term(const Measurement& datum, double dof, double m) {
  const double weight = 1.0 / datum.sigma_k_km_s;
  const double e = (m - datum.intensity_k_km_s) * weight;
  const double q = 1.0 + e * e / dof;
  const double scale = (dof + 1.0) / dof;
  const double cost = 0.5 * (dof + 1.0) * std::log1p(e * e / dof);
  const double slope = scale * e / q * weight;
  const double curvature = scale * (2.0 - q) / (q * q) * weight * weight;
  const double information = (dof + 1.0) / (dof + 3.0) * weight * weight;
  const double residual = std::copysign(std::sqrt(2.0 * cost), e);
  const double residual_slope = std::abs(e) > 1e-6 ? slope / residual : std::sqrt(scale) * weight;
  return {cost, slope, curvature, information, residual, residual_slope};
}

inline DatumTerm datum_term(const LikelihoodProblem& problem, const Measurement& datum, double m) {
  if (datum.is_limit) return limit_term(datum, m);
  if (problem.noise == NoiseModel::student_t) return student_term(datum, problem.student_dof, m);
  return gaussian_term(datum, m);
}

}  // namespace trotline
