#include <fmt/chrono.h>
#include <fmt/format.h>

#include <chrono>
#include <fstream>

#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/report/json_line.hpp>
#include <trotline/survey/ledger.hpp>

#include "ledger_schema.hpp"
#include "sqlite.hpp"

namespace trotline {
namespace {

constexpr const char* kRecall =
    "SELECT position, table_file, table_lines, input_fingerprint, species_fingerprint, options, version, "
    "status,"
    " again, seconds FROM job WHERE source = ?1 AND species = ?2";

constexpr const char* kWriteJob =
    "INSERT INTO job (source, species, position, status, method, verdict, temperature_k, temperature_error_k,"
    " log10_column_density_cm2, log10_column_density_error, chi2, dof, message, warnings, table_file, "
    "table_lines,"
    " input_fingerprint, species_fingerprint, options, version, reason, again, run, finished, seconds)"
    " VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9, ?10, ?11, ?12, ?13, ?14, ?15, ?16, ?17, ?18, ?19, ?20, "
    "?21, ?22,"
    " ?23, ?24, ?25)"
    " ON CONFLICT (source, species) DO UPDATE SET position = ?3, status = ?4, method = ?5, verdict = ?6,"
    " temperature_k = ?7, temperature_error_k = ?8, log10_column_density_cm2 = ?9, "
    "log10_column_density_error = ?10,"
    " chi2 = ?11, dof = ?12, message = ?13, warnings = ?14, table_file = ?15, table_lines = ?16,"
    " input_fingerprint = ?17, species_fingerprint = ?18, options = ?19, version = ?20, reason = ?21, again "
    "= ?22,"
    " run = ?23, finished = ?24, seconds = ?25"
    " RETURNING job";

constexpr const char* kJobs =
    "SELECT position, source, species, table_file, reason, status, message, result.json, run FROM job"
    " LEFT JOIN result USING (job) WHERE position IS NOT NULL ORDER BY position";

std::string utc_now() {
  return fmt::format("{:%Y-%m-%dT%H:%M:%SZ}", fmt::gmtime(std::chrono::system_clock::now()));
}

JobStatus status_named(const std::string& name) {
  if (name == "done") return JobStatus::done;
  return name == "weak" ? JobStatus::weak : JobStatus::failed;
}

bool begins_like_a_database(const std::filesystem::path& path) {
  std::ifstream file(path, std::ios::binary);
  std::string start(16, '\0');
  file.read(start.data(), static_cast<std::streamsize>(start.size()));
  return file.gcount() == 0 || start.starts_with("SQLite format 3");
}

}  // namespace

const char* name_of(JobStatus status) {
  switch (status) {
    case JobStatus::done:
      return "done";
    case JobStatus::weak:
      return "weak";
    case JobStatus::failed:
      break;
  }
  return "failed";
}

class Ledger::Tables {
 public:
  Tables(const std::filesystem::path& path, Database::Mode mode) : database(path.string(), mode) {
    const std::int64_t version = pragma("PRAGMA user_version");
    if (version == 0 && mode == Database::Mode::read_write && is_blank()) {
      make();
    } else if (pragma("PRAGMA application_id") != kLedgerApplication || version != kSchemaVersion) {
      throw InputError(Place{path.string()},
                       {version > kSchemaVersion ? fmt::format("is a ledger of schema {}", version)
                                                 : "is an SQLite file, but no ledger of a survey",
                        fmt::format("a ledger of schema {}", kSchemaVersion), "choose another folder"});
    }
    if (mode == Database::Mode::read_write) {
      // Write-ahead logging: readers may look on, and a commit that was cut short vanishes whole. NORMAL
      // keeps that promise against kills; a loss of power may cost the last commits, not the ledger.
      database.run("PRAGMA journal_mode = WAL; PRAGMA synchronous = NORMAL");
    }
    recall.emplace(database, kRecall);
  }

  std::int64_t pragma(const char* sql) const {
    Statement statement(database, sql);
    return statement.step() ? statement.whole(0) : 0;
  }

  [[nodiscard]] bool is_blank() const { return pragma("SELECT count(*) FROM sqlite_schema") == 0; }

  void make() const {
    database.run("PRAGMA page_size = 8192; BEGIN IMMEDIATE");
    database.run(kLedgerSchema);
    database.run(fmt::format("PRAGMA application_id = {}; PRAGMA user_version = {}; COMMIT",
                             kLedgerApplication, kSchemaVersion)
                     .c_str());
  }

  /// Everything is written inside transactions, which commit() ends.
  void begin() {
    if (!open) database.run("BEGIN IMMEDIATE");
    open = true;
  }

  std::int64_t write_job(const JobRecord& job);
  void write_result(std::int64_t job, const JobRecord& record);

