#pragma once

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <sstream>
#include <string>
#include <vector>

#include <trotline/cli/program.hpp>

#include "support/temporary_folder.hpp"

namespace trotline {

/// Runs the program inside the test, with a folder of its own.
class ProgramTest : public ::testing::Test {
 protected:
  struct Outcome {
    ExitCode code;
    std::string out;
    std::string err;
  };

  static Outcome run(const std::vector<std::string>& arguments) {
    std::ostringstream out;
    std::ostringstream err;
    const ExitCode code = run_program(arguments, Console{out, err});
    return {code, out.str(), err.str()};
  }

  /// Eight lines of CO at 30 K would do; three are enough here (invented).
  std::string table(const std::string& name = "lines.csv") const {
    return folder_.file(name,
                        "transition,intensity [K km/s],intensity_error [K km/s]\n"
                        "1-0,4.21,0.08\n2-1,11.93,0.25\n3-2,14.02,0.41\n");
  }

  std::vector<std::string> names_in(const std::string& name) const {
    std::vector<std::string> names;
    for (const auto& entry : std::filesystem::directory_iterator(folder_.path() / name)) {
      names.push_back(entry.path().filename().string());
    }
    std::sort(names.begin(), names.end());
    return names;
  }

  testing_support::TemporaryFolder folder_;
};

}  // namespace trotline
