#include <fmt/format.h>
#include <nlohmann/json.hpp>

#include <cmath>

#include <trotline/report/display_text.hpp>
#include <trotline/base/text.hpp>
#include <trotline/survey/summary.hpp>

namespace trotline {
namespace {

using Json = nlohmann::ordered_json;

constexpr std::size_t kReasonsShown = 8;
constexpr std::size_t kFailuresShown = 8;

std::string dumped(const Json& json) {
  return quiet_json(json.dump(2, ' ', false, Json::error_handler_t::replace)) + "\n";
}

std::string times(std::int64_t count, const char* one, const char* many) {
  return fmt::format("{} {}", count, count == 1 ? one : many);
}

/// "3 tables", "64 files of spectra", "1 table and 64 files of spectra".
std::string inputs_text(const SurveyPlan& plan) {
  const std::string spectra =
      times(static_cast<std::int64_t>(plan.spectra.size()), "file of spectra", "files of spectra");
  if (plan.tables.empty() && !plan.spectra.empty()) return spectra;
  const std::string tables = times(static_cast<std::int64_t>(plan.tables.size()), "table", "tables");
  return plan.spectra.empty() ? tables : tables + " and " + spectra;
}

/// "  12  new", a line each.
std::string reasons_text(const SurveyPlan& plan) {
  const auto reasons = reasons_of(plan);
  std::string text;
  for (std::size_t i = 0; i < std::min(reasons.size(), kReasonsShown); ++i) {
    text += fmt::format("  {:>8}  {}\n", reasons[i].second, printable(reasons[i].first));
  }
  if (reasons.size() > kReasonsShown)
    text += fmt::format("  and {} other reasons\n", reasons.size() - kReasonsShown);
  return text;
}

Json reasons_json(const SurveyPlan& plan) {
  Json json = Json::object();
  for (const auto& [reason, count] : reasons_of(plan)) json[reason] = count;
  return json;
}

std::string last_text(const SurveyPlan& plan, const std::optional<RunMemory>& last) {
  std::string text;
  if (plan.last_known > 0) {
    text += fmt::format("{} of the jobs to compute took {} of one core the last time.\n", plan.last_known,
                        duration_text(plan.last_seconds));
  }
  if (!last) return text + "This survey has not run before.\n";
  if (std::isnan(last->seconds))
    return text + fmt::format("The last run began {} and did not come to its end.\n", last->began);
  return text + fmt::format("The last run began {} and computed {} in {} with {}.\n", last->began,
                            times(last->computed, "job", "jobs"), duration_text(last->seconds),
                            times(last->threads, "thread", "threads"));
}

Json unread_json(const std::vector<UnreadTable>& tables) {
  Json list = Json::array();
  for (const UnreadTable& table : tables) list.push_back({{"table", table.file}, {"message", table.message}});
  return list;
}

std::string failures_text(Ledger& ledger, const JobCounts& counts) {
  std::string text;
  for (const StoredJob& job : ledger.failures(kFailuresShown)) {
    text += fmt::format("  failed: {}, {}: {}\n", printable(job.source), printable(job.species),
                        printable(job.message));
  }
  const auto more = counts.failed - static_cast<std::int64_t>(kFailuresShown);
  if (more > 0) text += fmt::format("  and {} more that failed\n", more);
  for (const UnreadTable& table : ledger.unread_tables()) {
    text += fmt::format("  not read: {}\n", printable(table.message));
  }
  return text;
}

}  // namespace

std::string duration_text(double seconds) {
  if (!std::isfinite(seconds)) return "not known";
  if (seconds > 0.0 && seconds < 1.0) return fmt::format("{:.0f} ms", std::ceil(1e3 * seconds));
  if (seconds < 10.0 && seconds != std::floor(seconds)) return fmt::format("{:.1f} s", seconds);
  const auto whole = static_cast<long long>(std::llround(seconds));
  if (whole < 60) return fmt::format("{} s", whole);
  if (whole < 3600) return fmt::format("{} min {} s", whole / 60, whole % 60);
  return fmt::format("{} h {} min", whole / 3600, whole % 3600 / 60);
}

std::string plan_text(const SurveyPlan& plan, const std::optional<RunMemory>& last) {
  std::string text =
      fmt::format("{}: {} from {} with {}; {} to compute\n", plan.survey.file,
                  times(static_cast<std::int64_t>(plan.jobs.size()), "job", "jobs"),
                  inputs_text(plan),
                  plan.species.size() == 1 ? "1 species" : fmt::format("{} species", plan.species.size()),
                  plan.to_compute);
  text += reasons_text(plan) + last_text(plan, last);
  for (const UnreadTable& table : plan.unread_tables)
    text += fmt::format("not read: {}\n", printable(table.message));
  for (const std::string& warning : plan.warnings) text += fmt::format("warning: {}\n", printable(warning));
  return text;
}

std::string plan_json(const SurveyPlan& plan, const std::optional<RunMemory>& last) {
  Json json = {{"schema", "trotline-survey-plan-1"},
               {"survey", plan.survey.file},
               {"jobs", plan.jobs.size()},
               {"to_compute", plan.to_compute},
               {"reasons", reasons_json(plan)},
               {"last_seconds_of_jobs", plan.last_seconds},
               {"last_run", nullptr},
               {"unread_tables", unread_json(plan.unread_tables)},
               {"warnings", plan.warnings}};
  if (last) {
    json["last_run"] = {{"began", last->began},
                        {"seconds", last->seconds},
                        {"computed", last->computed},
                        {"threads", last->threads}};
  }
  return dumped(json);
}

std::string summary_text(const SurveySummary& summary, Ledger& ledger) {
  const JobCounts counts = ledger.counts();
  std::string text = fmt::format("{}: {}: done {}, weak {}, failed {}\n", summary.plan->survey.file,
                                 times(counts.all(), "job", "jobs"), counts.done, counts.weak, counts.failed);
  text += fmt::format("computed {} in {}:\n", times(summary.outcome.progress.finished, "job", "jobs"),
                      duration_text(summary.outcome.progress.seconds));
  text += reasons_text(*summary.plan) + failures_text(ledger, counts);
  return text + fmt::format("wrote {} to {}\n", listed(summary.gathered.files, 20), summary.folder);
}

std::string summary_json(const SurveySummary& summary, Ledger& ledger) {
  const JobCounts counts = ledger.counts();
  Json failures = Json::array();
  for (const StoredJob& job : ledger.failures(static_cast<std::size_t>(counts.failed))) {
    failures.push_back({{"source", job.source}, {"species", job.species}, {"message", job.message}});
  }
  return dumped({{"schema", "trotline-survey-1"},
                 {"survey", summary.plan->survey.file},
                 {"folder", summary.folder},
                 {"jobs", counts.all()},
                 {"done", counts.done},
                 {"weak", counts.weak},
                 {"failed", counts.failed},
                 {"computed", summary.outcome.progress.finished},
                 {"seconds", summary.outcome.progress.seconds},
                 {"reasons", reasons_json(*summary.plan)},
                 {"failures", failures},
                 {"unread_tables", unread_json(ledger.unread_tables())},
                 {"warnings", summary.plan->warnings},
                 {"files", summary.gathered.files}});
}

}  // namespace trotline
