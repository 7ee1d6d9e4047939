#include "survey_progress.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include <trotline/survey/summary.hpp>

namespace trotline {
namespace {

constexpr std::size_t kWidestBar = 30;

std::string bar_of(double fraction, std::size_t columns, bool unicode) {
  const auto full = static_cast<std::size_t>(std::floor(fraction * static_cast<double>(columns)));
  std::string bar = "[";
  for (std::size_t i = 0; i < columns; ++i) bar += unicode ? (i < full ? "━" : "·") : (i < full ? "=" : ".");
  return bar + "]";
}

std::string time_left(const SurveyProgress& progress) {
  if (progress.finished == 0 || progress.seconds <= 0.0) return "";
  const double each = progress.seconds / static_cast<double>(progress.finished);
  return ", " +
         duration_text(std::ceil(each * static_cast<double>(progress.to_compute - progress.finished))) +
         " left";
}

}  // namespace

std::string progress_line(const SurveyProgress& progress, std::size_t width, bool unicode) {
  const double fraction = progress.to_compute > 0 ? static_cast<double>(progress.finished) /
                                                        static_cast<double>(progress.to_compute)
                                                  : 1.0;
  const double rate =
      progress.seconds > 0.0 ? static_cast<double>(progress.finished) / progress.seconds : 0.0;
  const std::string numbers = fmt::format(" {}/{}, {:.0f}/s{}; done {}, weak {}, failed {}",
                                          progress.finished, progress.to_compute, rate, time_left(progress),
                                          progress.counts.done, progress.counts.weak, progress.counts.failed);
  const std::size_t room = width > numbers.size() + 3 ? width - numbers.size() - 3 : 0;
  if (room < 5) return numbers.substr(1, std::min(numbers.size() - 1, width));
  return bar_of(fraction, std::min(room, kWidestBar), unicode) + numbers;
}

}  // namespace trotline
