// Speed of the 80-column reader on a million lines, which are made here.

#include <benchmark/benchmark.h>
#include <fmt/format.h>

#include <iterator>
#include <random>

#include <trotline/species/line_list.hpp>

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

}  // namespace
}  // namespace trotline
