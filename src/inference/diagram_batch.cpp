#include <algorithm>
#include <thread>
#include <vector>

#include <trotline/base/errors.hpp>
#include <trotline/base/vectorised.hpp>
#include <trotline/inference/diagram_batch.hpp>

namespace trotline {
namespace {

// Positions that are worked at together: their data and sums stay in the first cache.
constexpr Eigen::Index kBlock = 64;

struct Sums {
  alignas(64) double weight[kBlock];
  alignas(64) double x[kBlock];
  alignas(64) double y[kBlock];
  alignas(64) double xx[kBlock];
  alignas(64) double xy[kBlock];
  alignas(64) double chi2[kBlock];
  alignas(64) double slope[kBlock];
  alignas(64) double mean[kBlock];
};

TROTLINE_VECTORISED void add_line(Sums& sums, Eigen::Index n, double energy, const double* __restrict y,
                                  const double* __restrict sigma) {
  for (Eigen::Index i = 0; i < n; ++i) {
    const double weight = 1.0 / (sigma[i] * sigma[i]);
    const double weighted = weight * y[i];
    sums.weight[i] += weight;
    sums.x[i] += weight * energy;
    sums.y[i] += weighted;
    sums.xx[i] += weight * energy * energy;
    sums.xy[i] += weighted * energy;
  }
}

TROTLINE_VECTORISED void add_chi2(Sums& sums, Eigen::Index n, double energy, const double* __restrict y,
                                  const double* __restrict sigma) {
  for (Eigen::Index i = 0; i < n; ++i) {
    const double residual = (y[i] - sums.mean[i] - sums.slope[i] * energy) / sigma[i];
    sums.chi2[i] += residual * residual;
  }
}

struct Outputs {
  double* intercept;
  double* beta;
  double* intercept_variance;
  double* beta_variance;
  double* covariance;
  double* chi2;
};

/// Energies in the sums are from `centre` on; the intercept is that at zero.
TROTLINE_VECTORISED void solve(Sums& sums, Eigen::Index n, double centre, const Outputs& out) {
  for (Eigen::Index i = 0; i < n; ++i) {
    const double determinant = sums.weight[i] * sums.xx[i] - sums.x[i] * sums.x[i];
    const double scale = 1.0 / determinant;
    const double slope = (sums.weight[i] * sums.xy[i] - sums.x[i] * sums.y[i]) * scale;
    const double mean = (sums.xx[i] * sums.y[i] - sums.x[i] * sums.xy[i]) * scale;
    const double slope_variance = sums.weight[i] * scale;
    const double mean_variance = sums.xx[i] * scale;
    const double mixed = -sums.x[i] * scale;  // of the value at the centre and the slope
    sums.slope[i] = slope;
    sums.mean[i] = mean;
    out.beta[i] = -slope;
    out.intercept[i] = mean - slope * centre;
    out.beta_variance[i] = slope_variance;
    out.intercept_variance[i] = mean_variance - 2.0 * centre * mixed + centre * centre * slope_variance;
    out.covariance[i] = centre * slope_variance - mixed;
  }
}

void fit_block(const DiagramBatch& batch, double centre, Eigen::Index first, Eigen::Index n,
               const Outputs& all) {
  Sums sums{};
  const auto column = [&](const Eigen::ArrayXXd& array, Eigen::Index line) {
    return array.col(line).data() + first;
  };
  const Outputs out{all.intercept + first,     all.beta + first,       all.intercept_variance + first,
                    all.beta_variance + first, all.covariance + first, all.chi2 + first};
  const Eigen::Index lines = batch.upper_energy_k.size();
  for (Eigen::Index line = 0; line < lines; ++line) {
    add_line(sums, n, batch.upper_energy_k[line] - centre, column(batch.ln_nu_over_gu, line),
             column(batch.sigma, line));
  }
  solve(sums, n, centre, out);
  for (Eigen::Index line = 0; line < lines; ++line) {
    add_chi2(sums, n, batch.upper_energy_k[line] - centre, column(batch.ln_nu_over_gu, line),
             column(batch.sigma, line));
  }
  std::copy(sums.chi2, sums.chi2 + n, out.chi2);
}

void require(const DiagramBatch& batch) {
  const Eigen::Index lines = batch.upper_energy_k.size();
  if (lines < 1) throw DomainError("upper_energy_k.size()", 0.0, "at least 1");
  if (batch.ln_nu_over_gu.cols() != lines || batch.sigma.cols() != lines ||
      batch.sigma.rows() != batch.ln_nu_over_gu.rows()) {
    throw DomainError("sigma.cols()", static_cast<double>(batch.sigma.cols()),
                      "a column for each line, a row for each position");
  }
}

}  // namespace

DiagramBatchFit fit_thermal_lines(const DiagramBatch& batch, int threads) {
  require(batch);
  const Eigen::Index positions = batch.sigma.rows();
  DiagramBatchFit fit;
  for (auto* array : {&fit.intercept, &fit.inverse_temperature_per_k, &fit.intercept_variance,
                      &fit.inverse_temperature_variance, &fit.covariance, &fit.chi2}) {
    array->resize(positions);
  }
  const Outputs out{fit.intercept.data(),          fit.inverse_temperature_per_k.data(),
                    fit.intercept_variance.data(), fit.inverse_temperature_variance.data(),
                    fit.covariance.data(),         fit.chi2.data()};
  const double centre = batch.upper_energy_k.mean();
  const Eigen::Index blocks = (positions + kBlock - 1) / kBlock;
  const Eigen::Index workers = std::clamp<Eigen::Index>(threads, 1, std::max<Eigen::Index>(1, blocks));
  const auto work = [&](Eigen::Index worker) {
    for (Eigen::Index block = blocks * worker / workers; block < blocks * (worker + 1) / workers; ++block) {
      fit_block(batch, centre, block * kBlock, std::min(kBlock, positions - block * kBlock), out);
    }
  };
  std::vector<std::jthread> others;
  for (Eigen::Index worker = 1; worker < workers; ++worker) others.emplace_back(work, worker);
  work(0);
  return fit;
}

}  // namespace trotline
