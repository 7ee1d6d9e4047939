#pragma once

#include <cstddef>
#include <filesystem>
#include <string>
#include <vector>

namespace trotline {

struct ProcessOptions {
  std::filesystem::path folder = {};  ///< where it runs; empty: where we are
  double timeout_s = 60.0;            ///< then it and its children are killed
  std::size_t most_bytes = 1 << 22;   ///< of output that are kept; the rest is read and dropped
};

struct ProcessOutcome {
  int exit_code = 0;   ///< 128 + the signal where one ended it
  std::string output;  ///< standard output and standard error as they came
};

/// Runs a program to its end, without a shell: `arguments` reach it as they are, and [0] is looked up in
/// PATH. Its standard input is empty. Of the environment it sees PATH, HOME, TMPDIR, LD_LIBRARY_PATH and what
/// fontconfig needs, and LC_ALL=C.UTF-8; so no setting of the user's changes what it does.
/// @throws SystemError when it cannot be started, or has not ended in time
[[nodiscard]] ProcessOutcome run_process(const std::vector<std::string>& arguments,
                                         const ProcessOptions& options = {});

}  // namespace trotline
