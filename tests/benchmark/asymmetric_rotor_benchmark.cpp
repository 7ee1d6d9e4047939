// Levels and lines of a rotor with three dipole components. The script asymmetric_rotor_benchmark.py runs
// this program and does the same with numpy, in one go.
#include <benchmark/benchmark.h>

#include <trotline/physics/constants.hpp>
#include <trotline/rotor/asymmetric.hpp>

namespace trotline {
namespace {

/// Rigid constants of an invented rotor, as the script has them.
constexpr double kRigidHz[] = {90e9, 50e9, 30e9};

AsymmetricConstants constants_for_timing() {
  return {.a_hz = kRigidHz[0], .b_hz = kRigidHz[1], .c_hz = kRigidHz[2]};
}

DipoleMoment one_debye_each() {
  return {.a_c_m = constants::kDebyeCM, .b_c_m = constants::kDebyeCM, .c_c_m = constants::kDebyeCM};
}

void levels_and_lines(benchmark::State& state) {
  const auto spin = make_spin_rule({});
  const RotorOptions options{.highest_j = static_cast<int>(state.range(0))};
  std::size_t lines = 0;
  for ([[maybe_unused]] auto pass : state) {
    const RotorModel model = asymmetric_model(constants_for_timing(), one_debye_each(), *spin, options);
    lines = model.transitions.size();
  }
  state.counters["lines"] = static_cast<double>(lines);
}
BENCHMARK(levels_and_lines)->Arg(15)->Arg(30)->Arg(60)->Arg(120)->Unit(benchmark::kMillisecond);

/// Without the lines whose S is lost in rounding, below 1e-9: what the script does.
void levels_and_lines_above_rounding(benchmark::State& state) {
  const auto spin = make_spin_rule({});
  const RotorOptions options{.highest_j = static_cast<int>(state.range(0)), .least_line_strength = 1e-9};
  std::size_t lines = 0;
  for ([[maybe_unused]] auto pass : state) {
    const RotorModel model = asymmetric_model(constants_for_timing(), one_debye_each(), *spin, options);
    lines = model.transitions.size();
  }
  state.counters["lines"] = static_cast<double>(lines);
}
BENCHMARK(levels_and_lines_above_rounding)
    ->Arg(15)
    ->Arg(30)
    ->Arg(60)
    ->Arg(120)
    ->Unit(benchmark::kMillisecond);

void levels_alone(benchmark::State& state) {
  for ([[maybe_unused]] auto pass : state) {
    benchmark::DoNotOptimize(asymmetric_levels(constants_for_timing(), static_cast<int>(state.range(0))));
  }
}
BENCHMARK(levels_alone)->Arg(15)->Arg(30)->Arg(60)->Arg(120)->Unit(benchmark::kMillisecond);

}  // namespace
}  // namespace trotline
