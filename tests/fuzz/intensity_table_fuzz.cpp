// Any bytes are a table or an InputError; a table that was read survives being written and read again.
#include <cstddef>
#include <cstdint>
#include <cstdlib>
#include <string_view>

#include <trotline/observation/intensity_table.hpp>

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
  const std::string_view bytes(reinterpret_cast<const char*>(data), size);
  try {
    const auto table = trotline::parse_intensity_table(bytes, "fuzz");
    const auto again = trotline::parse_intensity_table(trotline::to_ecsv(table), "again");
    if (again.rows.size() != table.rows.size()) std::abort();
    for (std::size_t i = 0; i < table.rows.size(); ++i) {
      if (again.rows[i].intensity != table.rows[i].intensity) std::abort();
      if (again.rows[i].frequency_hz != table.rows[i].frequency_hz) std::abort();
      if (again.rows[i].note != table.rows[i].note) std::abort();
    }
  } catch (const trotline::InputError&) {
    return 0;
  }
  return 0;
}
