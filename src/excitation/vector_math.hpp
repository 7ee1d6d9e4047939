// exp and expm1 without branches, so that loops over lines vectorise, and with the same bits whatever the
// width of the vectors: plain additions and multiplications in a fixed order, no library call.
#pragma once

#include <bit>
#include <cstdint>

#include <trotline/base/vectorised.hpp>

namespace trotline {

/// exp(x) = scale (1 + rest) and expm1(x) = (scale - 1) + scale rest, with scale a power of two.
struct SplitExponential {
  double scale;
  double rest;
};

/// x is held to +-700: beyond, a population or a photon energy is 0 or infinite for every purpose here.
inline SplitExponential split_exponential(double x) {
  constexpr double kMost = 700.0;
  constexpr double kLog2E = 1.4426950408889634074;
  constexpr double kLn2High = 6.93147180369123816490e-01;  // the low 20 bits are 0: times k it stays exact
  constexpr double kLn2Low = 1.90821492927058770002e-10;
  constexpr double kShift = 0x1.8p52;  // adding it rounds to a whole number
  x = x < -kMost ? -kMost : x;
  x = x > kMost ? kMost : x;
  const double shifted = x * kLog2E + kShift;
  const double k = shifted - kShift;
  const double r = (x - k * kLn2High) - k * kLn2Low;  // |r| <= ln2 / 2
  // Taylor series; the term left out, r^14/14!, is below 5e-18.
  double p = 1.0 / 6227020800.0;
  p = p * r + 1.0 / 479001600.0;
  p = p * r + 1.0 / 39916800.0;
  p = p * r + 1.0 / 3628800.0;
  p = p * r + 1.0 / 362880.0;
  p = p * r + 1.0 / 40320.0;
  p = p * r + 1.0 / 5040.0;
  p = p * r + 1.0 / 720.0;
  p = p * r + 1.0 / 120.0;
  p = p * r + 1.0 / 24.0;
  p = p * r + 1.0 / 6.0;
  p = p * r + 0.5;
  p = r + r * r * p;
  const std::uint64_t exponent =
      std::bit_cast<std::uint64_t>(shifted) - std::bit_cast<std::uint64_t>(kShift) + 1023;
  return {std::bit_cast<double>(exponent << 52), p};
}

inline double vector_exp(double x) {
  const SplitExponential e = split_exponential(x);
  return e.scale + e.scale * e.rest;
}

inline double vector_expm1(double x) {
  const SplitExponential e = split_exponential(x);
  return (e.scale - 1.0) + e.scale * e.rest;
}

/// Largest relative error of vector_exp and vector_expm1 for |x| < 700, in units of 2^-52.
inline constexpr double kVectorExpUlp = 2.0;

}  // namespace trotline
