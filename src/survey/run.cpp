#include <fmt/format.h>
#include <tbb/global_control.h>
#include <tbb/info.h>
#include <tbb/parallel_pipeline.h>
#include <tbb/task_arena.h>

#include <algorithm>
#include <chrono>
#include <memory>
#include <unordered_set>

#include <trotline/analysis/analyse.hpp>
#include <trotline/analysis/measure_description.hpp>
#include <trotline/base/version.hpp>
#include <trotline/report/json_line.hpp>
#include <trotline/survey/run.hpp>

namespace trotline {
namespace {

using Clock = std::chrono::steady_clock;

constexpr std::size_t kJobsPerThread = 8;  // in flight, so that no thread waits for the ledger
constexpr double kSecondsBetweenReports = 0.1;

double seconds_since(Clock::time_point start) {
  return std::chrono::duration<double>(Clock::now() - start).count();
}

/// The lines of a job's species in its spectra.
IntensityTable measured_rows(const SurveyPlan& plan, const PlannedJob& job) {
  const OptionSet& set = plan.option_sets[job.options];
  MeasureDescription description = *set.measuring;
  description.inputs.resize(job.spectra.size(), description.inputs.front());
  for (std::size_t i = 0; i < job.spectra.size(); ++i) {
    description.inputs[i].path = plan.spectra[job.spectra[i]].path;
  }
  return measure(description, *plan.species[job.species], set.confusion).table;
}

/// The rows of a job in a table. Rows of one species in two spellings stand in several parts.
IntensityTable table_rows(const SurveyPlan& plan, const PlannedJob& job) {
  const DividedTable& table = plan.tables[job.table];
  IntensityTable rows = table.read(job.parts.front());
  for (std::size_t i = 1; i < job.parts.size(); ++i) {
    IntensityTable more = table.read(job.parts[i]);
    rows.rows.insert(rows.rows.end(), more.rows.begin(), more.rows.end());
  }
  std::stable_sort(rows.rows.begin(), rows.rows.end(), [](const IntensityRow& a, const IntensityRow& b) {
    return a.line_number < b.line_number;
  });
  return rows;
}

IntensityTable rows_of(const SurveyPlan& plan, const PlannedJob& job) {
  IntensityTable rows = job.spectra.empty() ? table_rows(plan, job) : measured_rows(plan, job);
  // Names that the description gave to the rows, or spelled otherwise.
  for (IntensityRow& row : rows.rows) {
    row.source = job.source;
    row.species = plan.species[job.species]->name;
  }
  return rows;
}

void analyse_into(JobRecord& record, const SurveyPlan& plan, const PlannedJob& job) {
  RunOptions options = plan.option_sets[job.options].options;
  options.source = job.source;
  const IntensityTable rows = rows_of(plan, job);
  if (rows.rows.empty() && !job.spectra.empty()) {
    record.status = JobStatus::weak;
    record.message = fmt::format("its spectra hold no line of {} that can be measured",
                                 plan.species[job.species]->name);
    return;
  }
  Result result = analyse(*plan.species[job.species], rows, options);
  result.provenance.table_fingerprint = record.stamp.input_fingerprint;
  record.status = result.status == Status::done ? JobStatus::done : JobStatus::weak;
  record.message = result.message;
  record.result_json = result_json_line(result);  // here, where many threads share the work
  record.result = std::move(result);
}

/// Writes finished jobs and tells how far the run is; used by one thread at a time.
class Keeper {
 public:
  Keeper(const SurveyPlan& plan, Ledger& ledger, const SurveyRunOptions& options)
      : ledger_(ledger), options_(options), began_(Clock::now()) {
    progress_.to_compute = plan.to_compute;
  }

  void keep(const JobRecord& job) {
    ledger_.write(job);
    ++progress_.finished;
    JobCounts& counts = progress_.counts;
    ++(job.status == JobStatus::done   ? counts.done
       : job.status == JobStatus::weak ? counts.weak
                                       : counts.failed);
    const double now = seconds_since(began_);
    if (now - last_commit_ >= options_.seconds_between_commits) {
      ledger_.commit();
      last_commit_ = now;
    }
    if (now - last_report_ > kSecondsBetweenReports) report(now);
  }

  SurveyProgress finish(bool stopped) {
    const double now = seconds_since(began_);
    if (!stopped) ledger_.end_run(now, progress_.finished);
    ledger_.commit();
    report(now);
    return progress_;
  }

