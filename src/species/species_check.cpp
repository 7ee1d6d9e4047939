#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <map>
#include <numbers>

#include <trotline/base/text.hpp>
#include <trotline/physics/constants.hpp>
#include <trotline/species/species_check.hpp>

namespace trotline {
namespace {

double step_hz(const Species& species, const Transition& line) {
  return (species.levels[line.upper].energy_k - species.levels[line.lower].energy_k) /
         constants::kKelvinPerHz;
}

SpeciesCheck check_frequencies(const Species& species) {
  double worst_hz = 0.0;
  double worst_relative = 0.0;
  for (const Transition& line : species.transitions) {
    const double off_hz = std::abs(line.frequency_hz - step_hz(species, line));
    worst_hz = std::max(worst_hz, off_hz);
    worst_relative = std::max(worst_relative, off_hz / line.frequency_hz);
  }
  constexpr double kDigits = 1e-3;
  return {"frequencies and energies", fmt::format("differ by {:.3g} MHz at most", worst_hz * 1e-6),
          worst_relative < kDigits ? Verdict::in_order : Verdict::doubtful,
          worst_relative < kDigits ? "energies and frequencies belong together"
                                   : "energies have few digits, or do not belong to these frequencies"};
}

SpeciesCheck check_isomers(const Species& species) {
  std::size_t crossing = 0;
  for (const Transition& line : species.transitions) {
    crossing += species.levels[line.upper].spin != species.levels[line.lower].spin ? 1U : 0U;
  }
  if (crossing > 0) {
    return {"spin isomers", fmt::format("{} lines lead from one to another", crossing), Verdict::wrong,
            "radiation does not change nuclear spin: labels, spin rule or axis are wrong"};
  }
  return {"spin isomers",
          fmt::format("none of {} lines leads from one to another", species.transitions.size()),
          Verdict::in_order, "levels and lines agree about nuclear spin"};
}

/// "ortho 3.00 : para 1.00", from all states.
SpeciesCheck check_weights(const Species& species) {
  std::map<std::string, double> states;
  for (const Level& level : species.levels) {
    states[level.spin] += level.degeneracy;
  }
  if (states.size() < 2)
    return {"spin weights", "one kind of levels", Verdict::in_order, "no isomers to compare"};
  const double least = std::min_element(states.begin(), states.end(), [](auto& a, auto& b) {
                         return a.second < b.second;
                       })->second;
  std::vector<std::string> parts;
  for (const auto& [isomer, count] : states) {
    parts.push_back(fmt::format("{} {:.2f}", isomer.empty() ? "unnamed" : isomer, count / least));
  }
  return {"spin weights", fmt::format("states: {}", fmt::join(parts, " : ")), Verdict::in_order,
          "the ratio of the isomers at high temperature"};
}

SpeciesCheck check_cold_limit(const Species& species) {
  const double t = std::max(species.partition->lowest_k(), 0.01);
  const double zero_k = species.levels.front().energy_k;  // above 0 where a list counts from another zero
  double expected = 0.0;
  for (const Level& level : species.levels) {
    expected += level.degeneracy * std::exp(-(level.energy_k - zero_k) / t);
  }
  const double q = std::exp(species.partition->at(t).ln_q + zero_k / t);
  const bool agrees = std::abs(q / expected - 1.0) < 0.02;
  return {"Q at low temperature",
          fmt::format("{:.4g} at {:.3g} K from the lowest level, levels give {:.4g}", q, t, expected),
          agrees ? Verdict::in_order : Verdict::wrong,
          agrees ? "Q and degeneracies count spins alike"
                 : "Q and the degeneracies of the lines count differently: column densities would be wrong"};
}

SpeciesCheck check_slope(const Species& species) {
  const PartitionFunction& q = *species.partition;
  double worst = 0.0;
  for (const double part : {0.02, 0.1, 0.3, 0.9}) {
    const double t = q.lowest_k() + part * (std::min(q.highest_k(), 1000.0) - q.lowest_k());
    const double h = 1e-4 * t;
    if (t - h < q.lowest_k() || t + h > q.highest_k()) continue;
    const double numeric = (q.at(t + h).ln_q - q.at(t - h).ln_q) / (2.0 * h);
    worst = std::max(worst, std::abs(numeric / q.at(t).dlnq_dt - 1.0));
  }
  constexpr double kNumeric = 1e-5;  // h^2 and rounding
  return {"slope of Q", fmt::format("differs from dlnQ/dT by {:.1e} of itself", worst),
          worst < kNumeric ? Verdict::in_order : Verdict::doubtful,
          "the mean energy, on which the error of ln N rests, goes with Q"};
}

SpeciesCheck check_completeness(const Species& species) {
  const double highest_k = species.partition->highest_k();
  const double missing = species.partition->at(highest_k).relative_error;
  const bool wide = highest_k >= 100.0;
  return {"completeness",
          fmt::format("Q up to {:.4g} K, where {:.1e} of it may be missing", highest_k, missing),
          wide && missing < 5e-3 ? Verdict::in_order : Verdict::doubtful,
          wide ? "levels go far enough up for these temperatures" : "too few levels for a warm source"};
}

/// ln Q rises as T^1 (linear) or T^1.5 once many levels are populated; less says that levels are missing.
SpeciesCheck check_growth(const Species& species) {
  const auto levels = partition_function_from_levels(species.levels);
  const double t = std::min({species.partition->highest_k(), levels->highest_k(), 300.0});
  const double power = t * levels->at(t).dlnq_dt;
  const bool linear = species.kind == SpeciesKind::linear || species.kind == SpeciesKind::triplet_sigma;
  const bool rotor = species.kind != SpeciesKind::levels && species.kind != SpeciesKind::line_list;
  const bool either = species.kind == SpeciesKind::structure;  // may turn out linear
  const auto grows_as = [&](double expected) { return std::abs(power - expected) < 0.15; };
  const bool expected = !rotor || (either && grows_as(1.0)) || grows_as(linear ? 1.0 : 1.5);
  return {"growth of Q", fmt::format("sum over levels rises as T^{:.2f} at {:.4g} K", power, t),
          expected ? Verdict::in_order : Verdict::doubtful,
          expected ? "as the number of rotational degrees of freedom wants it"
                   : "1 is expected of a linear molecule, 1.5 of others: levels are missing or too many"};
}

SpeciesCheck check_vibration(const Species& species) {
  const auto levels = partition_function_from_levels(species.levels);
  const double t = std::min(species.partition->highest_k(), levels->highest_k());
  const double factor = species.partition->at(t).q / levels->at(t).q;
  const bool counted = factor > 1.0 + 1e-9;
  return {"vibration", counted ? fmt::format("multiplies Q by {:.4g} at {:.4g} K", factor, t) : "not in Q",
          counted || t <= 100.0 ? Verdict::in_order : Verdict::doubtful,
          counted ? "column densities are those of all vibrational states"
                  : "column densities are those of the listed states alone; warm sources want 'vibration'"};
}

/// A = (16 pi^3 nu^3 / 3 eps0 h c^3) mu^2 S/(2J+1), and S/(2J+1) is at most 1.
SpeciesCheck check_dipole(const Species& species) {
  using std::numbers::pi;
  double largest = 0.0;
  for (const Transition& line : species.transitions) {
    const double per_mu2 = 16.0 * pi * pi * pi * std::pow(line.frequency_hz / constants::kLightMPerS, 3) /
                           (3.0 * constants::kVacuumPermittivityFPerM * constants::kPlanckJS);
    largest = std::max(largest, std::sqrt(line.einstein_a_per_s / per_mu2));
  }
  const double debye = largest / constants::kDebyeCM;
  const bool likely = debye > 0.01 && debye < 12.0;
  return {
      "dipole moment", fmt::format("the strongest line wants {:.3g} D or more", debye),
      likely ? Verdict::in_order : Verdict::doubtful,
      likely ? "A coefficients are of a likely size" : "molecules have 0.01 to 12 D: check units of A or mu"};
}

SpeciesCheck check_coincidences(const Species& species) {
  constexpr double kCloseHz = 0.5e6;
  std::size_t pairs = 0;
  for (std::size_t i = 1; i < species.transitions.size(); ++i) {
    pairs +=
        species.transitions[i].frequency_hz - species.transitions[i - 1].frequency_hz < kCloseHz ? 1U : 0U;
  }
  return {"coincident lines", fmt::format("{} neighbours closer than 0.5 MHz", pairs), Verdict::in_order,
          pairs == 0 ? "every line can be named by its frequency" : "name these by label, or as blends"};
}

SpeciesCheck check_sources(const Species& species) {
  std::vector<std::string> weak;
  for (const Citation& citation : species.citations) {
    const std::string from = lower_case(citation.from);
    for (const char* const word : {"memory", "recalled", "estimate", "assumed", "invented", "scaled"}) {
      if (from.find(word) == std::string::npos) continue;
      weak.push_back(citation.what);
      break;
    }
  }
  if (weak.empty()) {
    return {"sources", fmt::format("{} groups of numbers, each with its source", species.citations.size()),
            Verdict::in_order, "whether the source says so is for you to see"};
  }
  return {"sources", fmt::format("not taken straight from a paper: {}", listed(weak)), Verdict::doubtful,
          "compare with the paper before you publish"};
}

}  // namespace

std::string_view name_of(Verdict verdict) {
  switch (verdict) {
    case Verdict::in_order:
      return "in order";
    case Verdict::doubtful:
      return "doubtful";
    case Verdict::wrong:
      break;
  }
  return "wrong";
}

std::vector<SpeciesCheck> check_species(const Species& species) {
  std::vector<SpeciesCheck> checks;
  if (!species.transitions.empty()) {
    checks = {check_frequencies(species), check_isomers(species)};
  }
  checks.insert(checks.end(), {check_weights(species), check_cold_limit(species), check_slope(species),
                               check_completeness(species), check_growth(species), check_vibration(species)});
  if (!species.transitions.empty()) {
    checks.push_back(check_dipole(species));
    checks.push_back(check_coincidences(species));
  }
  checks.push_back(check_sources(species));
  for (const std::string& warning : species.warnings) {
    checks.push_back({"warning of the reader", warning, Verdict::doubtful, "see docs/species-files.md"});
  }
  return checks;
}

}  // namespace trotline
