#pragma once

#include <optional>
#include <string>

#include <trotline/survey/gather.hpp>
#include <trotline/survey/plan.hpp>
#include <trotline/survey/run.hpp>

namespace trotline {

/// What would be done for a survey and why, and how long that took the last time: some lines of text.
[[nodiscard]] std::string plan_text(const SurveyPlan& plan, const std::optional<RunMemory>& last);

/// The same as one JSON document ending in '\n'.
[[nodiscard]] std::string plan_json(const SurveyPlan& plan, const std::optional<RunMemory>& last);

/// A run and what came of it.
struct SurveySummary {
  const SurveyPlan* plan = nullptr;
  SurveyOutcome outcome;
  Gathered gathered;
  std::string folder;
};

/// Counts of the whole survey, what was computed and why, the first jobs that failed, the files written.
[[nodiscard]] std::string summary_text(const SurveySummary& summary, Ledger& ledger);

/// The same as one JSON document ending in '\n', every failed job in it.
[[nodiscard]] std::string summary_json(const SurveySummary& summary, Ledger& ledger);

/// "850 ms", "12.3 s", "4 min 5 s", "2 h 10 min"; "not known" for NaN.
[[nodiscard]] std::string duration_text(double seconds);

}  // namespace trotline
