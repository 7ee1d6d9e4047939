// Whatever bytes a line list holds, the reader gives rows that make sense or says what is wrong.

#include <cmath>
#include <cstdint>
#include <cstdlib>
#include <string_view>

#include <trotline/base/errors.hpp>
#include <trotline/species/line_list.hpp>

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
  try {
    const auto list = trotline::parse_line_list({reinterpret_cast<const char*>(data), size}, "fuzz");
    for (const trotline::LineListRow& row : list.rows) {
      const bool sane = std::isfinite(row.frequency_mhz) && row.frequency_mhz > 0.0 &&
                        row.frequency_sigma_mhz >= 0.0 && std::isfinite(row.lower_energy_per_cm) &&
                        row.upper_degeneracy > 0 && row.tag > 0 && row.quanta > 0;
      if (!sane) std::abort();
    }
  } catch (const trotline::InputError&) {
  }
  return 0;
}
