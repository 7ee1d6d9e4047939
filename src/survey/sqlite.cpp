#include "sqlite.hpp"

#include <fmt/format.h>

#include <cmath>
#include <limits>

#include <trotline/base/errors.hpp>

namespace trotline {
namespace {

constexpr int kWaitForReadersMs = 10'000;

std::string advice_for(int code) {
  switch (code & 0xFF) {
    case SQLITE_FULL:
      return "; the disk is full: what was finished is kept, make room and run the survey again";
    case SQLITE_IOERR:
      return "; what was finished is kept, run the survey again when the disk can be written to";
    case SQLITE_CORRUPT:
    case SQLITE_NOTADB:
      return "; move the file away and the survey starts anew";
    case SQLITE_BUSY:
      return "; another program holds the file";
    default:
      return "";
  }
}

}  // namespace

Database::Database(const std::string& path, Mode mode) : path_(path) {
  const int flags =
      mode == Mode::read_only ? SQLITE_OPEN_READONLY : SQLITE_OPEN_READWRITE | SQLITE_OPEN_CREATE;
  const int code = sqlite3_open_v2(path.c_str(), &handle_, flags | SQLITE_OPEN_NOMUTEX, nullptr);
  if (code != SQLITE_OK) {
    const std::string reason = handle_ != nullptr ? sqlite3_errmsg(handle_) : sqlite3_errstr(code);
    sqlite3_close(handle_);
    throw SystemError(fmt::format("the ledger {} cannot be opened: {}{}", path, reason, advice_for(code)));
  }
  sqlite3_extended_result_codes(handle_, 1);
  sqlite3_busy_timeout(handle_, kWaitForReadersMs);
}

Database::~Database() { sqlite3_close(handle_); }

void Database::run(const char* sql) const {
  const int code = sqlite3_exec(handle_, sql, nullptr, nullptr, nullptr);
  if (code != SQLITE_OK) refuse(code);
}

void Database::refuse(int code) const {
  throw SystemError(
      fmt::format("the ledger {} cannot be used: {}{}", path_, sqlite3_errmsg(handle_), advice_for(code)));
}

Statement::Statement(const Database& database, const char* sql) : database_(database) {
  check(sqlite3_prepare_v3(database.handle(), sql, -1, SQLITE_PREPARE_PERSISTENT, &statement_, nullptr));
}

Statement::~Statement() { sqlite3_finalize(statement_); }

void Statement::check(int code) const {
  if (code != SQLITE_OK) database_.refuse(code);
}

void Statement::bind(int parameter, std::string_view text) {
  check(sqlite3_bind_text64(statement_, parameter, text.data(), text.size(), SQLITE_TRANSIENT, SQLITE_UTF8));
}

void Statement::bind(int parameter, std::int64_t number) {
  check(sqlite3_bind_int64(statement_, parameter, number));
}

void Statement::bind(int parameter, double number) {
  check(sqlite3_bind_double(statement_, parameter, number));
}

void Statement::bind_null(int parameter) { check(sqlite3_bind_null(statement_, parameter)); }

bool Statement::step() {
  const int code = sqlite3_step(statement_);
  if (code == SQLITE_ROW) return true;
  if (code != SQLITE_DONE) {
    sqlite3_reset(statement_);
    database_.refuse(code);
  }
  reset();
  return false;
}

void Statement::execute() {
  while (step()) {
  }
}

void Statement::reset() { sqlite3_reset(statement_); }

std::string Statement::text(int column) const {
  const auto* bytes = reinterpret_cast<const char*>(sqlite3_column_text(statement_, column));
  return bytes == nullptr
             ? std::string{}
             : std::string(bytes, static_cast<std::size_t>(sqlite3_column_bytes(statement_, column)));
}

std::int64_t Statement::whole(int column) const { return sqlite3_column_int64(statement_, column); }

double Statement::number(int column) const {
  return is_null(column) ? std::numeric_limits<double>::quiet_NaN()
                         : sqlite3_column_double(statement_, column);
}

bool Statement::is_null(int column) const { return sqlite3_column_type(statement_, column) == SQLITE_NULL; }

}  // namespace trotline
