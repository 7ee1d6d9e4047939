// Sources made up for the tests of inference: lines of a rotor much like CO, and their likelihood.
#pragma once

#include <random>

#include <trotline/inference/intensity_likelihood.hpp>

#include "excitation/plain_model.hpp"

namespace trotline::simulated {

inline std::vector<std::shared_ptr<const TabulatedPartition>> partitions(int isomers = 1) {
  const auto make = [](int count) {
    std::vector<std::shared_ptr<const TabulatedPartition>> tables;
    for (int i = 0; i < count; ++i) {
      tables.push_back(std::make_shared<TabulatedPartition>(plain::RotorPartition(count, i), 2.0, 2500.0));
    }
    return tables;
  };
  static const auto one = make(1);
  static const auto two = make(2);
  return isomers == 1 ? one : two;
}

/// J = 1-0 ... count-(count-1).
inline std::vector<ModelLine> ladder(int count, double fwhm_km_s = 3.0) {
  std::vector<ModelLine> lines;
  for (int j = 1; j <= count; ++j) {
    ModelLine line;
    line.constants = {2.0 * plain::kRotorK / constants::kKelvinPerHz * j, plain::kRotorK * j * (j + 1),
                      2.0 * j + 1, 7.2e-8 * 3.0 * std::pow(j, 4) / (2 * j + 1)};
    line.fwhm_km_s = fwhm_km_s;
    line.datum = j - 1;
    lines.push_back(line);
  }
  return lines;
}

/// A state of one component and one isomer. @param size_arcsec  0: fills every beam
inline Eigen::VectorXd state(double ln_column, double temperature_k, double size_arcsec = 0.0,
                             double background_k = 2.7255) {
  Eigen::VectorXd result(4);
  result << ln_column, std::log(temperature_k),
      size_arcsec > 0.0 ? std::log(size_arcsec) : std::numeric_limits<double>::infinity(), background_k;
  return result;
}

/// ln N at which the most opaque line of component 0 has this optical depth.
inline double ln_column_for(const ForwardModel& model, double tau0, double temperature_k) {
  double ln_column = 25.0;
  double largest = 0.0;
  for (const auto& line : model.predictions(state(ln_column, temperature_k), 0)) {
    largest = std::max(largest, line.optical_depth);
  }
  return ln_column + std::log(tau0 / largest);
}

/// N and T free between wide bounds, the rest fixed at `truth`.
inline std::vector<StateParameter> column_and_temperature_free(const Eigen::VectorXd& truth) {
  std::vector<StateParameter> parameters(static_cast<std::size_t>(truth.size()));
  for (std::size_t i = 0; i < parameters.size(); ++i)
    parameters[i].value = truth[static_cast<Eigen::Index>(i)];
  parameters[0].free = parameters[1].free = true;
  parameters[0].lower = 11.0;
  parameters[0].upper = 60.0;
  parameters[1].lower = std::log(2.8);
  parameters[1].upper = std::log(2000.0);
  return parameters;
}

inline Eigen::VectorXd intensities(const ForwardModel& model, const Eigen::VectorXd& state) {
  ModelWorkspace workspace = model.workspace();
  model.evaluate(state, workspace);
  return workspace.intensity_k_km_s.matrix();
}

/// Noise-free data with a relative error, or an absolute one where that is larger.
inline std::vector<Measurement> exact_data(const Eigen::VectorXd& intensity, double relative,
                                           double absolute = 0.0) {
  std::vector<Measurement> data;
  for (const double w : intensity) {
    Measurement datum;
    datum.intensity_k_km_s = w;
    datum.sigma_k_km_s = std::max(std::abs(w) * relative, absolute);
    data.push_back(datum);
  }
  return data;
}

}  // namespace trotline::simulated
