#pragma once

#include <string>

#include <trotline/analysis/result.hpp>

namespace trotline {

/// The lines of a result as a table in ECSV 1.0 (enhanced character-separated values), one row a line, with
/// unit and description of every column; what else the result holds stands in the header under `meta`, with
/// the names of result.json. The columns of an intensity table keep their names there, so that the table can
/// be fitted again.
///
/// Numbers have the fewest digits that read back to the same double; what is not known is an empty cell. Text
/// passes display_text(). Reference for the format: Astropy Proposal for Enhancement 6 (ECSV), version 1.0.
[[nodiscard]] std::string lines_ecsv(const Result& result);

/// The draws from the posterior in the same format, one row a draw, one column for each of Result::parameters, the
/// rest of the result under `meta`. No row where no draws were kept.
[[nodiscard]] std::string samples_ecsv(const Result& result);

}  // namespace trotline
