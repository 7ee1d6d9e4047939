#pragma once

#include <ostream>
#include <string>
#include <vector>

namespace trotline {

/// Exit codes of the program; docs/man/trotline.1 tells users the same.
enum class ExitCode : int { done = 0, fault = 1, wrong_command_line = 2, bad_input = 3, no_answer = 4 };

/// Where a verb writes, and what its terminal can show.
struct Console {
  std::ostream& out;  ///< results, and nothing else
  std::ostream& err;  ///< messages and progress
  int width = 92;     ///< columns
  bool colour = false;
  bool unicode = true;
  bool owns_process = false;  ///< signals to stop may be handled: nothing but the program runs in the process
};

/// Runs trotline. @param arguments  without the program's name
/// @return the exit code; every exception has become a message on console.err
[[nodiscard]] ExitCode run_program(const std::vector<std::string>& arguments, const Console& console);

}  // namespace trotline
