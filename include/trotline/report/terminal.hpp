#pragma once

#include <cstddef>
#include <string>

#include <trotline/analysis/result.hpp>

namespace trotline {

struct TerminalOptions {
  std::size_t width = 80;  ///< columns; at least 40 are used. Below 72 the bars of the residuals go.
  bool colour = false;     ///< ANSI colours and bold; nothing is told by colour alone
  bool unicode = true;     ///< false: ASCII for all that is ours; text from the input stays as it is
};

/// A result as a page to read in ten seconds: what came out with its errors and intervals, how well it fits,
/// what it rests on, the lines with their residuals, what was left out, the checks, the warnings, where it
/// came from. Every status has its own wording. Text from outside passes display_text(): no control character
/// reaches the terminal but those of `colour`.
/// @return lines ending in '\n', none longer than the width
[[nodiscard]] std::string terminal_report(const Result& result, const TerminalOptions& options = {});

}  // namespace trotline