 private:
  void report(double now) {
    last_report_ = now;
    progress_.seconds = now;
    if (options_.on_progress) options_.on_progress(progress_);
  }

  Ledger& ledger_;
  const SurveyRunOptions& options_;
  Clock::time_point began_;
  double last_commit_ = 0.0;
  double last_report_ = 0.0;
  SurveyProgress progress_;
};

/// Notes in the ledger which jobs belong to the survey now and where.
void register_jobs(const SurveyPlan& plan, Ledger& ledger) {
  std::unordered_set<std::string> members;
  const auto key = [](const std::string& source, const std::string& species) {
    return species + "\x1F" + source;
  };
  for (const PlannedJob& job : plan.jobs) members.insert(key(job.source, plan.species[job.species]->name));
  ledger.keep_members([&](const std::string& source, const std::string& species) {
    return members.contains(key(source, species));
  });
  for (std::size_t i = 0; i < plan.jobs.size(); ++i) {
    const PlannedJob& job = plan.jobs[i];
    if (!job.moved) continue;
    ledger.place(static_cast<std::int64_t>(i), job.source, plan.species[job.species]->name);
  }
  ledger.set_unread_tables(plan.unread_tables);
}

/// Gives out the positions of the jobs to compute, one after the other, until the end or a stop.
class Source {
 public:
  Source(const SurveyPlan& plan, const SurveyRunOptions& options) : plan_(plan), options_(options) {}

  std::size_t operator()(tbb::flow_control& control) {
    while (next_ < plan_.jobs.size() && plan_.jobs[next_].reason.empty()) ++next_;
    if (next_ == plan_.jobs.size()) {
      control.stop();
      return 0;
    }
    if (options_.stop && options_.stop()) {
      stopped_ = true;
      control.stop();
      return 0;
    }
    return next_++;
  }

  [[nodiscard]] bool stopped() const { return stopped_; }

 private:
  const SurveyPlan& plan_;
  const SurveyRunOptions& options_;
  std::size_t next_ = 0;
  bool stopped_ = false;
};

}  // namespace

JobRecord compute_job(const SurveyPlan& plan, std::size_t position) {
  const auto began = Clock::now();
  const PlannedJob& job = plan.jobs[position];
  JobRecord record;
  record.position = static_cast<std::int64_t>(position);
  record.source = job.source;
  record.species = plan.species[job.species]->name;
  record.reason = job.reason;
  record.stamp = stamp_of(plan, job);
  try {
    if (job.problem.empty())
      analyse_into(record, plan, job);
    else
      record.message = job.problem;
  } catch (const InputError& error) {
    record.message = error.what();
  } catch (const std::exception& error) {
    record.message = std::string("a fault, not the input: ") + error.what();
    record.again = true;
  }
  record.seconds = seconds_since(began);
  return record;
}

SurveyOutcome run_survey(const SurveyPlan& plan, Ledger& ledger, const SurveyRunOptions& options) {
  const int threads = options.threads > 0 ? options.threads : tbb::info::default_concurrency();
  ledger.begin_run(plan.survey.file, version(), threads);
  register_jobs(plan, ledger);
  ledger.commit();
  Keeper keeper(plan, ledger, options);
  Source source(plan, options);
  const tbb::global_control limit(tbb::global_control::max_allowed_parallelism,
                                  static_cast<std::size_t>(threads));
  tbb::task_arena arena(threads);
  arena.execute([&] {
    using tbb::filter_mode;
    tbb::parallel_pipeline(
        static_cast<std::size_t>(threads) * kJobsPerThread,
        tbb::make_filter<void, std::size_t>(filter_mode::serial_in_order, std::ref(source)) &
            tbb::make_filter<std::size_t, std::shared_ptr<JobRecord>>(filter_mode::parallel,
                                                                      [&](std::size_t position) {
                                                                        return std::make_shared<JobRecord>(
                                                                            compute_job(plan, position));
                                                                      }) &
            tbb::make_filter<std::shared_ptr<JobRecord>, void>(
                filter_mode::serial_out_of_order,
                [&](const std::shared_ptr<JobRecord>& job) { keeper.keep(*job); }));
  });
  SurveyOutcome outcome;
  outcome.stopped = source.stopped();
  outcome.progress = keeper.finish(outcome.stopped);
  return outcome;
}

}  // namespace trotline
