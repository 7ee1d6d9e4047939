// Where the numbers from outside lie that are read at test time and are not part of the sources.
#pragma once

#include <cstdlib>
#include <filesystem>
#include <string>

namespace trotline::test {

/// `name` inside the folder of reference files, or an empty path where there is none: such a test is skipped.
inline std::filesystem::path reference_file(const std::string& name) {
  namespace fs = std::filesystem;
  const char* const chosen = std::getenv("TROTLINE_SHARED");
  const fs::path folder =
      chosen != nullptr ? fs::path(chosen) : fs::path(TROTLINE_SOURCE_DIR).parent_path() / "shared";
  const fs::path file = folder / "reference" / name;
  std::error_code ignored;
  return fs::exists(file, ignored) ? file : fs::path();
}

}  // namespace trotline::test
