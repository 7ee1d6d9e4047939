#pragma once

#include <string>

#include <trotline/analysis/measurement.hpp>
#include <trotline/report/terminal.hpp>

namespace trotline {

/// The name that `schema` holds in every document; it changes when a key changes its meaning or goes.
inline constexpr const char* kMeasurementSchema = "trotline-measurement-1";

/// Measured lines as one JSON document, indented by two spaces and ending in '\n': each spectrum with its
/// lines, each number with how it was obtained; docs/spectra.md names the keys. Numbers are written with the
/// fewest digits that read back to the same double; what is not known is null.
[[nodiscard]] std::string measurement_json(const SpeciesMeasurement& measurement);

/// Measured lines as a page to read: one table for each spectrum, or one line for each where there are many,
/// then what was not measured and the warnings. Text from outside passes display_text().
/// @return lines ending in '\n', none longer than the width
[[nodiscard]] std::string measurement_text(const SpeciesMeasurement& measurement,
                                           const TerminalOptions& options = {});

}  // namespace trotline
