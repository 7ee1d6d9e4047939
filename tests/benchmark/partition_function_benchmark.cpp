// Speed of Q(T) with its slope: a sum over many levels, and a table.

#include <benchmark/benchmark.h>

#include <cmath>
#include <random>

#include <trotline/species/partition_function.hpp>

namespace trotline {
namespace {

/// As many levels as asked for, with the density of states of an asymmetric rotor up to 5000 K.
std::vector<Level> rotor_levels(std::size_t number) {
  std::mt19937_64 random(20240611);
  std::uniform_real_distribution<double> fraction(0.0, 1.0);
  std::vector<Level> levels = {{"0", 0.0, 1.0, ""}};
  while (levels.size() < number) {
    levels.push_back(
        {"", 5000.0 * std::pow(fraction(random), 2.0 / 3.0), std::floor(1.0 + 100.0 * fraction(random)), ""});
  }
  return levels;
}

/// A thousand temperatures from 5 to 500 K, evenly in ln T.
void thousand_temperatures(benchmark::State& state, const PartitionFunction& partition) {
  for (auto _ : state) {
    double sum = 0.0;
    for (int i = 0; i < 1000; ++i) sum += partition.at(5.0 * std::pow(100.0, i / 999.0)).dlnq_dt;
    benchmark::DoNotOptimize(sum);
  }
  state.SetItemsProcessed(state.iterations() * 1000);
}

void LevelSumAtThousandTemperatures(benchmark::State& state) {
  const auto levels = rotor_levels(static_cast<std::size_t>(state.range(0)));
  thousand_temperatures(state, *partition_function_from_levels(levels));
}
BENCHMARK(LevelSumAtThousandTemperatures)->Arg(100)->Arg(10000)->Arg(100000)->Unit(benchmark::kMillisecond);

void TableAtThousandTemperatures(benchmark::State& state) {
  std::vector<std::pair<double, double>> points;
  for (const double t : {2.725, 5.0, 9.375, 18.75, 37.5, 75.0, 150.0, 225.0, 300.0, 500.0}) {
    points.emplace_back(t, 0.5 * std::pow(t, 1.5) + 1.0);
  }
  thousand_temperatures(state, *partition_function_from_table(points));
}
BENCHMARK(TableAtThousandTemperatures)->Unit(benchmark::kMillisecond);

}  // namespace
}  // namespace trotline
