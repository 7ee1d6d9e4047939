#pragma once

#include <cstdint>
#include <functional>
#include <map>
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include <trotline/observation/divided_table.hpp>
#include <trotline/species/species.hpp>
#include <trotline/survey/description.hpp>
#include <trotline/survey/ledger.hpp>

namespace trotline {

/// One source and one species of a survey, before it is analysed.
struct PlannedJob {
  std::string source;
  std::uint32_t table = 0;    ///< index into SurveyPlan::tables
  std::uint32_t species = 0;  ///< index into SurveyPlan::species
  std::uint32_t options = 0;  ///< index into SurveyPlan::option_sets
  std::vector<std::uint32_t>
      parts;            ///< indices into the table's parts; several where a species has two spellings
  std::vector<std::uint32_t> spectra;  ///< indices into SurveyPlan::spectra; then `table` and `parts` say nothing
  std::string problem;  ///< why it cannot be analysed at all; empty: it can
  std::string reason;   ///< why it must be computed; empty: what the ledger holds still stands
  bool moved = false;   ///< the ledger has it, in another place of the survey
};

/// Options that several jobs share.
struct OptionSet {
  RunOptions options;  ///< without the source
  std::string text;    ///< as JobStamp::options
  std::optional<MeasureDescription> measuring = {};  ///< of spectra; one input without a path stands for all
  Confusion confusion = {};                          ///< with the species that it names
};

/// A file of spectra of one source.
struct SpectraOfSource {
  std::string path;
  std::string fingerprint;  ///< of the file
  std::uint32_t entry = 0;  ///< index into SurveyDescription::tables
};

/// A survey ready to run.
struct SurveyPlan {
  SurveyDescription survey;
  std::vector<std::shared_ptr<const Species>> species;
  std::vector<DividedTable> tables;
  std::vector<SpectraOfSource> spectra;
  std::vector<OptionSet> option_sets;
  std::vector<PlannedJob> jobs;  ///< by position
  std::vector<UnreadTable> unread_tables;
  std::vector<std::string> warnings;  ///< exceptions that fit no source, rows of other species ...
  std::int64_t to_compute = 0;
  double last_seconds = 0.0;  ///< what the jobs to compute took the last time, where they are known, added up
  std::int64_t last_known = 0;  ///< of how many of them that is known
};

struct PlanRequest {
  /// Sources to compute again (patterns with `*`), beside what is missing or has changed.
  std::vector<std::string> again;
  std::function<Species(const std::string&)> find_species;  ///< as SpeciesLibrary::find
};

/// A plan, or everything that stands against making one.
struct PlannedSurvey {
  SurveyPlan plan;
  std::vector<InputError> errors;  ///< species that are not found, patterns that match no file
};

/// Loads each species once, goes through each table once, and compares every job with the ledger.
///
/// A table that cannot be read is no error of the plan: it costs its own sources only.
/// @param ledger  null: nothing is remembered
[[nodiscard]] PlannedSurvey plan_survey(const SurveyDescription& survey, Ledger* ledger,
                                        const PlanRequest& request);

/// What the result of a job depends on.
[[nodiscard]] JobStamp stamp_of(const SurveyPlan& plan, const PlannedJob& job);

/// How many jobs are computed for which reason, most first; "kept" stands for those that are not.
[[nodiscard]] std::vector<std::pair<std::string, std::int64_t>> reasons_of(const SurveyPlan& plan);

}  // namespace trotline
