// The loops over all lines of the forward model. Arrays are padded to whole vectors; nothing branches.
//
// Symbols, per line: N_u/g = exp(population - E/T); area = W of a thin line that fills its beam without
// background; em1 = exp(T0/T) - 1 with T0 = h nu/k, so J = T0/em1; H = saturation of the line, 1/C.
#pragma once

#include <Eigen/Dense>

#include <trotline/excitation/curve_of_growth.hpp>

namespace trotline::internal {

inline constexpr Eigen::Index kVectorLines = 4;

/// Constants of the lines, one array for each.
struct LineArrays {
  explicit LineArrays(Eigen::Index padded_lines);

  Eigen::ArrayXd ln_strength;     ///< ln(g_u W/N_u) of a thin line
  Eigen::ArrayXd energy_k;        ///< E_u/k
  Eigen::ArrayXd photon_k;        ///< T0
  Eigen::ArrayXd depth_per_area;  ///< tau0 / (area em1)
  Eigen::ArrayXd given_filling;
  Eigen::ArrayXd beam_squared;  ///< beam FWHM^2 [arcsec^2]
  Eigen::ArrayXd continuum_k;
};

/// Columns of a workspace's scratch.
enum Scratch : Eigen::Index {
  kPopulation,  ///< ln(N/Q) of the line's isomer
  kMeanEnergy,  ///< <E>/kT of the line's isomer
  kArea,
  kExpm1,
  kTau,
  kSaturation,       ///< H
  kSaturationSlope,  ///< dH/dtau0
  kBackground,       ///< [J(T_bg) + continuum] / T0
  kBackgroundSlope,  ///< dJ(T_bg)/dT_bg / T0
  kWork,             ///< five columns: W and its slopes by ln N, ln T, ln size, T_bg
  kScratchColumns = kWork + 5
};

struct LineBatch {
  Eigen::Index lines;  ///< a multiple of kVectorLines
  const LineArrays* constants;
  Eigen::ArrayXXd* scratch;
  double inverse_temperature_per_k;
  const double* filling;
  const double* filling_slope;

  [[nodiscard]] double* column(Eigen::Index which) const { return scratch->col(which).data(); }
};

/// kArea and kExpm1 from kPopulation.
void compute_areas(const LineBatch& batch);

/// kTau, kSaturation and kSaturationSlope from kArea and kExpm1. Optical depths above kMostOpticalDepth count
/// as that much.
void compute_saturation(const LineBatch& batch, Opacity opacity);

/// W of every line into the first work column.
void compute_intensities(const LineBatch& batch);

/// W and its four slopes into the work columns.
void compute_slopes(const LineBatch& batch);

/// kBackground and kBackgroundSlope at a background temperature of 0 or more.
void compute_background(const LineBatch& batch, double background_k);

}  // namespace trotline::internal
