#pragma once

#include <string>
#include <utility>
#include <vector>

#include <trotline/analysis/result.hpp>
#include <trotline/report/axis.hpp>
#include <trotline/report/label_placement.hpp>

namespace trotline {

/// How many parameters a corner figure shows: the first ones of a result.
inline constexpr std::size_t kMostCornerParameters = 5;

/// One parameter of a corner figure in the quantity that is shown: log10 N with N in 1/cm2, T in K, size in
/// arcsec.
struct CornerParameter {
  std::string name;           ///< with its unit; may hold the name of a spin isomer, which is a user's text
  std::vector<double> draws;  ///< all finite
  double low68 = 0.0;         ///< quantiles of 15.87, 50 and 84.13 %
  double median = 0.0;
  double high68 = 0.0;
  Axis axis;  ///< holds all but about 3 draws of 1000
};

/// The name of a fitted parameter as the figure has it: "ln_temperature_k_2" is "T₂ (K)".
[[nodiscard]] std::string corner_name(const std::string& parameter);

/// The parameters that are shown, at most kMostCornerParameters. Draws of which a number is not finite are
/// left out in all of them. Empty where the result holds no draws.
[[nodiscard]] std::vector<CornerParameter> corner_parameters(const Result& result);

/// A bin of a histogram.
struct CornerBin {
  double low = 0.0;
  double high = 0.0;
  std::size_t count = 0;
};

/// Equal bins, a twentieth of the central 95 % wide. They hold every draw: what lies far outside of the axis
/// is counted in the first and last bin, which the axis does not show.
[[nodiscard]] std::vector<CornerBin> corner_histogram(const CornerParameter& parameter);

/// Cells of one step of lightness in one row, taken together.
struct CornerCells {
  int step = 1;  ///< 1 (palest) up, an entry of CornerPanel::shares
  Box box;
};

/// The density of two parameters.
struct CornerPanel {
  std::vector<CornerCells> cells;  ///< palest first
  std::vector<Segment> contour95;  ///< round the densest places that hold 95 % of the draws
  std::vector<Segment> contour68;
};

/// Share of the draws that lie where the density is as high as in a step, or higher; step 1 first.
inline constexpr double kCornerShares[] = {0.99, 0.95, 0.68, 0.38, 0.15};

/// Density by Gaussian kernels with the shape of the draws' covariance and 0.85 of Scott's width (Scott 1992,
/// Multivariate Density Estimation, ch. 6), on 100 by 100 cells over the axes. The levels are quantiles of
/// the density at the draws, so that a contour holds its share of them by construction.
[[nodiscard]] CornerPanel corner_panel(const CornerParameter& x, const CornerParameter& y);

}  // namespace trotline
