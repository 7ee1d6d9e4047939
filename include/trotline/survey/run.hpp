#pragma once

#include <cstdint>
#include <functional>

#include <trotline/survey/ledger.hpp>
#include <trotline/survey/plan.hpp>

namespace trotline {

/// How far a run has come.
struct SurveyProgress {
  std::int64_t finished = 0;  ///< jobs of this run
  std::int64_t to_compute = 0;
  JobCounts counts;      ///< of this run
  double seconds = 0.0;  ///< since the run began
};

struct SurveyRunOptions {
  int threads = 0;  ///< 0: one for each core
  std::function<void(const SurveyProgress&)>
      on_progress;             ///< called some ten times a second, from one thread at a time
  std::function<bool()> stop;  ///< asked before every job; true ends the run early
  double seconds_between_commits = 0.25;  ///< what a kill can cost, at most; 0: nothing that is finished
};

struct SurveyOutcome {
  SurveyProgress progress;
  bool stopped = false;  ///< before everything was done
};

/// Computes the jobs of a plan that must be, over several threads, and keeps each in the ledger.
///
/// Memory is bounded whatever the size of the survey: a few jobs a thread are held at a time. What is
/// finished is made to last every `seconds_between_commits`; a run that is killed loses no more than that, and the
/// next one goes on from there. The results do not depend on the number of threads.
/// A job that throws is kept as failed with its message, and costs the others nothing.
/// @throws SystemError  when the ledger cannot be written; what was kept before stays
SurveyOutcome run_survey(const SurveyPlan& plan, Ledger& ledger, const SurveyRunOptions& options = {});

/// One job alone, as run_survey does it; never throws for wrong input.
[[nodiscard]] JobRecord compute_job(const SurveyPlan& plan, std::size_t position);

}  // namespace trotline
