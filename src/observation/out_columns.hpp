// An intensity table as columns of text, ready to be written in any format.
#pragma once

#include <string>
#include <vector>

#include <trotline/observation/intensity_table.hpp>

namespace trotline {

/// One column that some row fills.
struct OutColumn {
  std::string name;
  std::string datatype;  ///< of ECSV: "float64", "string", "bool"
  std::string unit;      ///< as the FITS standard has it; empty: none
  std::vector<std::string> cells;  ///< numbers with the fewest digits that read back; "" where not known
};

/// @throws InputError when the rows mix K km/s and Jy/beam km/s; DomainError for numbers that are not finite
[[nodiscard]] std::vector<OutColumn> out_columns(const IntensityTable& table);

}  // namespace trotline
