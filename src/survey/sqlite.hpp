// SQLite with errors as exceptions: one connection, prepared statements.
#pragma once

#include <sqlite3.h>

#include <cstdint>
#include <optional>
#include <string>
#include <string_view>

namespace trotline {

class Database {
 public:
  enum class Mode { read_only, read_write };

  /// Opens a file; with read_write it is made where it is missing. @throws SystemError
  Database(const std::string& path, Mode mode);
  ~Database();
  Database(const Database&) = delete;
  Database& operator=(const Database&) = delete;

  /// Runs SQL of our own without parameters. @throws SystemError
  void run(const char* sql) const;

  /// Throws SystemError with the file, what could not be done and SQLite's reason.
  [[noreturn]] void refuse(int code) const;

  [[nodiscard]] sqlite3* handle() const { return handle_; }

 private:
  sqlite3* handle_ = nullptr;
  std::string path_;
};

/// A prepared statement. Parameters count from 1, columns from 0.
class Statement {
 public:
  Statement(const Database& database, const char* sql);
  ~Statement();
  Statement(const Statement&) = delete;
  Statement& operator=(const Statement&) = delete;

  void bind(int parameter, std::string_view text);
  void bind(int parameter, std::int64_t number);
  void bind(int parameter, double number);  ///< NaN becomes NULL
  void bind_null(int parameter);

  /// Moves to the next row; false when there is none, and the statement can then be bound anew.
  bool step();

  /// Steps through a statement that gives no rows.
  void execute();

  /// Makes the statement ready to be bound anew.
  void reset();

  [[nodiscard]] std::string text(int column) const;
  [[nodiscard]] std::int64_t whole(int column) const;
  [[nodiscard]] double number(int column) const;  ///< NaN for NULL
  [[nodiscard]] bool is_null(int column) const;

 private:
  void check(int code) const;

  const Database& database_;
  sqlite3_stmt* statement_ = nullptr;
};

}  // namespace trotline
