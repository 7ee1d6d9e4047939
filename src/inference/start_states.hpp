// Where the descents of a likelihood start.
#pragma once

#include <vector>

#include <trotline/inference/intensity_likelihood.hpp>

namespace trotline {

/// Starts that a good minimum is downhill of: temperatures over the whole of their bounds, source sizes
/// likewise, and column densities from thin to opaque, each brought near to the data at its temperature.
///
/// The likelihood of opaque lines has a false minimum (T low, N huge), so thin starts alone do not do, nor
/// does one guess.
/// @param most  how many starts at the most; the likeliest, no two alike, are kept
[[nodiscard]] std::vector<Eigen::VectorXd> start_states(const IntensityLikelihood& likelihood,
                                                        LikelihoodWorkspace& workspace, int most);

}  // namespace trotline
