// From prepared lines and options to the forward model and its likelihood.
#pragma once

#include <memory>
#include <string>
#include <vector>

#include <trotline/analysis/run_options.hpp>
#include <trotline/excitation/forward_model.hpp>
#include <trotline/inference/intensity_likelihood.hpp>
#include <trotline/species/species.hpp>

#include "prepared_line.hpp"

namespace trotline {

/// Which model of the lines is meant; the options say the rest.
struct ModelKind {
  Opacity opacity = Opacity::curve_of_growth;
  int components = 1;
  bool isomers_apart = false;
  NoiseModel noise = NoiseModel::gaussian;
};

/// A likelihood with the way back from its data and isomers to the rows of the table.
struct ModelSetup {
  ModelKind kind;
  std::shared_ptr<const ForwardModel> model;
  std::vector<std::string> isomers;      ///< by name; one empty name where they are together
  std::vector<std::size_t> row_of_line;  ///< prepared line of every line of the model
  std::vector<std::vector<std::size_t>> rows_of_datum;
  LikelihoodProblem problem;
};

/// The kind that the options ask for. `automatic` opacity is the curve of growth where every line that is
/// fitted has a width; otherwise thin lines, which goes into the warnings.
/// @throws InputError where an opacity is asked for and a line has no width
[[nodiscard]] ModelKind model_kind(const std::vector<PreparedLine>& lines, const RunOptions& options,
                                   std::vector<std::string>& warnings);

/// Makes the model of all lines that are used.
///
/// Rows of one blend are one datum, each member at the velocity that its rest frequency gives it. Bounds: T
/// from just above the background to the end of Q (or the option `temperature_range`), N from 1e4 to 1e26
/// cm^-2, a free size from a fiftieth of the smallest beam to twenty times the largest (or
/// `source_size_range`).
/// @throws InputError where the rows of a blend differ in intensity, a limit has no error and is not above 0,
/// a
///         size is free and a line has no beam, or a given value lies outside what the model can take
[[nodiscard]] ModelSetup set_up_model(const std::vector<PreparedLine>& lines, const Species& species,
                                      const RunOptions& options, const ModelKind& kind);

/// Temperatures between which the model can be asked for.
struct TemperatureSpan {
  double lowest_k;
  double highest_k;
};
[[nodiscard]] TemperatureSpan temperature_span(const Species& species, const RunOptions& options);

}  // namespace trotline
