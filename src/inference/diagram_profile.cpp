#include "diagram_profile.hpp"

#include <cmath>
#include <limits>

#include <trotline/base/errors.hpp>
#include <trotline/excitation/thin_line.hpp>

namespace trotline {
namespace {

void require_size(const char* argument, Eigen::Index size, Eigen::Index lines) {
  if (size != lines) throw DomainError(argument, static_cast<double>(size), "one for each line");
}

}  // namespace

DiagramProfile::DiagramProfile(const DiagramData& data) : data_(data), cholesky_(data.covariance) {
  const Eigen::Index lines = data.ln_nu_over_gu.size();
  require_size("upper_energy_k.size()", data.upper_energy_k.size(), lines);
  require_size("frequency_hz.size()", data.frequency_hz.size(), lines);
  require_size("covariance.rows()", data.covariance.rows(), lines);
  if (!data.ln_nu_over_gu.allFinite()) throw DomainError("ln_nu_over_gu", std::nan(""), "finite");
  if (!data.upper_energy_k.allFinite()) throw DomainError("upper_energy_k", std::nan(""), "finite");
  if (!(data.background_k >= 0.0)) throw DomainError("background_k", data.background_k, "not below 0");
  if (!data.covariance.allFinite() || cholesky_.info() != Eigen::Success) {
    throw DomainError("covariance", std::nan(""), "finite, symmetric and positive definite");
  }
  whitened_ones_ = cholesky_.matrixL().solve(Eigen::VectorXd::Ones(lines));
  intercept_weight_ = whitened_ones_.squaredNorm();
}

DiagramProfile::Point DiagramProfile::at(double beta_per_k) const {
  const Eigen::VectorXd y = data_.ln_nu_over_gu + beta_per_k * data_.upper_energy_k - ln_contrast(data_, beta_per_k);
  if (!y.allFinite()) return {std::nan(""), std::numeric_limits<double>::infinity()};
  const Eigen::VectorXd whitened = cholesky_.matrixL().solve(y);
  const double intercept = whitened_ones_.dot(whitened) / intercept_weight_;
  return {intercept, (whitened - intercept * whitened_ones_).squaredNorm()};
}

Eigen::VectorXd ln_contrast(const DiagramData& data, double beta_per_k) {
  Eigen::VectorXd contrast = Eigen::VectorXd::Zero(data.frequency_hz.size());
  if (data.background_k == 0.0) return contrast;
  for (Eigen::Index i = 0; i < contrast.size(); ++i) {
    const double left = background_contrast(data.frequency_hz[i], 1.0 / beta_per_k, data.background_k);
    contrast[i] = left > 0.0 ? std::log(left) : -std::numeric_limits<double>::infinity();
  }
  return contrast;
}

}  // namespace trotline
