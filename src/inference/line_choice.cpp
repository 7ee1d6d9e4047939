// Symbols: n = ln N, t = ln T, z = the shared calibration in units of its standard error. The information
// matrix is the sum over measurements of g g^T / sigma^2, g = dW/d(n, t, z), plus 1 at (z, z) for what is known
// of the calibration beforehand.
#include <trotline/inference/line_choice.hpp>

#include <algorithm>
#include <cmath>
#include <limits>
#include <numeric>

#include <trotline/base/errors.hpp>

namespace trotline {
namespace {

/// Information of one measurement or of a sum of them, without the prior of z.
struct Information {
  double nn = 0.0, nt = 0.0, tt = 0.0, nz = 0.0, tz = 0.0, zz = 0.0;

  void add(const Information& more) {
    nn += more.nn;
    nt += more.nt;
    tt += more.tt;
    nz += more.nz;
    tz += more.tz;
    zz += more.zz;
  }

  /// With z eliminated: what is left of n and t.
  [[nodiscard]] Information reduced() const {
    const double known = 1.0 + zz;
    return {nn - nz * nz / known, nt - nz * tz / known, tt - tz * tz / known, 0.0, 0.0, 0.0};
  }
};

Information information_of(const Sensitivity& line) {
  if (!(line.sigma_k_km_s > 0.0)) throw DomainError("sigma_k_km_s", line.sigma_k_km_s, "above 0");
  const double n = line.by_ln_column / line.sigma_k_km_s;
  const double t = line.by_ln_temperature / line.sigma_k_km_s;
  const double z = line.by_shared_calibration / line.sigma_k_km_s;
  const Information one{n * n, n * t, t * t, n * z, t * z, z * z};
  if (!std::isfinite(one.nn + one.tt + one.zz)) throw DomainError("sensitivity", n + t + z, "finite");
  return one;
}

std::vector<Information> information_of(const std::vector<Sensitivity>& all) {
  std::vector<Information> each;
  each.reserve(all.size());
  for (const Sensitivity& line : all) each.push_back(information_of(line));
  return each;
}

/// Where the determinant is only rounding, the measurements say the same thing and set no temperature.
double determinant(const Information& two) {
  const double product = two.nn * two.tt;
  const double value = product - two.nt * two.nt;
  return value > 1e-13 * product ? value : 0.0;
}

double variance(const Information& sum, Aim aim) {
  const Information two = sum.reduced();
  const double det = determinant(two);
  if (!(det > 0.0)) return std::numeric_limits<double>::infinity();
  return (aim == Aim::temperature ? two.nn : two.tt) / det;
}

Information sum_of(const std::vector<Information>& each, const std::vector<std::size_t>& which) {
  Information sum;
  for (const std::size_t i : which) sum.add(each.at(i));
  return sum;
}

ExpectedErrors errors_of(const Information& sum) {
  return {std::sqrt(variance(sum, Aim::column)), std::sqrt(variance(sum, Aim::temperature))};
}

double number_of_sets(std::size_t all, std::size_t count) {
  double sets = 1.0;
  for (std::size_t i = 0; i < count; ++i) {
    sets *= static_cast<double>(all - i) / static_cast<double>(i + 1);
  }
  return sets;
}

/// Every set of `count` lines, in the order of their indices, with the sums of its first lines kept.
class EverySet {
 public:
  EverySet(const std::vector<Information>& each, std::size_t count, Aim aim)
      : each_(each), aim_(aim), set_(count), sums_(count + 1) {}

  std::vector<std::size_t> best() {
    extend(0, 0);
    return best_;
  }

 private:
  void extend(std::size_t depth, std::size_t first) {
    if (depth == set_.size()) {
      const double value = variance(sums_[depth], aim_);
      if (best_.empty() || value < least_) {
        least_ = value;
        best_ = set_;
      }
      return;
    }
    const std::size_t last = each_.size() - (set_.size() - depth);
    for (std::size_t i = first; i <= last; ++i) {
      set_[depth] = i;
      sums_[depth + 1] = sums_[depth];
      sums_[depth + 1].add(each_[i]);
      extend(depth + 1, i + 1);
    }
  }

