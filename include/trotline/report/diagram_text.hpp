#pragma once

#include <string>
#include <vector>

#include <trotline/analysis/result.hpp>

namespace trotline {

/// What the figure says of a result, line by line: T and N with errors in large, goodness of fit in small
/// type; for a status other than done why there is no temperature.
struct DiagramAnswer {
  std::vector<std::string> answer;
  std::vector<std::string> detail;
};

[[nodiscard]] DiagramAnswer diagram_answer(const Result& result);

}  // namespace trotline
