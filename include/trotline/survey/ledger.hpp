#pragma once

#include <cstdint>
#include <filesystem>
#include <functional>
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include <trotline/analysis/result.hpp>

namespace trotline {

/// How a job of a survey ended.
enum class JobStatus {
  done,   ///< T and N
  weak,   ///< analysed, but the data cannot answer (every Status but done)
  failed  ///< the input is wrong, or a fault of the machine or program
};

[[nodiscard]] const char* name_of(JobStatus status);

/// What a job's result depends on. Two equal stamps give equal results.
struct JobStamp {
  std::string table_file;
  std::string table_lines;  ///< where its rows stand, as the result names them
  std::string input_fingerprint;
  std::string species_fingerprint;
  std::string options;  ///< every option in force, "key: value" a line
  std::string version;

  friend bool operator==(const JobStamp&, const JobStamp&) = default;
};

/// One source and one species of a survey, finished.
struct JobRecord {
  std::int64_t position = 0;  ///< order in the survey, from 0
  std::string source;
  std::string species;
  JobStamp stamp;
  std::string reason;  ///< why it was computed: "new", "its rows have changed" ...
  JobStatus status = JobStatus::failed;
  bool again = false;   ///< to be done again at the next run, since a fault, not the input, is to blame
  std::string message;  ///< what went wrong, or what can be said where the data cannot answer
  std::optional<Result> result;
  std::string result_json;  ///< result_json_line() of it, where somebody has made it already
  double seconds = 0.0;
};

/// What the ledger remembers of a job for planning.
struct JobMemory {
  std::optional<std::int64_t> position;  ///< nothing: the job was not in the survey last time
  JobStamp stamp;
  JobStatus status = JobStatus::failed;
  bool again = false;
  double seconds = 0.0;
};

/// One run over a survey.
struct RunMemory {
  std::int64_t run = 0;
  std::string began;     ///< UTC, ISO 8601
  double seconds = 0.0;  ///< wall time; NaN where the run did not come to its end
  std::int64_t computed = 0;
  int threads = 0;
};

/// A table that could not be read, so that none of its sources is known.
struct UnreadTable {
  std::string file;
  std::string message;
};

struct JobCounts {
  std::int64_t done = 0;
  std::int64_t weak = 0;
  std::int64_t failed = 0;

  [[nodiscard]] std::int64_t all() const { return done + weak + failed; }
};

/// A job as it stands in the ledger.
struct StoredJob {
  std::int64_t position = 0;
  std::string source;
  std::string species;
  std::string table_file;
  std::string reason;
  JobStatus status = JobStatus::failed;
  std::string message;
  std::string result_json;  ///< empty where there is none
  std::int64_t run = 0;     ///< which run computed it
};

/// The texts of a job, for the widths of a table's columns.
struct JobTexts {
  std::string source;
  std::string species;
  std::string method;
  std::string verdict;
  std::string message;
  std::string table_file;
};

/// log10 of the column densities [cm-2] of two species in one source, with their errors.
struct ColumnPair {
  double first;
  double first_error;
  double second;
  double second_error;
};

/// The ledger of a survey: an SQLite file that remembers every job; docs/ledger.md describes its tables.
///
/// What commit() has returned from is there after a kill at any moment. A ledger is used from one thread at
/// a time; that no second program writes to it is the business of FolderLock.
/// @throws SystemError  every member, when the machine refuses (the disk is full ...)
class Ledger {
 public:
  static constexpr const char* kFileName = "ledger.sqlite";
  static constexpr int kSchemaVersion = 1;

  /// Opens the ledger of a folder, or makes one. @throws InputError where the file is of something else or
  /// of a later schema
  [[nodiscard]] static Ledger open(const std::filesystem::path& folder);

  /// Opens one to read only; nothing where there is none. @throws as open()
  [[nodiscard]] static std::optional<Ledger> open_to_read(const std::filesystem::path& folder);

  Ledger(Ledger&&) noexcept;
  Ledger& operator=(Ledger&&) noexcept;
  ~Ledger();

  [[nodiscard]] std::optional<JobMemory> recall(const std::string& source, const std::string& species);
  [[nodiscard]] std::optional<RunMemory> last_run();

  /// Of the jobs that are in the survey now.
  [[nodiscard]] JobCounts counts();
  [[nodiscard]] std::vector<UnreadTable> unread_tables();

  /// The first failed jobs of the survey, by position, without results.
  [[nodiscard]] std::vector<StoredJob> failures(std::size_t most);

  /// The jobs of the survey by position, one a call; nothing at the end. The ledger must outlive it.
  [[nodiscard]] std::function<std::optional<StoredJob>()> jobs();

  /// Goes through the texts of all jobs of the survey, without their results.
  void for_each_text(const std::function<void(const JobTexts&)>& take);

  /// Goes through the sources in which both species have a column density.
  void for_each_pair(const std::string& first, const std::string& second,
                     const std::function<void(const ColumnPair&)>& take);

  /// Starts a run: jobs written from here on belong to it.
  void begin_run(const std::string& survey_file, const std::string& version, int threads);

  /// @param seconds  wall time
  void end_run(double seconds, std::int64_t computed);

  /// Takes out of the survey every job that `is_member` does not know; what was computed stays.
  void keep_members(
      const std::function<bool(const std::string& source, const std::string& species)>& is_member);

  /// Gives a job that is kept as it is its place in the survey.
  void place(std::int64_t position, const std::string& source, const std::string& species);
  void set_unread_tables(const std::vector<UnreadTable>& tables);

  /// Keeps a finished job, over an older one of the same source and species.
  void write(const JobRecord& job);

  /// Makes everything since the last commit last.
  void commit();

 private:
  class Tables;
  explicit Ledger(std::unique_ptr<Tables> tables);
  std::unique_ptr<Tables> tables_;
};

/// Holds a folder for one program at a time; the hold goes with the object, and with the program however it
/// ends.
class FolderLock {
 public:
  static constexpr const char* kFileName = "ledger.lock";

  /// Makes the folder where it is missing. @throws SystemError when another run holds it (with its process,
  /// machine and start), or when nothing can be written there
  explicit FolderLock(const std::filesystem::path& folder);
  ~FolderLock();
  FolderLock(const FolderLock&) = delete;
  FolderLock& operator=(const FolderLock&) = delete;

 private:
  int file_ = -1;
};

}  // namespace trotline