  const std::vector<Information>& each_;
  Aim aim_;
  std::vector<std::size_t> set_;
  std::vector<Information> sums_;
  std::vector<std::size_t> best_;
  double least_ = std::numeric_limits<double>::infinity();
};

/// Exchanges one line at a time, always the best exchange, until none helps. @return the variance reached
double improve(const std::vector<Information>& each, std::vector<std::size_t>& set, Aim aim) {
  double value = variance(sum_of(each, set), aim);
  while (true) {
    double least = value;
    std::size_t leaving = 0, entering = 0;
    for (std::size_t out = 0; out < set.size(); ++out) {
      std::vector<std::size_t> others = set;
      others.erase(others.begin() + static_cast<std::ptrdiff_t>(out));
      const Information rest = sum_of(each, others);
      for (std::size_t in = 0; in < each.size(); ++in) {
        if (std::find(set.begin(), set.end(), in) != set.end()) continue;
        Information with = rest;
        with.add(each[in]);
        const double changed = variance(with, aim);
        if (changed < least) {
          least = changed;
          leaving = out;
          entering = in;
        }
      }
    }
    if (!(least < value)) return value;
    value = least;
    set[leaving] = entering;
  }
}

/// The `count` lines that come first by `key`, largest first.
template <class Key>
std::vector<std::size_t> first_by(const std::vector<Information>& each, std::size_t count, Key key) {
  std::vector<std::size_t> order(each.size());
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::stable_sort(order.begin(), order.end(),
                   [&](std::size_t a, std::size_t b) { return key(each[a]) > key(each[b]); });
  order.resize(count);
  return order;
}

std::vector<std::size_t> best_by_exchange(const std::vector<Information>& each, std::size_t count, Aim aim) {
  // From lines bright in N, from lines steep in T, and from halves of both.
  const auto bright = first_by(each, count, [](const Information& i) { return i.nn; });
  const auto steep = first_by(each, count, [](const Information& i) { return i.tt; });
  const auto flat = first_by(each, count, [](const Information& i) { return i.nn - i.tt; });
  std::vector<std::size_t> mixed;
  for (std::size_t i = 0; mixed.size() < count && i < count; ++i) {
    for (const auto* list : {&steep, &flat}) {
      const std::size_t line = (*list)[i];
      const bool is_new = std::find(mixed.begin(), mixed.end(), line) == mixed.end();
      if (is_new && mixed.size() < count) mixed.push_back(line);
    }
  }
  std::vector<std::size_t> best;
  double least = std::numeric_limits<double>::infinity();
  for (std::vector<std::size_t> set : {bright, steep, flat, mixed}) {
    const double value = improve(each, set, aim);
    if (best.empty() || value < least) {
      least = value;
      best = set;
    }
  }
  return best;
}

}  // namespace

ExpectedErrors expected_errors(const std::vector<Sensitivity>& all, const std::vector<std::size_t>& which) {
  return errors_of(sum_of(information_of(all), which));
}

LineChoice choose_lines(const std::vector<Sensitivity>& all, std::size_t count, Aim aim) {
  if (count < 2 || count > all.size()) {
    throw DomainError("count", static_cast<double>(count), "from 2 to the number of lines");
  }
  const std::vector<Information> each = information_of(all);
  LineChoice choice;
  choice.is_exhaustive = number_of_sets(all.size(), count) <= kMostSetsTried;
  choice.lines =
      choice.is_exhaustive ? EverySet(each, count, aim).best() : best_by_exchange(each, count, aim);
  std::sort(choice.lines.begin(), choice.lines.end());
  choice.errors = errors_of(sum_of(each, choice.lines));
  return choice;
}

}  // namespace trotline
