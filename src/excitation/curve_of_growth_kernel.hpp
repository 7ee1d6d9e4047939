// The inner part of the curve of growth: no branch, no allocation, so that loops over lines vectorise.
#pragma once

#include <bit>
#include <cstdint>

#include "generated/curve_of_growth_table.hpp"

namespace trotline {

/// H = 1/C and dH/dtau.
struct Saturation {
  double value;
  double slope;
};

/// H(tau0) of the Gaussian curve of growth; 0 <= tau0 <= kMostOpticalDepth is the caller's business.
///
/// The exponent of t = 1 + tau0 and the two first bits of its fraction name the polynomial, the rest of
/// the fraction is its argument s in [-1, 1). Near tau0 = 0 the rounding of t costs nothing, as H is flat.
inline Saturation gaussian_saturation(double tau0) {
  constexpr int kFractionBits = 52;
  constexpr std::uint64_t kOne = std::uint64_t{1023} << kFractionBits;
  constexpr std::uint64_t kRestMask = (std::uint64_t{1} << (kFractionBits - 2)) - 1;
  const auto bits = std::bit_cast<std::uint64_t>(1.0 + tau0);
  const auto quarter = static_cast<std::int64_t>((bits - kOne) >> (kFractionBits - 2));
  const double rest = std::bit_cast<double>((bits & kRestMask) | kOne);  // in [1, 1.25)
  const double s = (rest - 1.125) * 8.0;
  // ds/dtau = 8 / 2^exponent
  const double inverse_octave = std::bit_cast<double>((std::uint64_t{2046} << kFractionBits) -
                                                      ((bits >> kFractionBits) << kFractionBits));
  double value = generated::kSaturation[generated::kSaturationDegree][quarter];
  double slope = 0.0;
#pragma GCC unroll 10
  for (int k = generated::kSaturationDegree - 1; k >= 0; --k) {
    slope = slope * s + value;
    value = value * s + generated::kSaturation[k][quarter];
  }
  return {value, slope * 8.0 * inverse_octave};
}

}  // namespace trotline
