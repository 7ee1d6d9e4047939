#pragma once

#include <cstddef>
#include <stdexcept>
#include <string>

namespace trotline {

/// The errors of trotline, and when to use which:
///
/// - InputError: something that a person wrote (a file, an option, a quantity) is wrong. The message
///   says where, what was found, what was expected and, where it helps, what to do.
/// - DomainError: a caller of the library passed a number outside a function's stated domain.
/// - SystemError: the machine refused (a file cannot be written, a program is missing).
///
/// Data that cannot answer the question asked of them (one line only, a slope that is not negative)
/// are a result with a status, never an exception.
class Error : public std::runtime_error {
 public:
  using std::runtime_error::runtime_error;
};

/// A place in a text that a person wrote. Line and column count from 1; 0 means unknown.
struct Place {
  std::string file;
  std::size_t line = 0;
  std::size_t column = 0;
};

/// "file:line:column", without the parts that are unknown.
[[nodiscard]] std::string to_string(const Place& place);

/// What is wrong with an input, in the order in which the message tells it.
struct Complaint {
  std::string found;          ///< what stands there, e.g. "column 'intensity' holds 'abc'"
  std::string expected = {};  ///< what should, e.g. "a number"
  std::string advice = {};    ///< what to do about it, where that is not plain
};

/// Wrong input: `file:line: found; expected ...; advice`.
class InputError : public Error {
 public:
  InputError(Place place, const Complaint& complaint);
  explicit InputError(const Complaint& complaint) : InputError(Place{}, complaint) {}

  [[nodiscard]] const Place& place() const { return place_; }
  [[nodiscard]] const Complaint& complaint() const { return complaint_; }

 private:
  Place place_;
  Complaint complaint_;
};

/// A number outside a function's domain: names the argument, the value and the allowed range.
class DomainError : public Error {
 public:
  DomainError(const std::string& argument, double value, const std::string& allowed);
};

/// The machine refused.
class SystemError : public Error {
 public:
  using Error::Error;
};

}  // namespace trotline
