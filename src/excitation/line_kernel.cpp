#include "line_kernel.hpp"

#include <cmath>
#include <limits>

#include "curve_of_growth_kernel.hpp"
#include "vector_math.hpp"

namespace trotline::internal {
namespace {

/// Tells the compiler that no loop has a remainder.
Eigen::Index whole_vectors(Eigen::Index lines) { return lines / kVectorLines * kVectorLines; }

TROTLINE_VECTORISED void area_loop(Eigen::Index n, double inverse_t, const double* __restrict strength,
                                   const double* __restrict population, const double* __restrict energy,
                                   const double* __restrict photon, double* __restrict area,
                                   double* __restrict expm1) {
  for (Eigen::Index i = 0; i < n; ++i) {
    area[i] = vector_exp(strength[i] + population[i] - energy[i] * inverse_t);
    expm1[i] = vector_expm1(photon[i] * inverse_t);
  }
}

TROTLINE_VECTORISED void depth_loop(Eigen::Index n, const double* __restrict area,
                                    const double* __restrict expm1, const double* __restrict per_area,
                                    double* __restrict tau) {
  for (Eigen::Index i = 0; i < n; ++i) {
    const double depth = area[i] * expm1[i] * per_area[i];
    tau[i] = depth < kMostOpticalDepth ? depth : kMostOpticalDepth;
  }
}

TROTLINE_VECTORISED void growth_loop(Eigen::Index n, const double* __restrict tau, double* __restrict value,
                                     double* __restrict slope) {
  for (Eigen::Index i = 0; i < n; ++i) {
    const Saturation saturation = gaussian_saturation(tau[i]);
    value[i] = saturation.value;
    slope[i] = saturation.slope;
  }
}

/// H = (1 - exp(-tau))/tau. Below 1e-3 its slope, a difference of near numbers, comes from the series.
void line_centre_loop(Eigen::Index n, const double* tau, double* value, double* slope) {
  for (Eigen::Index i = 0; i < n; ++i) {
    const OpacityCorrection correction = line_centre_correction(tau[i]);
    value[i] = 1.0 / correction.factor;
    slope[i] = tau[i] > 0.0 ? -correction.dln_factor_dln_tau * value[i] / tau[i] : -0.5;
  }
}

TROTLINE_VECTORISED void intensity_loop(Eigen::Index n, const double* __restrict area,
                                        const double* __restrict expm1, const double* __restrict saturation,
                                        const double* __restrict background, const double* __restrict filling,
                                        double* __restrict intensity) {
  for (Eigen::Index i = 0; i < n; ++i) {
    intensity[i] = filling[i] * area[i] * saturation[i] * (1.0 - background[i] * expm1[i]);
  }
}

TROTLINE_VECTORISED void background_loop(Eigen::Index n, double inverse_t, const double* __restrict photon,
                                         const double* __restrict continuum, double* __restrict background,
                                         double* __restrict slope) {
  for (Eigen::Index i = 0; i < n; ++i) {
    const double x = photon[i] * inverse_t;
    const double expm1 = vector_expm1(x);
    background[i] = 1.0 / expm1 + continuum[i] / photon[i];
    slope[i] = x * inverse_t * (expm1 + 1.0) / (expm1 * expm1);
  }
}

struct SlopeInput {
  const double* energy;
  const double* photon;
  const double* mean_energy;
  const double* area;
  const double* expm1;
  const double* tau;
  const double* saturation;
  const double* saturation_slope;
  const double* background;
  const double* background_slope;
  const double* filling;
  const double* filling_slope;
};

TROTLINE_VECTORISED void slope_loop(Eigen::Index n, double inverse_t, const SlopeInput& in,
                                    double* __restrict intensity, double* __restrict by_column,
                                    double* __restrict by_temperature, double* __restrict by_size,
                                    double* __restrict by_background) {
  const double* __restrict energy = in.energy;
  const double* __restrict photon = in.photon;
  const double* __restrict mean_energy = in.mean_energy;
  const double* __restrict area = in.area;
  const double* __restrict expm1 = in.expm1;
  const double* __restrict tau = in.tau;
  const double* __restrict saturation = in.saturation;
  const double* __restrict saturation_slope = in.saturation_slope;
  const double* __restrict background = in.background;
  const double* __restrict background_slope = in.background_slope;
  const double* __restrict filling = in.filling;
  const double* __restrict filling_slope = in.filling_slope;
  for (Eigen::Index i = 0; i < n; ++i) {
    const double full = filling[i] * area[i] * saturation[i];
    const double shade = background[i] * expm1[i];
    const double w = full * (1.0 - shade);
    const double growth = 1.0 + tau[i] * saturation_slope[i] / saturation[i];  // d ln(area H)/d ln area
    const double x = photon[i] * inverse_t;
    const double planck_slope = x + x / expm1[i];                      // d ln J/d ln T
    const double area_slope = energy[i] * inverse_t - mean_energy[i];  // d ln area/d ln T
    intensity[i] = w;
    by_column[i] = w * growth;
    by_temperature[i] =
        w * (area_slope + (growth - 1.0) * (area_slope - planck_slope)) + full * shade * planck_slope;
    by_size[i] = w * filling_slope[i];
    by_background[i] = -full * expm1[i] * background_slope[i];
  }
}

}  // namespace

LineArrays::LineArrays(Eigen::Index padded_lines)
    // What pads the arrays is a line that harms no calculation: nothing in its upper level, J = 1
    // K/(e^(1/T)-1).
    : ln_strength(Eigen::ArrayXd::Constant(padded_lines, -700.0)),
      energy_k(Eigen::ArrayXd::Zero(padded_lines)),
      photon_k(Eigen::ArrayXd::Ones(padded_lines)),
      depth_per_area(Eigen::ArrayXd::Zero(padded_lines)),
      given_filling(Eigen::ArrayXd::Ones(padded_lines)),
      beam_squared(Eigen::ArrayXd::Zero(padded_lines)),
      continuum_k(Eigen::ArrayXd::Zero(padded_lines)) {}

void compute_areas(const LineBatch& batch) {
  area_loop(whole_vectors(batch.lines), batch.inverse_temperature_per_k, batch.constants->ln_strength.data(),
            batch.column(kPopulation), batch.constants->energy_k.data(), batch.constants->photon_k.data(),
            batch.column(kArea), batch.column(kExpm1));
}

void compute_saturation(const LineBatch& batch, Opacity opacity) {
  const Eigen::Index n = whole_vectors(batch.lines);
  double* tau = batch.column(kTau);
  double* value = batch.column(kSaturation);
  double* slope = batch.column(kSaturationSlope);
  depth_loop(n, batch.column(kArea), batch.column(kExpm1), batch.constants->depth_per_area.data(), tau);
  switch (opacity) {
    case Opacity::curve_of_growth:
      growth_loop(n, tau, value, slope);
      break;
    case Opacity::line_centre:
      line_centre_loop(n, tau, value, slope);
      break;
    case Opacity::thin:
      std::fill(value, value + n, 1.0);
      std::fill(slope, slope + n, 0.0);
      break;
  }
}

void compute_intensities(const LineBatch& batch) {
  intensity_loop(whole_vectors(batch.lines), batch.column(kArea), batch.column(kExpm1),
                 batch.column(kSaturation), batch.column(kBackground), batch.filling, batch.column(kWork));
}

void compute_slopes(const LineBatch& batch) {
  const SlopeInput in{batch.constants->energy_k.data(),
                      batch.constants->photon_k.data(),
                      batch.column(kMeanEnergy),
                      batch.column(kArea),
                      batch.column(kExpm1),
                      batch.column(kTau),
                      batch.column(kSaturation),
                      batch.column(kSaturationSlope),
                      batch.column(kBackground),
                      batch.column(kBackgroundSlope),
                      batch.filling,
                      batch.filling_slope};
  slope_loop(whole_vectors(batch.lines), batch.inverse_temperature_per_k, in, batch.column(kWork),
             batch.column(kWork + 1), batch.column(kWork + 2), batch.column(kWork + 3),
             batch.column(kWork + 4));
}

void compute_background(const LineBatch& batch, double background_k) {
  const Eigen::Index n = whole_vectors(batch.lines);
  if (background_k > 0.0) {
    background_loop(n, 1.0 / background_k, batch.constants->photon_k.data(),
                    batch.constants->continuum_k.data(), batch.column(kBackground),
                    batch.column(kBackgroundSlope));
    return;
  }
  Eigen::Map<Eigen::ArrayXd>(batch.column(kBackground), n) =
      batch.constants->continuum_k / batch.constants->photon_k;
  Eigen::Map<Eigen::ArrayXd>(batch.column(kBackgroundSlope), n).setZero();
}

}  // namespace trotline::internal
