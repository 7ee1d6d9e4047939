#include <algorithm>
#include <thread>
#include <vector>

#include <trotline/base/errors.hpp>
#include <trotline/base/vectorised.hpp>
#include <trotline/inference/diagram_batch.hpp>

namespace trotline {
namespace {

// Positions that are worked at together: a page of each column, which memory gives at its full pace; the sums
// stay in the first cache and the columns in the second, for the second pass.
constexpr Eigen::Index kBlock = 512;
// Arrays a page apart would all fall into the same few places of the first cache.
constexpr Eigen::Index kStride = kBlock + 24;

struct Sums {
  alignas(64) double weight[kStride];
  alignas(64) double x[kStride];
  alignas(64) double y[kStride];
  alignas(64) double xx[kStride];
  alignas(64) double xy[kStride];
  alignas(64) double chi2[kStride];
  alignas(64) double slope[kStride];
  alignas(64) double mean[kStride];
};

/// Two lines at a time: the sums go through the cache half as often.
TROTLINE_VECTORISED void add_lines(Sums& sums, Eigen::Index n, double energy1, double energy2,
                                   const double* __restrict y1, const double* __restrict sigma1,
                                   const double* __restrict y2, const double* __restrict sigma2,
                                   double* __restrict weight1, double* __restrict weight2) {
  for (Eigen::Index i = 0; i < n; ++i) {
    const double w1 = 1.0 / (sigma1[i] * sigma1[i]);
    const double w2 = 1.0 / (sigma2[i] * sigma2[i]);
    const double x1 = w1 * energy1;
    const double x2 = w2 * energy2;
    weight1[i] = w1;
    weight2[i] = w2;
    sums.weight[i] += w1 + w2;
    sums.x[i] += x1 + x2;
    sums.y[i] += w1 * y1[i] + w2 * y2[i];
    sums.xx[i] += x1 * energy1 + x2 * energy2;
    sums.xy[i] += x1 * y1[i] + x2 * y2[i];
  }
}

TROTLINE_VECTORISED void add_line(Sums& sums, Eigen::Index n, double energy, const double* __restrict y,
                                  const double* __restrict sigma, double* __restrict weight) {
  for (Eigen::Index i = 0; i < n; ++i) {
    const double w = 1.0 / (sigma[i] * sigma[i]);
    const double x = w * energy;
    weight[i] = w;
    sums.weight[i] += w;
    sums.x[i] += x;
    sums.y[i] += w * y[i];
    sums.xx[i] += x * energy;
    sums.xy[i] += x * y[i];
  }
}

TROTLINE_VECTORISED void add_chi2(Sums& sums, Eigen::Index n, double energy, const double* __restrict y,
                                  const double* __restrict weight) {
  for (Eigen::Index i = 0; i < n; ++i) {
    const double residual = y[i] - sums.mean[i] - sums.slope[i] * energy;
    sums.chi2[i] += weight[i] * residual * residual;
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

/// @param weights  scratch, kStride numbers for each line
void fit_block(const DiagramBatch& batch, double centre, Eigen::Index first, Eigen::Index n, double* weights,
               const Outputs& all) {
  Sums sums{};
  const auto y = [&](Eigen::Index line) { return batch.ln_nu_over_gu.col(line).data() + first; };
  const auto sigma = [&](Eigen::Index line) { return batch.sigma.col(line).data() + first; };
  const auto x = [&](Eigen::Index line) { return batch.upper_energy_k[line] - centre; };
  const auto weight = [&](Eigen::Index line) { return weights + line * kStride; };
  const Outputs out{all.intercept + first,     all.beta + first,       all.intercept_variance + first,
                    all.beta_variance + first, all.covariance + first, all.chi2 + first};
  const Eigen::Index lines = batch.upper_energy_k.size();
  Eigen::Index line = 0;
  for (; line + 1 < lines; line += 2) {
    add_lines(sums, n, x(line), x(line + 1), y(line), sigma(line), y(line + 1), sigma(line + 1), weight(line),
              weight(line + 1));
  }
  if (line < lines) add_line(sums, n, x(line), y(line), sigma(line), weight(line));
  solve(sums, n, centre, out);
  for (line = 0; line < lines; ++line) add_chi2(sums, n, x(line), y(line), weight(line));
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
  DiagramBatchFit fit;
  fit_thermal_lines(batch, fit, threads);
  return fit;
}

void fit_thermal_lines(const DiagramBatch& batch, DiagramBatchFit& fit, int threads) {
  require(batch);
  const Eigen::Index positions = batch.sigma.rows();
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
    std::vector<double> weights(static_cast<std::size_t>(kStride * batch.upper_energy_k.size()));
    for (Eigen::Index block = blocks * worker / workers; block < blocks * (worker + 1) / workers; ++block) {
      fit_block(batch, centre, block * kBlock, std::min(kBlock, positions - block * kBlock), weights.data(),
                out);
    }
  };
  std::vector<std::jthread> others;
  for (Eigen::Index worker = 1; worker < workers; ++worker) others.emplace_back(work, worker);
  work(0);
}

}  // namespace trotline
