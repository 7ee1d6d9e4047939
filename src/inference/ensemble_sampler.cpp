#include <unsupported/Eigen/FFT>

#include <algorithm>
#include <bit>
#include <cmath>
#include <complex>
#include <limits>
#include <thread>

#include <trotline/base/errors.hpp>
#include <trotline/inference/ensemble_sampler.hpp>

#include "ensemble_walk.hpp"

namespace trotline {
namespace {

constexpr int kFirstSteps = 400;
constexpr double kBurnInAutocorrelations = 10.0;
constexpr double kWindow = 5.0;  // of the sum over lags, in autocorrelation times

int walkers_of(const EnsembleOptions& options, Eigen::Index parameters) {
  return options.walkers > 0 ? options.walkers : std::max(32, 8 * static_cast<int>(parameters));
}

void require(const EnsembleTarget& target, const EnsembleOptions& options) {
  const Eigen::Index size = target.lower.size();
  if (size < 1 || target.upper.size() != size)
    throw DomainError("upper.size()", static_cast<double>(size), "that of lower");
  if (target.peaks.empty()) throw DomainError("peaks.size()", 0.0, "at least 1");
  for (const Eigen::VectorXd& peak : target.peaks) {
    if (peak.size() != size)
      throw DomainError("peak.size()", static_cast<double>(peak.size()), "that of lower");
  }
  const int walkers = walkers_of(options, size);
  if (walkers % 2 != 0 || walkers < 2 * size + 2) {
    throw DomainError("walkers", walkers, "even, and at least twice the parameters and two");
  }
  if (options.ensembles < 1) throw DomainError("ensembles", options.ensembles, "at least 1");
}

void walk_all(std::vector<EnsembleWalk>& walks, int steps, int threads) {
  const auto workers = static_cast<std::size_t>(std::clamp<int>(threads, 1, static_cast<int>(walks.size())));
  const auto work = [&](std::size_t first) {
    for (std::size_t i = first; i < walks.size(); i += workers) walks[i].walk(steps);
  };
  std::vector<std::jthread> others;
  for (std::size_t worker = 1; worker < workers; ++worker) others.emplace_back(work, worker);
  work(0);
}

/// One parameter of all walkers of all ensembles.
Eigen::MatrixXd all_series(const std::vector<EnsembleWalk>& walks, Eigen::Index parameter, int from) {
  Eigen::MatrixXd first = walks.front().series(parameter, from);
  Eigen::MatrixXd all(first.rows(), first.cols() * static_cast<Eigen::Index>(walks.size()));
  for (std::size_t i = 0; i < walks.size(); ++i) {
    all.middleCols(static_cast<Eigen::Index>(i) * first.cols(), first.cols()) =
        walks[i].series(parameter, from);
  }
  return all;
}

int burn_in(int steps, double autocorrelation) {
  const double long_enough = std::max(steps / 3.0, kBurnInAutocorrelations * autocorrelation);
  return static_cast<int>(std::min(long_enough, 0.5 * steps));
}

/// Fills the diagnostics of the walk as it stands. @return whether it is long enough
bool diagnose(const std::vector<EnsembleWalk>& walks, const EnsembleOptions& options,
              EnsembleSample& sample) {
  const Eigen::Index parameters = sample.autocorrelation_steps.size();
  const int steps = walks.front().steps();
  for (Eigen::Index p = 0; p < parameters; ++p) {
    sample.autocorrelation_steps[p] = autocorrelation_time(all_series(walks, p, steps / 3));
  }
  const double slowest = sample.autocorrelation_steps.maxCoeff();
  sample.burn_in_steps = std::isfinite(slowest) ? burn_in(steps, slowest) : steps / 2;
  sample.steps = steps - sample.burn_in_steps;
  const double states = static_cast<double>(sample.steps) * sample.walkers * sample.ensembles;
  sample.effective_size = states * sample.autocorrelation_steps.cwiseInverse();
  return sample.effective_size.minCoeff() >= options.wanted_effective &&
         sample.steps >= options.wanted_autocorrelations * slowest;
}

void gather(const std::vector<EnsembleWalk>& walks, int kept, EnsembleSample& sample) {
  const Eigen::Index parameters = sample.autocorrelation_steps.size();
  const Eigen::Index a_step = static_cast<Eigen::Index>(sample.walkers) * sample.ensembles;
  sample.all.resize(parameters, a_step * sample.steps);
  for (int step = 0; step < sample.steps; ++step) {
    for (std::size_t i = 0; i < walks.size(); ++i) {
      sample.all.middleCols(step * a_step + static_cast<Eigen::Index>(i) * sample.walkers, sample.walkers) =
          walks[i].states(sample.burn_in_steps + step);
    }
  }
  const Eigen::Index draws = std::min<Eigen::Index>(kept, sample.all.cols());
  sample.draws.resize(parameters, draws);
  for (Eigen::Index i = 0; i < draws; ++i)
    sample.draws.col(i) = sample.all.col(i * sample.all.cols() / draws);
}

/// Sum over series and steps of x(t) x(t + lag), by the power spectrum; twice the length keeps the ends
/// apart.
std::vector<double> lagged_products(const Eigen::MatrixXd& centred) {
  const std::size_t length = std::bit_ceil(2 * static_cast<std::size_t>(centred.rows()));
  Eigen::FFT<double> transform;
  std::vector<double> padded(length, 0.0);
  std::vector<std::complex<double>> spectrum;
  std::vector<std::complex<double>> power(length, 0.0);
  for (Eigen::Index k = 0; k < centred.cols(); ++k) {
    std::copy(centred.col(k).begin(), centred.col(k).end(), padded.begin());
    transform.fwd(spectrum, padded);
    for (std::size_t i = 0; i < length; ++i) power[i] += std::norm(spectrum[i]);
  }
  std::vector<double> products;
  transform.inv(products, power);
  return products;
}

SampleStatus status_of(const EnsembleSample& sample, bool is_long_enough) {
  if (!(sample.split_r_hat.maxCoeff() <= kMostSplitRHat)) return SampleStatus::not_mixed;
  return is_long_enough ? SampleStatus::done : SampleStatus::too_short;
}

}  // namespace

double autocorrelation_time(const Eigen::MatrixXd& series) {
  const Eigen::Index steps = series.rows();
  const Eigen::MatrixXd centred = series.array() - series.mean();
  const double variance = centred.squaredNorm() / static_cast<double>(series.size());
  if (!(variance > 0.0)) return std::numeric_limits<double>::infinity();
  const std::vector<double> products = lagged_products(centred);
  double time = 1.0;
  for (Eigen::Index lag = 1; 2 * lag < steps; ++lag) {
    const double pairs = static_cast<double>((steps - lag) * series.cols());
    time += 2.0 * products[static_cast<std::size_t>(lag)] / (pairs * variance);
    if (static_cast<double>(lag) >= kWindow * time) return std::max(time, 1.0);
  }
  return std::numeric_limits<double>::infinity();
}

double split_r_hat(const Eigen::MatrixXd& series) {
  const Eigen::Index half = series.rows() / 2;
  if (half < 2) return std::numeric_limits<double>::infinity();
  Eigen::MatrixXd halves(half, 2 * series.cols());
  halves << series.topRows(half), series.bottomRows(half);
  const Eigen::RowVectorXd means = halves.colwise().mean();
  const double n = static_cast<double>(half);
  const double within =
      (halves.rowwise() - means).squaredNorm() / (static_cast<double>(halves.cols()) * (n - 1.0));
  const double between =
      n * (means.array() - means.mean()).square().sum() / static_cast<double>(halves.cols() - 1);
  return std::sqrt(((n - 1.0) / n * within + between / n) / within);
}

EnsembleSample sample_density(const EnsembleTarget& target, const EnsembleOptions& options) {
  require(target, options);
  EnsembleSample sample;
  sample.walkers = walkers_of(options, target.lower.size());
  sample.ensembles = options.ensembles;
  sample.seed = options.seed;
  sample.autocorrelation_steps.resize(target.lower.size());
  std::vector<EnsembleWalk> walks;
  for (int i = 0; i < options.ensembles; ++i) {
    walks.emplace_back(target, sample.walkers, options.seed, static_cast<std::uint64_t>(i));
  }
  bool is_long_enough = false;
  for (int wanted = std::min(kFirstSteps, options.most_steps);;) {
    walk_all(walks, wanted - walks.front().steps(), options.threads);
    is_long_enough = diagnose(walks, options, sample);
    if (is_long_enough || wanted >= options.most_steps) break;
    wanted = std::min(options.most_steps, wanted + wanted / 2);
  }
  sample.split_r_hat.resize(target.lower.size());
  for (Eigen::Index p = 0; p < target.lower.size(); ++p) {
    sample.split_r_hat[p] = split_r_hat(all_series(walks, p, sample.burn_in_steps));
  }
  std::int64_t taken = 0;
  for (const EnsembleWalk& walk : walks) {
    taken += walk.taken();
    sample.evaluations += walk.evaluations();
  }
  sample.acceptance = static_cast<double>(taken) / static_cast<double>(sample.evaluations);
  gather(walks, options.kept_draws, sample);
  sample.status = status_of(sample, is_long_enough);
  return sample;
}

}  // namespace trotline
