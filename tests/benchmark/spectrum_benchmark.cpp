// How fast spectra are read and lines measured.
#include <benchmark/benchmark.h>

#include <trotline/observation/line_measurement.hpp>

#include "observation/simulated_spectra.hpp"
#include "observation/spectrum_zoo.hpp"

namespace {

using namespace trotline;

void MeasureLinesOfAMillionChannels(benchmark::State& state) {
  std::mt19937_64 random(1);
  simulation::Setup setup;
  setup.channels = 1'000'000;
  const Spectrum spectrum = simulation::spectrum(setup, random);
  std::vector<LineRequest> lines;
  for (int i = 0; i < 300; ++i) {
    const double channel = 3333.0 * i + 1000.0;
    lines.push_back({std::to_string(i), spectrum.axis.frequency_hz(channel)});
  }
  MeasurementOptions options;
  options.window_km_s = 5.0;
  for (auto _ : state) benchmark::DoNotOptimize(measure_lines(spectrum, lines, options));
}
BENCHMARK(MeasureLinesOfAMillionChannels)->Unit(benchmark::kMillisecond);

void ReadAndMeasureRowsOfATable(benchmark::State& state) {
  const SpectrumFile file(zoo::table(zoo::vrad(), 64, "E", true), "table", {});
  MeasurementOptions options;
  options.window_km_s = 10.0;
  options.vlsr_km_s = zoo::kVlsrKmS;
  std::size_t spectra = 0;
  for (auto _ : state) {
    for (std::size_t i = 0; i < file.size(); ++i) {
      benchmark::DoNotOptimize(measure_lines(file.read(i), {{"line", zoo::kRestHz}}, options));
      ++spectra;
    }
  }
  state.SetItemsProcessed(static_cast<std::int64_t>(spectra));
}
BENCHMARK(ReadAndMeasureRowsOfATable)->Unit(benchmark::kMillisecond);

void ReadHeaderAndAxis(benchmark::State& state) {
  const std::string bytes = zoo::image(zoo::vopt());
  for (auto _ : state) benchmark::DoNotOptimize(SpectrumFile(bytes, "image", {}).read(0));
}
BENCHMARK(ReadHeaderAndAxis)->Unit(benchmark::kMicrosecond);

}  // namespace
