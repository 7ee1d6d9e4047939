// Speed of the 80-column reader on a million lines, which are made here.

#include <benchmark/benchmark.h>
#include <fmt/format.h>

#include <chrono>
#include <cstdlib>
#include <filesystem>
#include <iterator>
#include <random>

#include <trotline/base/files.hpp>
#include <trotline/species/line_list.hpp>
#include <trotline/species/species_file.hpp>

namespace trotline {
namespace {

std::string million_lines() {
  std::mt19937_64 random(20240611);
  std::uniform_real_distribution<double> fraction(0.0, 1.0);
  std::string text;
  double frequency = 1000.0;
  for (int i = 0; i < 1000000; ++i) {
    const int j = 1 + static_cast<int>(98.0 * fraction(random));
    const int ka = static_cast<int>(j * fraction(random));
    frequency += 2.0 * fraction(random);
    fmt::format_to(std::back_inserter(text),
                   "{:13.4f}{:8.4f}{:8.4f} 3{:10.4f}{:3}  99999 303{:2}{:2}{:2}      {:2}{:2}{:2}      \n",
                   frequency, fraction(random), -10.0 * fraction(random), 9999.0 * fraction(random),
                   2 * j + 1, j, ka, j - ka, j - 1, ka, j - ka);
  }
  return text;
}

void ReadMillionLines(benchmark::State& state) {
  const std::string text = million_lines();
  for (auto _ : state) {
    const LineList list = parse_line_list(text, "made");
    benchmark::DoNotOptimize(list.rows.size());
  }
  state.SetBytesProcessed(state.iterations() * static_cast<std::int64_t>(text.size()));
  state.SetItemsProcessed(state.iterations() * 1000000);
}
BENCHMARK(ReadMillionLines)->Unit(benchmark::kMillisecond);

/// A million lines between 60,000 levels, J and Ka to 350, of an invented near-prolate rotor.
std::string million_lines_of_levels() {
  constexpr double kPerMhz = 1.0 / 29979.2458;  // c, exact
  const auto energy_mhz = [](int j, int ka) { return 3000.0 * j * (j + 1) + 9000.0 * ka * ka; };
  const auto number = [](int n) {
    return n < 100 ? fmt::format("{:2}", n)
                   : fmt::format("{}{}", static_cast<char>('A' + (n - 100) / 10), n % 10);
  };
  const auto degeneracy = [](int g) {
    return g < 1000 ? fmt::format("{:3}", g) : fmt::format("A{:02}", g - 1000);
  };
  std::string text;
  int lines = 0;
  for (int j = 1; lines < 1000000; ++j) {
    for (int ka = 0; ka <= j; ++ka) {
      for (int step = 0; step < 17; ++step) {
        const int to_j = j - (step & 1);
        const int to_ka = ka - 1 - step / 2;
        if (to_ka < 0 || to_ka > to_j || lines >= 1000000) continue;
        const double lower_mhz = energy_mhz(to_j, to_ka);
        fmt::format_to(std::back_inserter(text),
                       "{:13.4f}{:8.4f}{:8.4f} 3{:10.4f}{}  99999 303{}{}{}      {}{}{}      \n",
                       energy_mhz(j, ka) - lower_mhz, 0.01, -5.0, lower_mhz * kPerMhz, degeneracy(2 * j + 1),
                       number(j), number(ka), number(j - ka), number(to_j), number(to_ka),
                       number(to_j - to_ka));
        ++lines;
      }
    }
  }
  return text;
}

/// From the species file's path to the whole species, a list of a million lines having been kept before.
void ReopenMillionLines(benchmark::State& state) {
  const std::filesystem::path folder =
      std::filesystem::temp_directory_path() / "trotline-line-list-benchmark";
  std::filesystem::create_directories(folder);
  ::setenv("TROTLINE_CACHE", folder.c_str(), 1);
  write_file(folder / "made.cat", million_lines_of_levels());
  write_file(folder / "M.yaml",
             "name: M\nkind: line_list\nline_list: {file: made.cat, intensity: log10_a, from: made up}\n"
             "partition: from_levels\n");
  const std::string file = (folder / "M.yaml").string();
  const auto start = std::chrono::steady_clock::now();
  const Species first = read_species_file(file);
  state.counters["first_reading_s"] =
      std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count();
  for (auto _ : state) {
    const Species species = read_species_file(file);
    benchmark::DoNotOptimize(species.transitions.data());
  }
  state.counters["levels"] = static_cast<double>(first.levels.size());
  state.counters["lines"] = static_cast<double>(first.transitions.size());
  std::filesystem::remove_all(folder);
}
BENCHMARK(ReopenMillionLines)->Unit(benchmark::kMillisecond);

}  // namespace
}  // namespace trotline
