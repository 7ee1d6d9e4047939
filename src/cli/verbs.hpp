#pragma once

#include <string>
#include <vector>

#include <trotline/cli/program.hpp>

namespace trotline {

[[nodiscard]] ExitCode run_fit(const std::vector<std::string>& arguments, const Console& console);
[[nodiscard]] ExitCode run_survey_command(const std::vector<std::string>& arguments, const Console& console);
[[nodiscard]] ExitCode run_predict(const std::vector<std::string>& arguments, const Console& console);
[[nodiscard]] ExitCode run_measure(const std::vector<std::string>& arguments, const Console& console);
[[nodiscard]] ExitCode run_species(const std::vector<std::string>& arguments, const Console& console);

/// The help of a verb ("" for the program itself): its man page as text, made at build time.
[[nodiscard]] const char* help_text(const std::string& verb);

}  // namespace trotline
