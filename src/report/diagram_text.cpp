#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include <trotline/report/diagram_text.hpp>
#include <trotline/report/display_text.hpp>
#include <trotline/report/rounding.hpp>

namespace trotline {
namespace {

/// Where the data set no upper bound, the lower one says more than a value with an error beyond it.
bool is_bounded(const Result& result) {
  return result.temperature_fixed || std::isfinite(result.temperature_k.high68) ||
         !std::isfinite(result.temperature_k.low68);
}

std::string temperature_text(const Result& result) {
  const Estimate& t = result.temperature_k;
  if (result.temperature_fixed) return "T = " + value_with_error(t.value, 0.0) + " K (stated)";
  if (!is_bounded(result)) return "T > " + significant(t.low68, 2) + " K (68 %)";
  return "T = " + value_with_error(t.value, t.error) + " K";
}

std::string column_text(const Result& result) {
  const Estimate& n = result.column_density_cm2;
  if (!is_bounded(result) && std::isfinite(n.low68)) return "N > " + significant(n.low68, 2) + " cm⁻² (68 %)";
  return "N = " + value_with_error(n.value, n.error) + " cm⁻²";
}

std::string p_text(double p) {
  if (p == 0.0) return "p < 10⁻³⁰⁰";
  return "p = " + (p >= 0.01 ? fmt::format("{:.2f}", p) : significant(p, 1));
}

std::vector<std::string> goodness(const Result& result) {
  if (!std::isfinite(result.chi2)) return {};
  if (result.dof <= 0) return {"no degree of freedom left"};
  std::string text = fmt::format("χ²/dof = {}/{}", significant(result.chi2, 2), result.dof);
  if (std::isfinite(result.p_value)) text += ", " + p_text(result.p_value);
  return {text};
}

/// N over the temperatures for which it is given.
DiagramAnswer for_one_line(const Result& result) {
  DiagramAnswer said{{"no temperature"}, {"one upper energy only"}};
  if (result.columns_at_temperatures.empty()) return said;
  const ColumnAtTemperature& first = result.columns_at_temperatures.front();
  const ColumnAtTemperature& last = result.columns_at_temperatures.back();
  const auto entry = [](const ColumnAtTemperature& at) {
    return "N(" + value_with_error(at.temperature_k, 0.0) + " K) = " + significant(at.column_density_cm2, 2) +
           " cm⁻²";
  };
  said.detail.push_back(entry(first));
  if (result.columns_at_temperatures.size() > 1) said.detail.push_back(entry(last));
  return said;
}

/// Two components: T and N of each. Spin isomers: the one T, N of each.
DiagramAnswer for_components(const Result& result) {
  DiagramAnswer said{{}, goodness(result)};
  const Component& first = result.components.front();
  const bool one_temperature = std::all_of(result.components.begin(), result.components.end(), [&](const auto& part) {
    return part.temperature_k.value == first.temperature_k.value;
  });
  if (one_temperature) said.answer.push_back(temperature_text(result));
  for (const Component& part : result.components) {
    const std::string column =
        "N = " + value_with_error(part.column_density_cm2.value, part.column_density_cm2.error) + " cm⁻²";
    if (one_temperature) {
      said.detail.insert(said.detail.end() - static_cast<std::ptrdiff_t>(goodness(result).size()),
                         display_text(part.name) + ": " + column);
    } else {
      said.answer.push_back("T = " + value_with_error(part.temperature_k.value, part.temperature_k.error) + " K");
      said.answer.push_back(column);
    }
  }
  return said;
}

}  // namespace

DiagramAnswer diagram_answer(const Result& result) {
  switch (result.status) {
    case Status::done:
      if (!result.components.empty()) return for_components(result);
      return {{temperature_text(result), column_text(result)}, goodness(result)};
    case Status::unbounded:
      return {{temperature_text(result)}, {"outside the range of Q(T)"}};
    case Status::one_line:
      return for_one_line(result);
    case Status::not_thermal:
      return {{"no temperature"}, {"the points do not fall with energy"}};
    case Status::only_limits:
      return {{"upper limits only"}, {}};
    case Status::no_lines:
      return {{"no line left to fit"}, {}};
    case Status::degenerate:
      return {{"ranges only"}, {"the lines do not hold all parameters"}};
    case Status::several:
      return {{"several answers"}, {"see the report"}};
    case Status::at_bound:
      return {{"ranges only"}, {"best value at the end of a range"}};
    case Status::no_solution:
      return {{"no solution"}, {"no T agrees with its own opacities"}};
    case Status::not_converged:
      return {{"fit not converged"}, {}};
  }
  return {};
}

}  // namespace trotline
