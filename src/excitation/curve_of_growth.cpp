#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/excitation/curve_of_growth.hpp>

#include "curve_of_growth_kernel.hpp"

namespace trotline {
namespace {

void require_optical_depth(double tau0) {
  if (!(tau0 >= 0.0 && tau0 <= kMostOpticalDepth)) throw DomainError("tau0", tau0, "from 0 to 1e12");
}

}  // namespace

OpacityCorrection curve_of_growth_correction(double tau0) {
  require_optical_depth(tau0);
  const Saturation saturation = gaussian_saturation(tau0);
  return {1.0 / saturation.value, -tau0 * saturation.slope / saturation.value};
}

OpacityCorrection line_centre_correction(double tau0) {
  require_optical_depth(tau0);
  if (tau0 == 0.0) return {1.0, 0.0};
  const double absorbed = -std::expm1(-tau0);
  // 1 - tau/(e^tau - 1); for small tau the difference of near numbers is tau/2 - tau^2/12.
  const double slope = tau0 < 1e-4 ? tau0 * (0.5 - tau0 / 12.0) : 1.0 - tau0 * std::exp(-tau0) / absorbed;
  return {tau0 / absorbed, slope};
}

OpacityCorrection opacity_correction(Opacity opacity, double tau0) {
  switch (opacity) {
    case Opacity::thin:
      require_optical_depth(tau0);
      return {};
    case Opacity::line_centre:
      return line_centre_correction(tau0);
    case Opacity::curve_of_growth:
      break;
  }
  return curve_of_growth_correction(tau0);
}

}  // namespace trotline
