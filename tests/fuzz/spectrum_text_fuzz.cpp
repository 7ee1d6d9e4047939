// Any text is a spectrum or an InputError.
#include <cstddef>
#include <cstdint>
#include <string>

#include <trotline/base/errors.hpp>
#include <trotline/observation/spectrum.hpp>

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
  std::string bytes(reinterpret_cast<const char*>(data), size);
  if (bytes.starts_with("SIMPLE") || bytes.starts_with("\x1F\x8B")) return 0;
  try {
    const trotline::SpectrumFile file(bytes, "fuzz", {});
    for (std::size_t i = 0; i < file.size(); ++i) (void)file.read(i);
  } catch (const trotline::InputError&) {
    return 0;
  }
  return 0;
}
