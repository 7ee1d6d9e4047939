// Simulated sources for the coverage of intervals: what is observed of them and what is true of them.
#pragma once

#include <functional>
#include <memory>
#include <random>
#include <string>
#include <vector>

#include <trotline/inference/intensity_likelihood.hpp>
#include <trotline/inference/thermal_line.hpp>

#include "inference/methyl_cyanide.hpp"
#include "inference/simulated_source.hpp"

namespace trotline::coverage {

/// One parameter that is estimated and tallied.
struct Target {
  std::string name;
  int entry;  ///< of the state
};

struct Scenario {
  std::string name;
  std::vector<ModelLine> lines;
  bool is_methyl_cyanide = false;
  ForwardModelOptions model;
  double signal_to_noise = 10.0;  ///< of every line
  double temperature_k = 40.0;    ///< in the middle of those drawn
  double optical_depth = 0.01;    ///< of the most opaque line, likewise
  double background_k = 2.7255;
  double warm_temperature_k = 0.0;  ///< of a second component; 0: none
  double warm_column_share = 0.0;   ///< its N over that of the first
  double size_arcsec = 0.0;         ///< 0: fills every beam; else free
  double faint_share = 0.0;  ///< of lines, those of least intensity, at S/N 1: most of them become limits
  double limit_sigma = 0.0;  ///< lines below so many sigma are given as limits; 0: none
  double calibration_error = 0.0;  ///< shared by the lines of one of `receivers`
  int receivers = 3;
  std::vector<Target> targets;
};

struct Source {
  Eigen::VectorXd truth;  ///< the state
  LikelihoodProblem problem;
};

/// Lines of J - (J-1), K = 0 ... min(most_k, J-1).
inline void add_k_ladder(std::vector<ModelLine>& lines, int j, int most_k, double fwhm_km_s) {
  using namespace methyl_cyanide;
  for (int k = 0; k <= std::min(most_k, j - 1); ++k) {
    ModelLine line;
    const double nu = (energy_k(j, k) - energy_k(j - 1, k)) / constants::kKelvinPerHz;
    const double mu = kDipoleD * constants::kDebyeCM;
    const double strength = static_cast<double>(j * j - k * k) / j;
    line.constants = {
        nu, energy_k(j, k), (2.0 * j + 1.0) * weight(k),
        16.0 * std::pow(M_PI * nu / constants::kLightMPerS, 3) * strength * mu * mu /
            (3.0 * constants::kVacuumPermittivityFPerM * constants::kPlanckJS * (2.0 * j + 1.0))};
    line.fwhm_km_s = fwhm_km_s;
    line.datum = static_cast<int>(lines.size());
    lines.push_back(line);
  }
}

inline std::shared_ptr<const TabulatedPartition> methyl_cyanide_partition() {
  static const methyl_cyanide::Partition kSum;
  static const auto table = std::make_shared<TabulatedPartition>(kSum, 3.0, 1000.0);
  return table;
}

inline ForwardModel model_of(const Scenario& scenario) {
  ForwardModelOptions options = scenario.model;
  options.components = scenario.warm_temperature_k > 0.0 ? 2 : 1;
  if (scenario.is_methyl_cyanide) return {scenario.lines, {methyl_cyanide_partition()}, options};
  return {scenario.lines, simulated::partitions(), options};
}

inline std::vector<Scenario> scenarios() {
  const std::vector<Target> usual = {{"T", 1}, {"N", 0}};
  std::vector<Scenario> all;
  const auto add = [&](const std::string& name, std::vector<ModelLine> lines,
                       double signal_to_noise) -> Scenario& {
    Scenario scenario;
    scenario.name = name;
    scenario.lines = std::move(lines);
    scenario.signal_to_noise = signal_to_noise;
    scenario.targets = usual;
    all.push_back(scenario);
    return all.back();
  };
  const auto ladder = [](int count) { return simulated::ladder(count); };
  std::vector<ModelLine> k_ladder;
  add_k_ladder(k_ladder, 12, 6, 5.0);
  std::vector<ModelLine> thirty;
  for (const int j : {6, 9, 12, 15}) add_k_ladder(thirty, j, 7, 5.0);

  add("12 thin lines, S/N 50", ladder(12), 50.0);
  add("12 thin lines, S/N 10", ladder(12), 10.0);
  add("12 thin lines, S/N 3", ladder(12), 3.0);
  add("3 thin lines, S/N 20", ladder(3), 20.0).temperature_k = 10.0;
  add("3 thin lines, S/N 5", ladder(3), 5.0).temperature_k = 6.0;
  Scenario& many = add("30 lines, S/N 3", thirty, 3.0);
  many.is_methyl_cyanide = true;
  many.temperature_k = 70.0;
  Scenario& symmetric = add("7 K-components, tau 3, S/N 30", k_ladder, 30.0);
  symmetric.is_methyl_cyanide = true;
  symmetric.temperature_k = 70.0;
  symmetric.optical_depth = 3.0;
  add("8 lines, tau 1, S/N 10", ladder(8), 10.0).optical_depth = 1.0;
  add("8 lines, tau 3, S/N 20", ladder(8), 20.0).optical_depth = 3.0;
  add("8 lines, tau 10, S/N 20", ladder(8), 20.0).optical_depth = 10.0;
  Scenario& limits = add("12 lines, a third limits, S/N 10", ladder(12), 10.0);
  limits.faint_share = 1.0 / 3.0;
  limits.limit_sigma = 3.0;
  Scenario& calibration = add("12 lines, 10 % shared calibration, S/N 20", ladder(12), 20.0);
  calibration.calibration_error = 0.1;
  calibration.optical_depth = 0.5;
  Scenario& blends = add("10 lines, 3 blends, tau 2, S/N 20", ladder(10), 20.0);
  for (const std::size_t i : {2U, 5U, 8U}) blends.lines[i].offset_km_s = 2.0;
  const int data[] = {0, 1, 1, 2, 3, 3, 4, 5, 5, 6};
  for (std::size_t i = 0; i < 10; ++i) blends.lines[i].datum = data[i];
  blends.optical_depth = 2.0;
  Scenario& background = add("8 lines, background 12 K, S/N 15", ladder(8), 15.0);
  background.background_k = 12.0;
  background.optical_depth = 0.5;
  Scenario& two = add("14 lines, two components, S/N 30", ladder(14), 30.0);
  two.temperature_k = 20.0;
  two.warm_temperature_k = 120.0;
  two.warm_column_share = 0.3;
  two.targets = {{"T cold", 1}, {"N cold", 0}, {"T warm", 4}, {"N warm", 3}};
  Scenario& size = add("10 lines, source size free, tau 2, S/N 30", ladder(10), 30.0);
  size.size_arcsec = 8.0;
  size.optical_depth = 2.0;
  for (std::size_t i = 0; i < size.lines.size(); ++i)
    size.lines[i].beam_fwhm_arcsec = i < 5 ? 28.0 / (1.0 + static_cast<double>(i)) : 12.0;
  size.targets.push_back({"size", 2});
  Scenario& all_at_once = add("12 lines, tau 2, a third limits, 10 % calibration", ladder(12), 10.0);
  all_at_once.faint_share = 1.0 / 3.0;
  all_at_once.limit_sigma = 3.0;
  all_at_once.calibration_error = 0.1;
  all_at_once.optical_depth = 2.0;
  return all;
}

/// Random numbers that do not hang on the standard library.
class Draws {
 public:
  Draws(std::uint64_t seed, std::uint64_t scenario, std::uint64_t source) {
    std::seed_seq seeds{static_cast<std::uint32_t>(seed), static_cast<std::uint32_t>(scenario),
                        static_cast<std::uint32_t>(source)};
    engine_.seed(seeds);
  }
  double uniform() { return (static_cast<double>(engine_() >> 11) + 0.5) * 0x1p-53; }
  double between(double low, double high) { return low + (high - low) * uniform(); }
  double normal() { return std::sqrt(-2.0 * std::log(uniform())) * std::cos(2.0 * M_PI * uniform()); }

