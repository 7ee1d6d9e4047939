#include "../../src/excitation/vector_math.hpp"

#include <gtest/gtest.h>

#include <cmath>
#include <random>

namespace trotline {
namespace {

TEST(VectorMath, ErrorBoundHoldsAgainstExtendedPrecision) {
  std::mt19937_64 engine(20260505);
  std::uniform_real_distribution<double> wide(-700.0, 700.0);
  std::uniform_real_distribution<double> decade(-14.0, 1.0);
  const long double eps = 0x1p-52L;
  double worst = 0.0;
  for (int i = 0; i < 400'000; ++i) {
    double x = wide(engine);
    if (i % 2 == 0) x = std::pow(10.0, decade(engine)) * (i % 4 == 0 ? 1.0 : -1.0);
    const long double exp = std::exp(static_cast<long double>(x));
    const long double expm1 = std::expm1(static_cast<long double>(x));
    worst = std::max(worst, static_cast<double>(std::abs((vector_exp(x) - exp) / exp) / eps));
    worst = std::max(worst, static_cast<double>(std::abs((vector_expm1(x) - expm1) / expm1) / eps));
  }
  EXPECT_LT(worst, kVectorExpUlp);
  RecordProperty("worst", std::to_string(worst));
}

TEST(VectorMath, IsExactAtZeroAndHeldBeyondItsRange) {
  EXPECT_EQ(vector_exp(0.0), 1.0);
  EXPECT_EQ(vector_expm1(0.0), 0.0);
  EXPECT_EQ(vector_exp(-1e9), vector_exp(-700.0));
  EXPECT_EQ(vector_exp(1e9), vector_exp(700.0));
}

}  // namespace
}  // namespace trotline
