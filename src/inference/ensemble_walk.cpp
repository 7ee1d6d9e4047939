#include "ensemble_walk.hpp"

#include <cmath>
#include <limits>
#include <numbers>

#include <trotline/base/errors.hpp>

namespace trotline {
namespace {

constexpr double kStretch = 2.0;  // the largest; Goodman & Weare's choice
constexpr double kLooseSigma = 0.1;
constexpr int kMostStartTries = 200;

/// A root of the covariance that walkers start in.
Eigen::MatrixXd cloud_of(const EnsembleTarget& target) {
  const Eigen::Index size = target.lower.size();
  if (target.covariance.rows() == size && target.covariance.allFinite()) {
    const Eigen::LLT<Eigen::MatrixXd> cholesky(target.covariance);
    if (cholesky.info() == Eigen::Success) return cholesky.matrixL();
  }
  return kLooseSigma * Eigen::MatrixXd::Identity(size, size);
}

}  // namespace

EnsembleWalk::EnsembleWalk(const EnsembleTarget& target, int walkers, std::uint64_t seed,
                           std::uint64_t stream)
    : parameters_(target.lower.size()),
      walkers_(walkers),
      lower_(target.lower),
      upper_(target.upper),
      evaluate_(target.make_cost()),
      position_(parameters_, walkers_),
      cost_(walkers_),
      proposal_(parameters_, walkers_ / 2),
      proposal_cost_(walkers_ / 2),
      ln_stretch_(walkers_ / 2),
      outside_(static_cast<std::size_t>(walkers_ / 2)) {
  std::seed_seq seeds{static_cast<std::uint32_t>(seed), static_cast<std::uint32_t>(seed >> 32),
                      static_cast<std::uint32_t>(stream)};
  engine_.seed(seeds);
  start(target);
}

// The distributions of the standard library may differ from one to the next; these do not.
double EnsembleWalk::uniform() { return (static_cast<double>(engine_() >> 11) + 0.5) * 0x1p-53; }

double EnsembleWalk::normal() {
  const double radius = std::sqrt(-2.0 * std::log(uniform()));
  return radius * std::cos(2.0 * std::numbers::pi * uniform());
}

void EnsembleWalk::start(const EnsembleTarget& target) {
  const Eigen::MatrixXd cloud = cloud_of(target);
  Eigen::MatrixXd point(parameters_, 1);
  Eigen::VectorXd cost(1);
  const auto peaks = static_cast<Eigen::Index>(target.peaks.size());
  for (Eigen::Index w = 0; w < walkers_; ++w) {
    const Eigen::VectorXd& peak = target.peaks[static_cast<std::size_t>(w % peaks)];
    double width = 1.0;
    for (int attempt = 0;; ++attempt, width *= 0.95) {
      if (attempt == kMostStartTries) throw DomainError("peak", peak[0], "near points where cost is finite");
      Eigen::VectorXd off(parameters_);
      for (double& x : off) x = normal();
      point = peak + width * (cloud * off);
      for (Eigen::Index i = 0; i < parameters_; ++i) {  // a peak at a bound: what falls outside is folded back
        if (point(i, 0) < lower_[i]) point(i, 0) = 2.0 * lower_[i] - point(i, 0);
        if (point(i, 0) > upper_[i]) point(i, 0) = 2.0 * upper_[i] - point(i, 0);
      }
      if (!((point.array() > lower_.array()).all() && (point.array() < upper_.array()).all())) continue;
      evaluate_(point, cost);
      ++evaluations_;
      if (std::isfinite(cost[0])) break;
    }
    position_.col(w) = point;
    cost_[w] = cost[0];
  }
}

/// Moves walkers begin ... begin + n/2 - 1 against those from `others` on.
void EnsembleWalk::move_half(Eigen::Index begin, Eigen::Index others) {
  const Eigen::Index half = walkers_ / 2;
  for (Eigen::Index k = 0; k < half; ++k) {
    const auto partner = others + static_cast<Eigen::Index>(uniform() * static_cast<double>(half));
    // z = ((a - 1) u + 1)^2 / a has the density of the stretch
    const double root = (kStretch - 1.0) * uniform() + 1.0;
    const double z = root * root / kStretch;
    ln_stretch_[k] = static_cast<double>(parameters_ - 1) * std::log(z);
    bool outside = false;
    for (Eigen::Index p = 0; p < parameters_; ++p) {
      const double y = position_(p, partner);
      const double x = y + z * (position_(p, begin + k) - y);
      outside = outside || !(x >= lower_[p] && x <= upper_[p]);
      proposal_(p, k) = x;
    }
    outside_[static_cast<std::size_t>(k)] = outside;
    if (outside) proposal_.col(k) = position_.col(begin + k);  // costs an evaluation, breaks no vector
  }
  evaluate_(proposal_, proposal_cost_);
  evaluations_ += half;
  for (Eigen::Index k = 0; k < half; ++k) {
    const double luck = std::log(uniform());  // drawn for all, so that the stream does not hang on outcomes
    if (outside_[static_cast<std::size_t>(k)]) continue;
    if (!(luck < ln_stretch_[k] + cost_[begin + k] - proposal_cost_[k])) continue;
    position_.col(begin + k) = proposal_.col(k);
    cost_[begin + k] = proposal_cost_[k];
    ++taken_;
  }
}

void EnsembleWalk::walk(int steps) {
  const auto size = static_cast<std::size_t>(position_.size());
  history_.reserve(history_.size() + static_cast<std::size_t>(steps) * size);
  for (int step = 0; step < steps; ++step) {
    move_half(0, walkers_ / 2);
    move_half(walkers_ / 2, 0);
    history_.insert(history_.end(), position_.data(), position_.data() + position_.size());
    ++steps_;
  }
}

Eigen::Map<const Eigen::MatrixXd> EnsembleWalk::states(int step) const {
  return {history_.data() + static_cast<std::ptrdiff_t>(step) * position_.size(), parameters_, walkers_};
}

Eigen::MatrixXd EnsembleWalk::series(Eigen::Index parameter, int from) const {
  Eigen::MatrixXd result(steps_ - from, walkers_);
  for (int step = from; step < steps_; ++step) result.row(step - from) = states(step).row(parameter);
  return result;
}

}  // namespace trotline
