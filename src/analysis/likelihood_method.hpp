#pragma once

#include <memory>
#include <optional>
#include <vector>

#include <trotline/analysis/result.hpp>
#include <trotline/analysis/run_options.hpp>
#include <trotline/inference/likelihood_fit.hpp>
#include <trotline/inference/posterior.hpp>
#include <trotline/species/species.hpp>

#include "model_setup.hpp"
#include "prepared_line.hpp"

namespace trotline {

/// A model with its likelihood and best fit; the likelihood looks at the model of the setup.
struct FittedModel {
  ModelSetup setup;
  std::unique_ptr<IntensityLikelihood> likelihood;
  LikelihoodFit fit;
  std::optional<Posterior> posterior = {};  ///< where the intervals are to come from it
};

/// The methods `likelihood` and `robust`: the most likely state of the source, given the intensities
/// themselves.
///
/// Limits, blends, intensities at or below zero and shared calibration factors are data like others. Sets the
/// status, the estimates with their intervals, components, parameters with their covariance, and what the
/// model predicts for every line. Where the lines hold no answer, the status says which, and ranges, limits
/// or a table of N against T say what they do hold.
/// @return the fit, for checks; its likelihood is empty where nothing was fitted
/// @throws InputError as set_up_model and model_kind
[[nodiscard]] FittedModel fit_by_likelihood(Result& result, std::vector<PreparedLine>& lines,
                                            const Species& species, const RunOptions& options);

}  // namespace trotline