  Database database;
  std::optional<Statement> recall;
  std::optional<Statement> job;
  std::optional<Statement> result;
  std::optional<Statement> no_result;
  std::optional<Statement> position;
  std::int64_t run = 0;
  bool open = false;
};

Ledger::Ledger(std::unique_ptr<Tables> tables) : tables_(std::move(tables)) {}
Ledger::Ledger(Ledger&&) noexcept = default;
Ledger& Ledger::operator=(Ledger&&) noexcept = default;
Ledger::~Ledger() = default;

Ledger Ledger::open(const std::filesystem::path& folder) {
  const auto path = folder / kFileName;
  if (!begins_like_a_database(path)) {
    throw InputError(Place{path.string()}, {"is no SQLite file", "a ledger of a survey, or no such file"});
  }
  return Ledger(std::make_unique<Tables>(path, Database::Mode::read_write));
}

std::optional<Ledger> Ledger::open_to_read(const std::filesystem::path& folder) {
  const auto path = folder / kFileName;
  std::error_code ignored;
  if (!std::filesystem::exists(path, ignored) || std::filesystem::file_size(path, ignored) == 0)
    return std::nullopt;
  if (!begins_like_a_database(path)) {
    throw InputError(Place{path.string()}, {"is no SQLite file", "a ledger of a survey"});
  }
  return Ledger(std::make_unique<Tables>(path, Database::Mode::read_only));
}

std::optional<JobMemory> Ledger::recall(const std::string& source, const std::string& species) {
  Statement& ask = *tables_->recall;
  ask.bind(1, source);
  ask.bind(2, species);
  if (!ask.step()) return std::nullopt;
  JobMemory memory;
  if (!ask.is_null(0)) memory.position = ask.whole(0);
  memory.stamp = {ask.text(1), ask.text(2), ask.text(3), ask.text(4), ask.text(5), ask.text(6)};
  memory.status = status_named(ask.text(7));
  memory.again = ask.whole(8) != 0;
  memory.seconds = ask.number(9);
  ask.reset();
  return memory;
}

std::optional<RunMemory> Ledger::last_run() {
  Statement ask(tables_->database,
                "SELECT run, began, seconds, computed, threads FROM run ORDER BY run DESC LIMIT 1");
  if (!ask.step()) return std::nullopt;
  return RunMemory{ask.whole(0), ask.text(1), ask.number(2), ask.whole(3), static_cast<int>(ask.whole(4))};
}

JobCounts Ledger::counts() {
  JobCounts counts;
  Statement ask(tables_->database,
                "SELECT status, count(*) FROM job WHERE position IS NOT NULL GROUP BY status");
  while (ask.step()) {
    const JobStatus status = status_named(ask.text(0));
    (status == JobStatus::done   ? counts.done
     : status == JobStatus::weak ? counts.weak
                                 : counts.failed) = ask.whole(1);
  }
  return counts;
}

std::vector<UnreadTable> Ledger::unread_tables() {
  std::vector<UnreadTable> tables;
  Statement ask(tables_->database, "SELECT file, message FROM unread_table ORDER BY file");
  while (ask.step()) tables.push_back({ask.text(0), ask.text(1)});
  return tables;
}

std::vector<StoredJob> Ledger::failures(std::size_t most) {
  std::vector<StoredJob> jobs;
  Statement ask(tables_->database,
                "SELECT position, source, species, table_file, reason, message, run FROM job"
                " WHERE position IS NOT NULL AND status = 'failed' ORDER BY position LIMIT ?1");
  ask.bind(1, static_cast<std::int64_t>(most));
  while (ask.step()) {
    jobs.push_back({ask.whole(0),
                    ask.text(1),
                    ask.text(2),
                    ask.text(3),
                    ask.text(4),
                    JobStatus::failed,
                    ask.text(5),
                    {},
                    ask.whole(6)});
  }
  return jobs;
}

std::function<std::optional<StoredJob>()> Ledger::jobs() {
  auto ask = std::make_shared<std::optional<Statement>>();
  ask->emplace(tables_->database, kJobs);
  return [ask]() -> std::optional<StoredJob> {
    if (!ask->has_value()) return std::nullopt;
    Statement& row = **ask;
    if (!row.step()) {
      ask->reset();
      return std::nullopt;
    }
    return StoredJob{row.whole(0), row.text(1), row.text(2),
                     row.text(3),  row.text(4), status_named(row.text(5)),
                     row.text(6),  row.text(7), row.whole(8)};
  };
}

void Ledger::for_each_text(const std::function<void(const JobTexts&)>& take) {
  Statement ask(
      tables_->database,
      "SELECT source, species, method, verdict, message, table_file FROM job WHERE position IS NOT NULL");
  while (ask.step()) take({ask.text(0), ask.text(1), ask.text(2), ask.text(3), ask.text(4), ask.text(5)});
}

void Ledger::for_each_pair(const std::string& first, const std::string& second,
                           const std::function<void(const ColumnPair&)>& take) {
  Statement ask(
      tables_->database,
      "SELECT a.log10_column_density_cm2, a.log10_column_density_error, b.log10_column_density_cm2,"
      " b.log10_column_density_error FROM job AS a JOIN job AS b ON b.source = a.source AND b.species = ?2"
      " WHERE a.species = ?1 AND a.position IS NOT NULL AND b.position IS NOT NULL"
      " AND a.status = 'done' AND b.status = 'done' ORDER BY a.position");
  ask.bind(1, first);
  ask.bind(2, second);
  while (ask.step()) take({ask.number(0), ask.number(1), ask.number(2), ask.number(3)});
}

void Ledger::begin_run(const std::string& survey_file, const std::string& version, int threads) {
  tables_->begin();
  Statement add(tables_->database,
                "INSERT INTO run (survey_file, version, threads, began) VALUES (?1, ?2, ?3, ?4)");
  add.bind(1, survey_file);
  add.bind(2, version);
  add.bind(3, std::int64_t{threads});
  add.bind(4, utc_now());
  add.execute();
  tables_->run = sqlite3_last_insert_rowid(tables_->database.handle());
}

void Ledger::end_run(double seconds, std::int64_t computed) {
  tables_->begin();
  Statement set(tables_->database, "UPDATE run SET seconds = ?1, computed = ?2 WHERE run = ?3");
  set.bind(1, seconds);
  set.bind(2, computed);
  set.bind(3, tables_->run);
  set.execute();
}

void Ledger::keep_members(const std::function<bool(const std::string&, const std::string&)>& is_member) {
  tables_->begin();
  std::vector<std::int64_t> gone;
  Statement ask(tables_->database, "SELECT job, source, species FROM job WHERE position IS NOT NULL");
  while (ask.step()) {
    if (!is_member(ask.text(1), ask.text(2))) gone.push_back(ask.whole(0));
  }
  Statement set(tables_->database, "UPDATE job SET position = NULL WHERE job = ?1");
  for (const std::int64_t job : gone) {
    set.bind(1, job);
    set.execute();
  }
}

void Ledger::place(std::int64_t position, const std::string& source, const std::string& species) {
  tables_->begin();
  auto& set = tables_->position;
  if (!set) set.emplace(tables_->database, "UPDATE job SET position = ?1 WHERE source = ?2 AND species = ?3");
  set->bind(1, position);
  set->bind(2, source);
  set->bind(3, species);
  set->execute();
}

void Ledger::set_unread_tables(const std::vector<UnreadTable>& tables) {
  tables_->begin();
  tables_->database.run("DELETE FROM unread_table");
  Statement add(tables_->database, "INSERT OR REPLACE INTO unread_table (file, message) VALUES (?1, ?2)");
  for (const UnreadTable& table : tables) {
    add.bind(1, table.file);
    add.bind(2, table.message);
    add.execute();
  }
}

std::int64_t Ledger::Tables::write_job(const JobRecord& record) {
  if (!job) job.emplace(database, kWriteJob);
  const Result* answer = record.result ? &*record.result : nullptr;
  job->bind(1, record.source);
  job->bind(2, record.species);
  job->bind(3, record.position);
  job->bind(4, name_of(record.status));
  for (int parameter = 5; parameter <= 12; ++parameter) job->bind_null(parameter);
  if (answer != nullptr) {
    job->bind(5, answer->method);
    job->bind(6, answer->verdict);
    job->bind(7, answer->temperature_k.value);
    job->bind(8, answer->temperature_k.error);
    job->bind(9, answer->log10_column_density_cm2.value);
    job->bind(10, answer->log10_column_density_cm2.error);
    job->bind(11, answer->chi2);
    job->bind(12, std::int64_t{answer->dof});
  }
  job->bind(13, record.message);
  job->bind(14, answer != nullptr ? static_cast<std::int64_t>(answer->warnings.size()) : 0);
  job->bind(15, record.stamp.table_file);
  job->bind(16, record.stamp.table_lines);
  job->bind(17, record.stamp.input_fingerprint);
  job->bind(18, record.stamp.species_fingerprint);
  job->bind(19, record.stamp.options);
  job->bind(20, record.stamp.version);
  job->bind(21, record.reason);
  job->bind(22, std::int64_t{record.again});
  job->bind(23, run);
  job->bind(24, utc_now());
  job->bind(25, record.seconds);
  if (!job->step()) return 0;
  const std::int64_t id = job->whole(0);
  job->execute();  // to the end of its rows, so that it counts as done
  return id;
}

void Ledger::Tables::write_result(std::int64_t id, const JobRecord& record) {
  if (!record.result) {
    if (!no_result) no_result.emplace(database, "DELETE FROM result WHERE job = ?1");
    no_result->bind(1, id);
    no_result->execute();
    return;
  }
  if (!result) result.emplace(database, "INSERT OR REPLACE INTO result (job, json) VALUES (?1, ?2)");
  result->bind(1, id);
  const bool made = !record.result_json.empty();
  const std::string json = made ? record.result_json : result_json_line(*record.result);
  result->bind(2, json);
  result->execute();
}

void Ledger::write(const JobRecord& job) {
  tables_->begin();
  tables_->write_result(tables_->write_job(job), job);
}

void Ledger::commit() {
  if (!tables_->open) return;
  tables_->database.run("COMMIT");
  tables_->open = false;
}

}  // namespace trotline
