// An invented survey: a species built by hand, and tables of many sources.
#pragma once

#include <fmt/format.h>

#include <cmath>
#include <random>
#include <string>
#include <vector>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/excitation/thin_line.hpp>
#include <trotline/survey/ledger.hpp>
#include <trotline/survey/plan.hpp>
#include <trotline/survey/run.hpp>

#include "support/temporary_folder.hpp"

namespace trotline::testing_survey {

/// A rigid linear rotor of B = 20 GHz, built by hand.
inline Species rotor(const std::string& name = "RX") {
  Species species;
  species.name = species.formula = name;
  species.kind = SpeciesKind::levels;
  for (int j = 0; j <= 60; ++j) {
    species.levels.push_back({std::to_string(j), 0.9598486 * j * (j + 1), 2.0 * j + 1.0, ""});
  }
  for (std::uint32_t j = 1; j <= 60; ++j) {
    species.transitions.push_back({j, j - 1, 40e9 * j, 0.0, 1.2e-7 * j * j * j * j / (2.0 * j + 1.0)});
  }
  species.partition = partition_function_from_levels(species.levels);
  species.file = name + ".yaml";
  species.file_fingerprint = "0123456789abcdef";
  return species;
}

/// "RX" and "RY" are known.
inline Species find_species(const std::string& name) {
  if (name == "RX" || name == "RY") return rotor(name);
  throw InputError({"there is no species '" + name + "'", "one of: RX, RY"});
}

struct Cloud {
  std::string name;
  double temperature_k = 30.0;
  double column_per_cm2 = 1e13;
  int lines = 6;
};

inline std::string rows_of(const Cloud& cloud, const std::string& species, unsigned seed) {
  static const Species kRotor = rotor();
  std::mt19937_64 random(seed);
  std::normal_distribution<double> noise(0.0, 1.0);
  std::string text;
  for (std::size_t i = 0; i < static_cast<std::size_t>(cloud.lines); ++i) {
    const Transition& t = kRotor.transitions[i];
    const Level& upper = kRotor.levels[t.upper];
    const LineConstants line{t.frequency_hz, upper.energy_k, upper.degeneracy, t.einstein_a_per_s};
    const double population = cloud.column_per_cm2 / kRotor.partition->at(cloud.temperature_k).q *
                              upper.degeneracy * std::exp(-upper.energy_k / cloud.temperature_k);
    const double w = population * intensity_per_upper_column_k_km_s_cm2(line);
    text += fmt::format("{},{},{}-{},{:.6g},{:.6g}\n", cloud.name, species, t.upper, t.lower,
                        w * (1.0 + 0.04 * noise(random)), 0.04 * w);
  }
  return text;
}

inline constexpr const char* kHeader =
    "source,species,transition,intensity [K km/s],intensity_error [K km/s]\n";

/// Sources "Reef 0", "Reef 1" ... of T 12 K to 60 K.
inline std::string long_table(int sources, const std::string& species = "RX", int lines = 6) {
  std::string text = kHeader;
  for (int i = 0; i < sources; ++i) {
    text += rows_of({fmt::format("Reef {}", i), 12.0 + i % 49, 1e13 * (1 + i % 7), lines}, species,
                    static_cast<unsigned>(i));
  }
  return text;
}

inline SurveyPlan planned(const std::string& path, Ledger* ledger,
                          const std::vector<std::string>& again = {}) {
  const CheckedSurvey checked = read_survey_description(path);
  if (!checked.errors.empty()) throw checked.errors.front();
  PlannedSurvey plan = plan_survey(checked.survey, ledger, {again, find_species});
  if (!plan.errors.empty()) throw plan.errors.front();
  return std::move(plan.plan);
}

inline SurveyOutcome run(const std::string& path, const std::filesystem::path& out,
                         const SurveyRunOptions& options = {}, const std::vector<std::string>& again = {}) {
  const FolderLock lock(out);
  Ledger ledger = Ledger::open(out);
  const SurveyPlan plan = planned(path, &ledger, again);
  return run_survey(plan, ledger, options);
}

/// What the ledger says of every job, without times and runs.
inline std::vector<std::string> content(const std::filesystem::path& out) {
  std::vector<std::string> jobs;
  auto ledger = Ledger::open_to_read(out);
  if (!ledger) return jobs;
  const auto next = ledger->jobs();
  while (const auto job = next()) {
    jobs.push_back(fmt::format("{}|{}|{}|{}|{}|{}", job->position, job->source, job->species,
                               name_of(job->status), job->message, job->result_json));
  }
  return jobs;
}

}  // namespace trotline::testing_survey
