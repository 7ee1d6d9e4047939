#include <algorithm>
#include <array>
#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/rotor/asymmetric.hpp>
#include <trotline/rotor/direction_cosine.hpp>

#include "ladder_guard.hpp"

namespace trotline {
namespace {

constexpr std::uint32_t kNoLevel = std::numeric_limits<std::uint32_t>::max();

/// One J solved: its blocks, and where their levels stand in the list.
struct SolvedJ {
  std::array<WangBlock, 4> blocks;
  std::array<std::vector<std::uint32_t>, 4> places;  ///< kNoLevel: not in the list
};

/// Solves J = 0, 1, 2 ... and appends the levels.
class LevelMaker {
 public:
  LevelMaker(const AsymmetricConstants& constants, int highest_j, double highest_energy_hz)
      : constants_(constants),
        highest_energy_hz_(highest_energy_hz),
        guard_(constants.representation, highest_j) {}

  SolvedJ solve(int j, Eigenvectors eigenvectors, AsymmetricLevels& levels) {
    const HamiltonianAtJ hamiltonian(constants_, j);
    SolvedJ solved{wang_blocks(hamiltonian, constants_.representation, eigenvectors, highest_energy_hz_), {}};
    for (std::size_t b = 0; b < solved.blocks.size(); ++b) {
      const WangBlock& block = solved.blocks[b];
      const std::vector<bool> stays = guard_.admit(block, hamiltonian.rising_k());
      for (std::size_t i = 0; i < stays.size(); ++i) {
        solved.places[b].push_back(stays[i] ? static_cast<std::uint32_t>(levels.size()) : kNoLevel);
        if (stays[i]) append(block, b, i, levels);
      }
    }
    return solved;
  }

  void finish(AsymmetricLevels& levels) const {
    levels.complete_to_hz = guard_.complete_to_hz();
    levels.warnings = guard_.warnings();
  }

 private:
  static void append(const WangBlock& block, std::size_t b, std::size_t i, AsymmetricLevels& levels) {
    levels.j.push_back(static_cast<std::int16_t>(block.j));
    levels.ka.push_back(block.ka[i]);
    levels.kc.push_back(block.kc[i]);
    levels.block.push_back(static_cast<std::uint8_t>(b));
    levels.energy_hz.push_back(block.energy_hz[static_cast<Eigen::Index>(i)]);
  }

  const AsymmetricConstants& constants_;
  double highest_energy_hz_;
  LadderGuard guard_;
};

void require_valid_j(int highest_j) {
  if (highest_j < 0 || highest_j > kHighestJ) {
    throw DomainError("highest_j", highest_j, "0 to " + std::to_string(kHighestJ));
  }
}

/// The square of the dipole component along each axis of the representation.
std::array<double, 3> mu2_by_body_axis(const DipoleMoment& dipole, Representation representation) {
  const double a2 = dipole.a_c_m * dipole.a_c_m;
  const double b2 = dipole.b_c_m * dipole.b_c_m;
  const double c2 = dipole.c_c_m * dipole.c_c_m;
  switch (representation) {
    case Representation::i_r:
      return {b2, c2, a2};
    case Representation::i_l:
      return {c2, b2, a2};
    case Representation::iii_r:
      return {a2, b2, c2};
    case Representation::iii_l:
      break;
  }
  return {b2, a2, c2};
}

/// Which of the four blocks a target is.
std::size_t number_of(const WangTarget& target) {
  return (target.odd ? 2U : 0U) + (target.sign > 0 ? 0U : 1U);
}

/// Appends the lines between two J, or inside of one.
class LineMaker {
 public:
  LineMaker(const AsymmetricLevels& levels, const std::array<double, 3>& mu2, const RotorOptions& options)
      : levels_(levels), mu2_(mu2), options_(options) {}

  void connect(const SolvedJ& lower, const SolvedJ& upper, std::vector<RotorTransition>& lines) const {
    const int delta_j = upper.blocks[0].j - lower.blocks[0].j;
    for (std::size_t from = 0; from < 4; ++from) {
      for (const BodyAxis axis : {BodyAxis::x, BodyAxis::y, BodyAxis::z}) {
        const std::size_t to = number_of(wang_target(axis, lower.blocks[from], delta_j));
        const double mu2 = mu2_[static_cast<std::size_t>(axis)];
        if (mu2 == 0.0 || (delta_j == 0 && to < from)) continue;  // inside one J each pair is met twice
        const auto amplitudes = line_strength_amplitudes(axis, lower.blocks[from], upper.blocks[to]);
        append(amplitudes, mu2, lower.places[from], upper.places[to], lines);
      }
    }
  }

