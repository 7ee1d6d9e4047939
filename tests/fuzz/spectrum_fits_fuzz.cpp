// Any bytes are a file of spectra or an InputError: headers, axes, tables, compressed images.
#include <cstddef>
#include <cstdint>
#include <string>

#include <trotline/base/errors.hpp>
#include <trotline/observation/line_measurement.hpp>

/// CFITSIO 4.2 does not free its buffer when a compressed tile is damaged; the process is not harmed.
extern "C" const char* __lsan_default_suppressions() { return "leak:imcomp_decompress_tile\n"; }

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
  // Without this the fuzzer spends its time on texts; the other target has those.
  std::string bytes(reinterpret_cast<const char*>(data), size);
  if (!bytes.starts_with("SIMPLE") && !bytes.starts_with("\x1F\x8B")) return 0;
  try {
    const trotline::SpectrumFile file(bytes, "fuzz", {});
    for (std::size_t i = 0; i < file.size() && i < 4; ++i) {
      const trotline::Spectrum spectrum = file.read(i);
      trotline::MeasurementOptions options;
      options.window_km_s = 5.0;
      const double middle = 0.5 * (spectrum.axis.low_hz() + spectrum.axis.high_hz());
      if (middle > 0.0) (void)trotline::measure_lines(spectrum, {{"line", middle}}, options);
    }
  } catch (const trotline::InputError&) {
    return 0;
  }
  return 0;
}
