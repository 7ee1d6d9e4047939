#include <algorithm>
#include <cmath>
#include <vector>

#include <trotline/base/errors.hpp>
#include <trotline/inference/marginal_density.hpp>

namespace trotline {
namespace {

constexpr int kSubsteps = 64;  // of one spacing, over each of which the density is all but level
constexpr double kTail68 = 0.15865525393145705;
constexpr double kTail95 = 0.025;

/// ln of the density at a place between nodes j and j + 1: the polynomial through the six nodes about it, or
/// as many as lie side by side.
double between(const Eigen::VectorXd& ln_density, Eigen::Index j, double s) {
  constexpr Eigen::Index kPoints = 6;
  const Eigen::Index last = ln_density.size() - 1;
  Eigen::Index from = j;
  Eigen::Index to = j + 1;
  while (to - from + 1 < kPoints) {
    const bool below = from > 0 && std::isfinite(ln_density[from - 1]);
    const bool above = to < last && std::isfinite(ln_density[to + 1]);
    if (!below && !above) break;
    if (below && (!above || j - from <= to - j - 1)) {
      --from;
    } else {
      ++to;
    }
  }
  const double x = static_cast<double>(j) + s;
  double sum = 0.0;
  for (Eigen::Index k = from; k <= to; ++k) {
    double weight = 1.0;
    for (Eigen::Index m = from; m <= to; ++m) {
      if (m != k) weight *= (x - static_cast<double>(m)) / static_cast<double>(k - m);
    }
    sum += weight * ln_density[k];
  }
  return sum;
}

struct Cumulative {
  std::vector<double> place;  // in steps
  std::vector<double> below;  // probability, 1 at the end
  std::vector<double> density;
};

Cumulative accumulate(const Eigen::VectorXd& ln_density) {
  const double most = ln_density.maxCoeff();
  Cumulative sum;
  double total = 0.0;
  for (Eigen::Index j = 0; j + 1 < ln_density.size(); ++j) {
    const bool empty = !std::isfinite(ln_density[j]) || !std::isfinite(ln_density[j + 1]);
    const auto at = [&](double s) { return empty ? 0.0 : std::exp(between(ln_density, j, s) - most); };
    double low = at(0.0);
    for (int i = 0; i < kSubsteps; ++i) {
      const double s = static_cast<double>(i) / kSubsteps;
      const double high = at(s + 1.0 / kSubsteps);
      sum.place.push_back(static_cast<double>(j) + s);
      sum.below.push_back(total);
      sum.density.push_back(low);
      total += (low + 4.0 * at(s + 0.5 / kSubsteps) + high) / (6.0 * kSubsteps);  // Simpson
      low = high;
    }
  }
  sum.place.push_back(static_cast<double>(ln_density.size() - 1));
  sum.below.push_back(total);
  for (double& below : sum.below) below /= total;
  for (double& density : sum.density) density /= total;
  return sum;
}

/// Where the cumulative probability is p: linear inside of a substep, over which the density hardly changes.
double quantile(const Cumulative& sum, double p) {
  const auto above = std::upper_bound(sum.below.begin(), sum.below.end(), p);
  const auto i = static_cast<std::size_t>(std::clamp<std::ptrdiff_t>(
      above - sum.below.begin() - 1, 0, static_cast<std::ptrdiff_t>(sum.below.size()) - 2));
  const double share = sum.below[i + 1] - sum.below[i];
  const double part = share > 0.0 ? (p - sum.below[i]) / share : 0.5;
  return sum.place[i] + part * (sum.place[i + 1] - sum.place[i]);
}

void take_moments(MarginalDensity& marginal, double first, double step, const Cumulative& sum) {
  double mean = 0.0;
  double square = 0.0;
  for (std::size_t i = 0; i + 1 < sum.below.size(); ++i) {
    const double share = sum.below[i + 1] - sum.below[i];
    const double place = 0.5 * (sum.place[i] + sum.place[i + 1]);
    mean += share * place;
    square += share * place * place;
  }
  marginal.mean = first + step * mean;
  marginal.sigma = step * std::sqrt(std::max(0.0, square - mean * mean));
}

double sorted_quantile(const Eigen::VectorXd& sorted, double p) {
  const double place = p * static_cast<double>(sorted.size() - 1);
  const auto low = static_cast<Eigen::Index>(place);
  const Eigen::Index high = std::min(low + 1, sorted.size() - 1);
  return sorted[low] + (place - static_cast<double>(low)) * (sorted[high] - sorted[low]);
}

template <class Quantile>
void take_quantiles(MarginalDensity& marginal, const Quantile& at) {
  marginal.median = at(0.5);
  marginal.central68 = {at(kTail68), at(1.0 - kTail68)};
  marginal.central95 = {at(kTail95), at(1.0 - kTail95)};
}

}  // namespace

MarginalDensity marginal_of(double first, double step, const Eigen::VectorXd& ln_density) {
  if (ln_density.size() < 3)
    throw DomainError("ln_density.size()", static_cast<double>(ln_density.size()), "at least 3");
  const Cumulative sum = accumulate(ln_density);
  MarginalDensity marginal;
  const Eigen::Index size = ln_density.size();
  marginal.value = Eigen::VectorXd::LinSpaced(size, first, first + step * static_cast<double>(size - 1));
  marginal.density.setZero(size);
  for (Eigen::Index j = 0; j + 1 < size; ++j) {
    marginal.density[j] = sum.density[static_cast<std::size_t>(j) * kSubsteps] / step;
  }
  // the last node ends no substep; its density stands to the one before as their logarithms say
  if (marginal.density[size - 2] > 0.0) {
    marginal.density[size - 1] =
        marginal.density[size - 2] * std::exp(ln_density[size - 1] - ln_density[size - 2]);
  }
  take_moments(marginal, first, step, sum);
  take_quantiles(marginal, [&](double p) { return first + step * quantile(sum, p); });
  const auto peak = std::max_element(sum.density.begin(), sum.density.end());
  marginal.mode = first + step * sum.place[static_cast<std::size_t>(peak - sum.density.begin())];
  if (marginal.density[size - 1] * step > *peak) marginal.mode = marginal.value[size - 1];
  return marginal;
}

MarginalDensity marginal_of(Eigen::VectorXd draws) {
  if (draws.size() < 2) throw DomainError("draws.size()", static_cast<double>(draws.size()), "at least 2");
  std::sort(draws.begin(), draws.end());
  MarginalDensity marginal;
  marginal.mean = draws.mean();
  marginal.sigma =
      std::sqrt((draws.array() - marginal.mean).square().sum() / static_cast<double>(draws.size() - 1));
  take_quantiles(marginal, [&](double p) { return sorted_quantile(draws, p); });
  const auto bins =
      static_cast<Eigen::Index>(std::clamp(0.5 * std::sqrt(static_cast<double>(draws.size())), 5.0, 60.0));
  const double low = draws[0];
  const double width = std::max(draws[draws.size() - 1] - low, 1e-300) / static_cast<double>(bins);
  marginal.density.setZero(bins);
  for (const double draw : draws) {
    marginal.density[std::min(bins - 1, static_cast<Eigen::Index>((draw - low) / width))] += 1.0;
  }
  marginal.density /= width * static_cast<double>(draws.size());
  marginal.value.resize(bins);
  for (Eigen::Index i = 0; i < bins; ++i) marginal.value[i] = low + (static_cast<double>(i) + 0.5) * width;
  Eigen::Index peak = 0;
  marginal.density.maxCoeff(&peak);
  marginal.mode = marginal.value[peak];
  return marginal;
}

}  // namespace trotline