 private:
  void append(const Eigen::MatrixXd& amplitudes, double mu2, const std::vector<std::uint32_t>& from,
              const std::vector<std::uint32_t>& to, std::vector<RotorTransition>& lines) const {
    for (std::size_t column = 0; column < from.size(); ++column) {
      if (from[column] == kNoLevel) continue;
      for (std::size_t row = 0; row < to.size(); ++row) {
        if (to[row] == kNoLevel) continue;
        const double amplitude =
            amplitudes(static_cast<Eigen::Index>(row), static_cast<Eigen::Index>(column));
        const double s = amplitude * amplitude;
        if (s > 0.0 && s >= options_.least_line_strength && is_wanted(from[column], to[row])) {
          lines.push_back({.upper = to[row], .lower = from[column], .line_strength_mu2_c2m2 = s * mu2});
        }
      }
    }
  }

  [[nodiscard]] bool is_wanted(std::uint32_t one, std::uint32_t other) const {
    const double e1 = levels_.energy_hz[one];
    const double e2 = levels_.energy_hz[other];
    const double frequency_hz = std::abs(e1 - e2);
    return std::max(e1, e2) <= options_.highest_energy_hz && frequency_hz >= options_.lowest_frequency_hz &&
           frequency_hz <= options_.highest_frequency_hz;
  }

  const AsymmetricLevels& levels_;
  std::array<double, 3> mu2_;
  const RotorOptions& options_;
};

std::vector<RotorLevel> as_rotor_levels(const AsymmetricLevels& levels) {
  std::vector<RotorLevel> result(levels.size());
  for (std::size_t i = 0; i < result.size(); ++i) {
    result[i].quanta = {.j = levels.j[i], .k = levels.ka[i], .kc = levels.kc[i]};
    result[i].energy_hz = levels.energy_hz[i];
    result[i].rotational_degeneracy = 2.0 * levels.j[i] + 1.0;
  }
  return result;
}

double lowest_hz(const SolvedJ& solved) {
  double lowest = std::numeric_limits<double>::infinity();
  for (const WangBlock& block : solved.blocks) {
    if (block.energy_hz.size() > 0) lowest = std::min(lowest, block.energy_hz[0]);
  }
  return lowest;
}

void require_finite(const DipoleMoment& dipole) {
  for (const double component : {dipole.a_c_m, dipole.b_c_m, dipole.c_c_m}) {
    if (!std::isfinite(component)) throw DomainError("dipole component [C m]", component, "finite");
  }
}

}  // namespace

AsymmetricLevels asymmetric_levels(const AsymmetricConstants& constants, int highest_j) {
  require_valid(constants);
  require_valid_j(highest_j);
  AsymmetricLevels levels;
  LevelMaker maker(constants, highest_j, std::numeric_limits<double>::infinity());
  for (int j = 0; j <= highest_j; ++j) (void)maker.solve(j, Eigenvectors::no, levels);
  maker.finish(levels);
  return levels;
}

RotorModel asymmetric_model(const AsymmetricConstants& constants, const DipoleMoment& dipole,
                            const SpinRule& spin, const RotorOptions& options) {
  require_valid(constants);
  require_valid(options);
  require_finite(dipole);
  AsymmetricLevels levels;
  RotorModel model;
  LevelMaker maker(constants, options.highest_j, options.highest_energy_hz);
  const LineMaker line_maker(levels, mu2_by_body_axis(dipole, constants.representation), options);
  SolvedJ previous = maker.solve(0, Eigenvectors::yes, levels);
  for (int j = 1; j <= options.highest_j; ++j) {
    const bool has_lines = j <= options.highest_line_j;
    SolvedJ current = maker.solve(j, has_lines ? Eigenvectors::yes : Eigenvectors::no, levels);
    if (has_lines) {
      line_maker.connect(previous, current, model.transitions);
      line_maker.connect(current, current, model.transitions);
    }
    if (lowest_hz(current) > options.highest_energy_hz) break;  // as are all levels of larger J
    previous = std::move(current);
  }
  maker.finish(levels);
  model.levels = as_rotor_levels(levels);
  model.warnings = levels.warnings;
  model.complete_to_hz = levels.complete_to_hz;
  return finished_model(std::move(model), spin, options);
}

}  // namespace trotline
