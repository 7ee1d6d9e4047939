// The parts of a report on a terminal, each appended to the page.
#pragma once

#include <string>

#include <trotline/analysis/result.hpp>

#include "terminal_page.hpp"

namespace trotline::terminal {

[[nodiscard]] std::string with_unit(const std::string& number, const std::string& unit);
[[nodiscard]] std::string species_of(const Result& result, const Page& page);
[[nodiscard]] std::string transition_of(const std::string& label, const Page& page);

// ---- terminal_answer.cpp
void add_title(Page& page, const Result& result);
void add_answer(Page& page, const Result& result);
void add_assumptions(Page& page, const Result& result);

// ---- terminal_lines.cpp
void add_lines(Page& page, const Result& result);
void add_unused(Page& page, const Result& result);

}  // namespace trotline::terminal