 private:
  std::mt19937_64 engine_;
};

inline Eigen::VectorXd draw_truth(const Scenario& scenario, const ForwardModel& model, Draws& draws) {
  const StateLayout& layout = model.layout();
  Eigen::VectorXd truth(layout.size());
  const double ln_size = scenario.size_arcsec > 0.0
                             ? std::log(scenario.size_arcsec) + draws.between(-0.2, 0.2)
                             : std::numeric_limits<double>::infinity();
  const double t = scenario.temperature_k * std::exp(draws.between(-0.25, 0.25));
  const double depth = scenario.optical_depth * std::exp(draws.between(-0.25, 0.25));
  for (int c = 0; c < layout.components; ++c) {
    truth[layout.ln_size(c)] = ln_size;
    truth[layout.ln_temperature(c)] = std::log(t);
    truth[layout.ln_column(c)] = 25.0;
  }
  truth[layout.background()] = scenario.background_k;
  double largest = 0.0;
  for (const auto& line : model.predictions(truth, 0)) largest = std::max(largest, line.optical_depth);
  truth[layout.ln_column(0)] += std::log(depth / largest);
  if (layout.components == 2) {
    truth[layout.ln_temperature(1)] = std::log(scenario.warm_temperature_k) + draws.between(-0.25, 0.25);
    truth[layout.ln_column(1)] =
        truth[layout.ln_column(0)] + std::log(scenario.warm_column_share) + draws.between(-0.25, 0.25);
  }
  return truth;
}

inline std::vector<StateParameter> parameters_of(const Scenario& scenario, const StateLayout& layout,
                                                 const Eigen::VectorXd& truth) {
  std::vector<StateParameter> parameters(static_cast<std::size_t>(layout.size()));
  for (std::size_t i = 0; i < parameters.size(); ++i)
    parameters[i].value = truth[static_cast<Eigen::Index>(i)];
  const auto set_free = [&](int entry, double lower, double upper) {
    auto& parameter = parameters[static_cast<std::size_t>(entry)];
    parameter = {};
    parameter.free = true;
    parameter.lower = lower;
    parameter.upper = upper;
    parameter.value = 0.5 * (lower + upper);  // the estimator is told nothing of the truth
  };
  for (int c = 0; c < layout.components; ++c) {
    set_free(layout.ln_column(c), std::log(1e8), std::log(1e22));
    set_free(layout.ln_temperature(c), std::log(std::max(3.0, 1.02 * scenario.background_k)),
             std::log(1000.0));
  }
  if (scenario.size_arcsec > 0.0) set_free(layout.ln_size(0), std::log(0.5), std::log(200.0));
  return parameters;
}

inline Source simulate(const Scenario& scenario, const ForwardModel& model, Draws draws) {
  Source source;
  source.truth = draw_truth(scenario, model, draws);
  const Eigen::VectorXd exact = simulated::intensities(model, source.truth);
  std::vector<double> sorted(exact.begin(), exact.end());
  std::sort(sorted.begin(), sorted.end());
  const auto faint =
      static_cast<std::size_t>(std::lround(scenario.faint_share * static_cast<double>(sorted.size())));
  std::vector<double> factor(static_cast<std::size_t>(scenario.receivers), 1.0);
  for (double& f : factor) f = std::exp(scenario.calibration_error * draws.normal());
  for (Eigen::Index i = 0; i < exact.size(); ++i) {
    Measurement datum;
    const bool is_faint = faint > 0 && exact[i] <= sorted[faint - 1];
    datum.sigma_k_km_s = std::abs(exact[i]) / (is_faint ? 1.0 : scenario.signal_to_noise);
    const auto receiver = static_cast<std::size_t>(i * scenario.receivers / exact.size());
    datum.intensity_k_km_s = factor[receiver] * exact[i] + datum.sigma_k_km_s * draws.normal();
    if (scenario.calibration_error > 0.0) {
      datum.calibration_error = scenario.calibration_error;
      datum.calibration_group = static_cast<int>(receiver);
    }
    if (datum.intensity_k_km_s < scenario.limit_sigma * datum.sigma_k_km_s) {
      datum.is_limit = true;
      datum.intensity_k_km_s = scenario.limit_sigma * datum.sigma_k_km_s;
    }
    source.problem.data.push_back(datum);
  }
  source.problem.parameters = parameters_of(scenario, model.layout(), source.truth);
  return source;
}

/// The points of the rotation diagram: what has a logarithm, is no limit and no blend.
inline DiagramData diagram_of(const Scenario& scenario, const Source& source) {
  std::vector<std::size_t> used;
  for (std::size_t i = 0; i < scenario.lines.size(); ++i) {
    const auto datum = static_cast<std::size_t>(scenario.lines[i].datum);
    const Measurement& measured = source.problem.data[datum];
    const auto members = std::count_if(scenario.lines.begin(), scenario.lines.end(), [&](const auto& line) {
      return line.datum == scenario.lines[i].datum;
    });
    if (members == 1 && !measured.is_limit && measured.intensity_k_km_s > 0.0) used.push_back(i);
  }
  const auto size = static_cast<Eigen::Index>(used.size());
  DiagramData data{Eigen::VectorXd(size), Eigen::VectorXd(size), Eigen::VectorXd(size),
                   Eigen::MatrixXd::Zero(size, size), scenario.background_k};
  for (Eigen::Index i = 0; i < size; ++i) {
    const ModelLine& line = scenario.lines[used[static_cast<std::size_t>(i)]];
    const Measurement& a = source.problem.data[static_cast<std::size_t>(line.datum)];
    data.upper_energy_k[i] = line.constants.upper_energy_k;
    data.frequency_hz[i] = line.constants.frequency_hz;
    data.ln_nu_over_gu[i] =
        std::log(a.intensity_k_km_s /
                 (intensity_per_upper_column_k_km_s_cm2(line.constants) * line.constants.upper_degeneracy));
    for (Eigen::Index j = 0; j < size; ++j) {
      const Measurement& b =
          source.problem
              .data[static_cast<std::size_t>(scenario.lines[used[static_cast<std::size_t>(j)]].datum)];
      if (a.calibration_group >= 0 && a.calibration_group == b.calibration_group) {
        data.covariance(i, j) += a.calibration_error * b.calibration_error;
      }
    }
    data.covariance(i, i) += std::pow(a.sigma_k_km_s / a.intensity_k_km_s, 2);
  }
  return data;
}

}  // namespace trotline::coverage
