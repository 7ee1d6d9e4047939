#include "line_list_labels.hpp"

#include <fmt/format.h>

#include <algorithm>

namespace trotline {
namespace {

std::string printed(int value, bool half) {
  return half ? fmt::format("{}/2", 2 * value - 1) : fmt::format("{}", value);
}

bool is(const LabelStyle& style, std::size_t i, const char* name) {
  return i < style.names.size() && style.names[i] == name;
}

/// A number whose value never changes, or always is the first one's, tells nothing apart.
bool tells_apart(const LineList& list, std::size_t i) {
  const auto constant = list.rows.front().upper[i];
  const auto same = [&](auto predicate) {
    return std::all_of(list.rows.begin(), list.rows.end(), predicate);
  };
  const bool repeats =
      same([i](const LineListRow& r) { return r.upper[i] == r.upper[0] && r.lower[i] == r.lower[0]; });
  return !repeats &&
         !same([&](const LineListRow& r) { return r.upper[i] == constant && r.lower[i] == constant; });
}

}  // namespace

std::vector<std::string> usual_quanta(int quantum_format) {
  const auto n = static_cast<std::size_t>(quantum_format % 10);
  std::vector<std::string> names;
  switch (quantum_format / 100) {
    case 1:
      names = {"J"};
      break;
    case 2:
      names = {"J", "K"};
      break;
    case 3:
      names = {"J", "Ka", "Kc"};
      break;
    case 13:
      names = {"J", "K", "v"};
      break;
    case 14:
      names = {"J", "Ka", "Kc", "v"};
      break;
    default:
      return {};
  }
  if (n < names.size()) return {};
  const std::size_t spins = n - names.size();
  for (std::size_t i = 1; i < spins; ++i) names.push_back(fmt::format("F{}", i));
  if (spins > 0) names.emplace_back("F");
  return names;
}

LabelStyle style_for(const LineList& list, std::vector<std::string> names) {
  LabelStyle style{std::move(names), {}, {}};
  const LineListRow& first = list.rows.front();
  const auto n = static_cast<std::size_t>(first.quanta);
  for (std::size_t i = 0; i < n; ++i) {
    const bool rotational = i == 0 || is(style, i, "K") || is(style, i, "Ka") || is(style, i, "Kc");
    style.shown.push_back(rotational || tells_apart(list, i));
    style.half.push_back(first.is_half_integer(static_cast<int>(i)));
  }
  return style;
}

std::string label_of(const Quanta& quanta, const LabelStyle& style) {
  const auto text = [&](std::size_t i) { return printed(quanta[i], style.half[i]); };
  std::string label = text(0);
  std::size_t next = 1;
  if (is(style, 1, "K")) {
    label += fmt::format("({})", text(1));
    next = 2;
  } else if (is(style, 1, "Ka") && is(style, 2, "Kc")) {
    label += fmt::format("({},{})", text(1), text(2));
    next = 3;
  }
  for (std::size_t i = next; i < style.shown.size(); ++i) {
    if (style.shown[i]) label += (is(style, i, "v") ? ",v=" : ",") + text(i);
  }
  return label;
}

}  // namespace trotline
