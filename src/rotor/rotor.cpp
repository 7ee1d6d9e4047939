#include <boost/sort/spreadsort/integer_sort.hpp>
#include <fmt/format.h>

#include <algorithm>
#include <bit>
#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/rotor/line_strength.hpp>
#include <trotline/rotor/rotor.hpp>

namespace trotline {
namespace {

constexpr std::uint32_t kDropped = std::numeric_limits<std::uint32_t>::max();

/// The order that sorts the existing levels by energy, and by quanta where energies agree to the bit.
std::vector<std::uint32_t> order_of_levels(const std::vector<RotorLevel>& levels, double highest_energy_hz) {
  std::vector<std::uint32_t> order;
  for (std::uint32_t i = 0; i < levels.size(); ++i) {
    if (levels[i].spin_weight > 0.0 && levels[i].energy_hz <= highest_energy_hz) order.push_back(i);
  }
  std::stable_sort(order.begin(), order.end(),
                   [&](auto x, auto y) { return levels[x].energy_hz < levels[y].energy_hz; });
  return order;
}

void apply_spin(std::vector<RotorLevel>& levels, const SpinRule& spin) {
  for (RotorLevel& level : levels) {
    SpinState state = spin.at(level.quanta);
    level.spin_weight = state.weight;
    level.isomer = std::move(state.isomer);
  }
}

/// Sorts and filters the levels; gives the new place of each old one.
std::vector<std::uint32_t> settle_levels(std::vector<RotorLevel>& levels, double highest_energy_hz) {
  const auto order = order_of_levels(levels, highest_energy_hz);
  std::vector<std::uint32_t> place(levels.size(), kDropped);
  std::vector<RotorLevel> sorted;
  sorted.reserve(order.size());
  for (const std::uint32_t old : order) {
    place[old] = static_cast<std::uint32_t>(sorted.size());
    sorted.push_back(std::move(levels[old]));
  }
  levels = std::move(sorted);
  return place;
}

/// Puts in indices, frequency and A; false when the line is not wanted or a level of it is gone.
bool settle_line(RotorTransition& line, const std::vector<RotorLevel>& levels,
                 const std::vector<std::uint32_t>& place, const RotorOptions& options) {
  line.upper = place[line.upper];
  line.lower = place[line.lower];
  if (line.upper == kDropped || line.lower == kDropped) return false;
  if (levels[line.upper].energy_hz < levels[line.lower].energy_hz) std::swap(line.upper, line.lower);
  line.frequency_hz = levels[line.upper].energy_hz - levels[line.lower].energy_hz;
  const int j = std::max(levels[line.upper].quanta.j, levels[line.lower].quanta.j);
  const bool wanted = j <= options.highest_line_j && line.frequency_hz > 0.0 &&
                      line.frequency_hz >= options.lowest_frequency_hz &&
                      line.frequency_hz <= options.highest_frequency_hz;
  if (!wanted) return false;
  line.einstein_a_per_s = einstein_a_per_s(line.frequency_hz, line.line_strength_mu2_c2m2,
                                           levels[line.upper].rotational_degeneracy);
  return true;
}

/// Settles every line and closes the gaps that the dropped ones leave.
void settle_lines(std::vector<RotorTransition>& lines, const std::vector<RotorLevel>& levels,
                  const std::vector<std::uint32_t>& place, const RotorOptions& options) {
  std::size_t kept = 0;
  for (RotorTransition line : lines) {
    if (settle_line(line, levels, place, options)) lines[kept++] = line;
  }
  lines.resize(kept);
}

/// By frequency; lines that agree to the bit by their levels, so that the order never hangs on the input's.
bool comes_first(const RotorTransition& x, const RotorTransition& y) {
  if (x.frequency_hz != y.frequency_hz) return x.frequency_hz < y.frequency_hz;
  return x.upper != y.upper ? x.upper < y.upper : x.lower < y.lower;
}

/// A radix sort, as positive frequencies are ordered as their bits are: there may be millions of lines.
void sort_by_frequency(std::vector<RotorTransition>& lines) {
  const auto bits = [](const RotorTransition& line, unsigned offset) {
    return std::bit_cast<std::uint64_t>(line.frequency_hz) >> offset;
  };
  boost::sort::spreadsort::integer_sort(lines.begin(), lines.end(), bits, comes_first);
}

}  // namespace

std::string label_of(const QuantumNumbers& q) {
  if (q.kc != kNoQuantum) return fmt::format("{}({},{})", q.j, q.k, q.kc);
  const char* inversion = q.inversion > 0 ? "s" : q.inversion < 0 ? "a" : "";
  if (q.k != kNoQuantum) return fmt::format("{}({}){}", q.j, q.k, inversion);
  if (q.n != kNoQuantum) return fmt::format("{}({})", q.n, q.j);
  return fmt::format("{}", q.j);
}

void require_valid(const RotorOptions& options) {
  if (options.highest_j < 0 || options.highest_j > kHighestJ) {
    throw DomainError("highest_j", options.highest_j, fmt::format("0 to {}", kHighestJ));
  }
  if (!(options.highest_energy_hz > 0.0)) {
    throw DomainError("highest_energy_hz", options.highest_energy_hz, "above 0");
  }
  if (!(options.lowest_frequency_hz >= 0.0 && std::isfinite(options.lowest_frequency_hz))) {
    throw DomainError("lowest_frequency_hz", options.lowest_frequency_hz, "finite and not below 0");
  }
  if (!(options.highest_frequency_hz > options.lowest_frequency_hz)) {
    throw DomainError("highest_frequency_hz", options.highest_frequency_hz, "above the lowest frequency");
  }
  if (options.highest_line_j < 0) throw DomainError("highest_line_j", options.highest_line_j, "not below 0");
  if (!(options.least_line_strength >= 0.0 && std::isfinite(options.least_line_strength))) {
    throw DomainError("least_line_strength", options.least_line_strength, "finite and not below 0");
  }
}

RotorModel finished_model(RotorModel draft, const SpinRule& spin, const RotorOptions& options) {
  require_valid(options);
  apply_spin(draft.levels, spin);
  const auto place = settle_levels(draft.levels, options.highest_energy_hz);
  settle_lines(draft.transitions, draft.levels, place, options);
  sort_by_frequency(draft.transitions);
  draft.complete_to_hz = std::min(draft.complete_to_hz, options.highest_energy_hz);
  return draft;
}

}  // namespace trotline
