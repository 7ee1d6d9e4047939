// Gaussians of one velocity and width for the lines of a group.
#pragma once

#include "region.hpp"

namespace trotline {

/// Gaussians fitted to a region, with errors.
struct FittedLines {
  std::vector<GaussianLine> lines;
  std::vector<LinearSum> areas;
  std::vector<Eigen::VectorXd> weights;  ///< of the region's data in each area
  Eigen::MatrixXd correlation;           ///< between the areas
  std::string trouble;
  Eigen::ArrayXd model;                ///< over the region, without baseline
};

[[nodiscard]] FittedLines fit_group(const MeasurementContext& context, const LineGroup& group,
                                    const Region& region);

}  // namespace trotline
