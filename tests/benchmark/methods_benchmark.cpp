// One source of a survey by each method of `fit`: 12 lines with widths, checks included, no files.
#include <benchmark/benchmark.h>

#include "analysis/simulated_table.hpp"

namespace trotline {
namespace {

void one_source(benchmark::State& state, const char* method, const char* intervals) {
  const Species species = simulated_table::rotor();
  const double n = simulated_table::column_for(species, 1.0, 40.0, 12);
  IntensityTable table = simulated_table::table_of(species, {{40.0, n}}, 12, 0.05);
  std::mt19937_64 engine(1);
  simulated_table::add_noise(table, engine);
  RunOptions options = simulated_table::by(method);
  options.intervals = intervals;
  for (auto _ : state) benchmark::DoNotOptimize(analyse(species, table, options));
}

BENCHMARK_CAPTURE(one_source, line, "line", "profile");
BENCHMARK_CAPTURE(one_source, opacity_line, "opacity-line", "profile");
BENCHMARK_CAPTURE(one_source, likelihood, "likelihood", "profile");
BENCHMARK_CAPTURE(one_source, likelihood_curvature, "likelihood", "curvature");
BENCHMARK_CAPTURE(one_source, robust, "robust", "profile");

}  // namespace
}  // namespace trotline
