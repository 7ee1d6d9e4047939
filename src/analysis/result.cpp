#include <trotline/analysis/result.hpp>

namespace trotline {

const char* name_of(Status status) {
  switch (status) {
    case Status::done:
      return "done";
    case Status::one_line:
      return "one line";
    case Status::not_thermal:
      return "not thermal";
    case Status::only_limits:
      return "only limits";
    case Status::no_lines:
      return "no lines";
    case Status::unbounded:
      return "unbounded";
    case Status::degenerate:
      return "degenerate";
    case Status::several:
      return "several answers";
    case Status::at_bound:
      return "at a bound";
    case Status::no_solution:
      return "no solution";
    case Status::not_converged:
      return "not converged";
  }
  return "unknown";
}

const char* name_of(Outcome outcome) {
  switch (outcome) {
    case Outcome::pass:
      return "pass";
    case Outcome::fail:
      return "fail";
    case Outcome::not_testable:
      return "not testable";
  }
  return "unknown";
}

}  // namespace trotline
