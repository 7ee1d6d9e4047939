// Time and memory of two large jobs, from files: a spectrum of a million channels with 300 lines, and a table
// of 2000 spectra of 4096 channels. tests/benchmark/spectrum_comparison.py does the same with astropy and
// scipy.
//
//     spectrum_speed write FOLDER      makes million.fits and table.fits there
//     spectrum_speed million FOLDER    measures, prints seconds, largest memory and the sum of the
//     intensities spectrum_speed table FOLDER [THREADS]
#include <fmt/format.h>
#include <sys/resource.h>

#include <atomic>
#include <chrono>
#include <filesystem>
#include <fstream>
#include <thread>

#include <trotline/base/files.hpp>
#include <trotline/observation/line_measurement.hpp>

#include "observation/fits_builder.hpp"
#include "observation/simulated_spectra.hpp"

namespace {

using namespace trotline;
namespace fs = std::filesystem;

constexpr int kLines = 300;
constexpr int kSpectra = 2000;
constexpr int kChannels = 4096;
constexpr double kWindowKmS = 5.0;

double line_channel(int line) { return 3333.0 * line + 1000.0; }

void axis_keys(FitsBuilder& fits, const SpectralAxis& axis) {
  fits.key("CTYPE1", std::string("FREQ"));
  fits.key("CUNIT1", std::string("Hz"));
  fits.key("CRVAL1", axis.frequency_hz(0.0));
  fits.key("CDELT1", axis.frequency_hz(1.0) - axis.frequency_hz(0.0));
  fits.key("CRPIX1", 1.0);
  fits.key("SPECSYS", std::string("LSRK"));
}

void write_files(const fs::path& folder) {
  std::mt19937_64 random(1);
  simulation::Setup wide;
  wide.channels = 1'000'000;
  wide.baseline_order = 1;
  const Spectrum spectrum = simulation::spectrum(wide, random);
  Eigen::ArrayXd values = spectrum.intensity;
  for (int line = 0; line < kLines; ++line) {
    for (int i = -60; i <= 60; ++i) {
      values(static_cast<Eigen::Index>(line_channel(line)) + i) +=
          simulation::channel_mean({0.0, 30.0, 1.5}, i * simulation::kChannelKmS);
    }
  }
  FitsBuilder image;
  image.image(FLOAT_IMG, {wide.channels});
  axis_keys(image, spectrum.axis);
  image.key("BUNIT", std::string("K"));
  image.pixels(std::vector<double>(values.data(), values.data() + values.size()));
  write_file(folder / "million.fits", image.bytes());

  simulation::Setup narrow;
  narrow.channels = kChannels;
  narrow.baseline_order = 1;
  narrow.lines = {{0.0, 30.0, 1.5}};
  FitsBuilder table;
  table.table({{"DATA", std::to_string(kChannels) + "E", "K"}, {"OBJECT", "16A", ""}});
  axis_keys(table, simulation::axis(kChannels));
  for (int row = 1; row <= kSpectra; ++row) {
    const Spectrum one = simulation::spectrum(narrow, random);
    table.put(1, row, std::vector<double>(one.intensity.data(), one.intensity.data() + one.intensity.size()));
    table.put(2, row, "field " + std::to_string(row));
  }
  write_file(folder / "table.fits", table.bytes());
}

MeasurementOptions options() {
  MeasurementOptions result;
  result.window_km_s = kWindowKmS;
  result.baseline.order = 1;
  return result;
}

double measure_million(const fs::path& folder) {
  const Spectrum spectrum = read_spectra((folder / "million.fits").string()).at(0);
  std::vector<LineRequest> lines;
  for (int i = 0; i < kLines; ++i)
    lines.push_back({std::to_string(i), spectrum.axis.frequency_hz(line_channel(i))});
  double sum = 0.0;
  for (const LineMeasurement& line : measure_lines(spectrum, lines, options()).lines) sum += line.intensity;
  return sum;
}

double measure_table(const fs::path& folder, int threads) {
  const SpectrumFile file((folder / "table.fits").string());
  std::vector<double> found(file.size());
  std::atomic<std::size_t> next = 0;
  const auto work = [&] {
    for (std::size_t i = next++; i < file.size(); i = next++) {
      found[i] = measure_lines(file.read(i), {{"line", simulation::kRestHz}}, options()).lines[0].intensity;
    }
  };
  std::vector<std::thread> workers;
  for (int t = 1; t < threads; ++t) workers.emplace_back(work);
  work();
  for (std::thread& worker : workers) worker.join();
  double sum = 0.0;
  for (const double value : found) sum += value;
  return sum;
}

}  // namespace

int main(int argc, char** argv) {
  if (argc < 3) return 2;
  const std::string job = argv[1];
  const fs::path folder = argv[2];
  const auto begin = std::chrono::steady_clock::now();
  double sum = 0.0;
  if (job == "write") write_files(folder);
  if (job == "million") sum = measure_million(folder);
  if (job == "table") sum = measure_table(folder, argc > 3 ? std::atoi(argv[3]) : 2);
  const std::chrono::duration<double> seconds = std::chrono::steady_clock::now() - begin;
  rusage usage{};
  getrusage(RUSAGE_SELF, &usage);
  const double cpu = static_cast<double>(usage.ru_utime.tv_sec + usage.ru_stime.tv_sec) +
                     1e-6 * static_cast<double>(usage.ru_utime.tv_usec + usage.ru_stime.tv_usec);
  fmt::print("{} {:.3f} s wall, {:.3f} s of CPU, {:.1f} MB at most, sum of intensities {:.3f} K km/s\n", job,
             seconds.count(), cpu, static_cast<double>(usage.ru_maxrss) / 1024.0, sum);
  return 0;
}
