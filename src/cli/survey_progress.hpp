#pragma once

#include <cstddef>
#include <string>

#include <trotline/survey/run.hpp>

namespace trotline {

/// How far a survey has come, on one line of at most `width` columns: a bar, jobs, rate, time left, counts.
[[nodiscard]] std::string progress_line(const SurveyProgress& progress, std::size_t width, bool unicode);

}  // namespace trotline
