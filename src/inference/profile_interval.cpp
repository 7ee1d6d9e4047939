#include <boost/math/tools/roots.hpp>

#include <cmath>
#include <cstdint>
#include <limits>

#include <trotline/inference/likelihood_fit.hpp>

#include "cost_minimum.hpp"

namespace trotline {
namespace {

constexpr double kNone = std::numeric_limits<double>::quiet_NaN();
constexpr int kMostExpansions = 40;

/// The profile of a likelihood along one free entry. Each minimisation starts where the last one ended, and
/// from the other minima that the fit has found.
class Profile {
 public:
  Profile(const IntensityLikelihood& likelihood, const LikelihoodFit& fit, Eigen::Index which)
      : likelihood_(likelihood),
        fit_(fit),
        which_(which),
        workspace_(likelihood.workspace()),
        last_(fit.free) {}

  double excess(double value) {
    CostMinimum best = from(last_, value);
    for (const OtherMinimum& other : fit_.others) {
      CostMinimum minimum = from(other.free, value);
      if (minimum.cost < best.cost) best = std::move(minimum);
    }
    last_ = best.free;
    return 2.0 * (best.cost - fit_.cost);
  }

 private:
  CostMinimum from(const Eigen::VectorXd& start, double value) {
    Eigen::VectorXd shifted = start;
    shifted[which_] = value;
    return minimise_cost(likelihood_, shifted, workspace_, which_);
  }

  const IntensityLikelihood& likelihood_;
  const LikelihoodFit& fit_;
  Eigen::Index which_;
  LikelihoodWorkspace workspace_;
  Eigen::VectorXd last_;
};

double first_step(const LikelihoodFit& fit, Eigen::Index which) {
  const double variance = fit.covariance(which, which);
  const double sigma = std::sqrt(variance);
  return std::isfinite(sigma) && sigma > 0.0 ? std::min(sigma, 1.0) : 0.1;
}

/// Where the profile crosses z^2 between the best value and `bound`; NaN where it does not.
double crossing(Profile profile, double best, double bound, double step, double z) {
  const double direction = bound > best ? 1.0 : -1.0;
  const auto excess = [&](double value) { return profile.excess(value) - z * z; };
  double inside = best;
  double inside_excess = -z * z;
  for (int i = 0; i < kMostExpansions; ++i) {
    const bool last = direction * (best + direction * step - bound) >= 0.0;
    const double outside = last ? bound : best + direction * step;
    if (!(direction * (outside - inside) > 0.0)) break;  // the best value lies on the bound already
    const double value = excess(outside);
    if (value >= 0.0) {
      std::uintmax_t most = 60;
      const auto near = [&](double a, double b) { return std::abs(a - b) <= 1e-7 * (1.0 + std::abs(a)); };
      const bool rising = inside < outside;
      const auto root =
          rising
              ? boost::math::tools::toms748_solve(excess, inside, outside, inside_excess, value, near, most)
              : boost::math::tools::toms748_solve(excess, outside, inside, value, inside_excess, near, most);
      return 0.5 * (root.first + root.second);
    }
    if (last) break;
    inside = outside;
    inside_excess = value;
    step *= 1.7;
  }
  return kNone;
}

}  // namespace

double profile_excess(const IntensityLikelihood& likelihood, const LikelihoodFit& fit, int which,
                      double value) {
  return Profile(likelihood, fit, which).excess(value);
}

Interval profile_interval(const IntensityLikelihood& likelihood, const LikelihoodFit& fit, int which,
                          double z) {
  Interval interval{kNone, kNone};
  if (fit.free.size() == 0) return interval;
  const double best = fit.free[which];
  const double step = z * first_step(fit, which);
  interval.low = crossing(Profile(likelihood, fit, which), best, likelihood.lower_bounds()[which], step, z);
  interval.high = crossing(Profile(likelihood, fit, which), best, likelihood.upper_bounds()[which], step, z);
  return interval;
}

}  // namespace trotline
