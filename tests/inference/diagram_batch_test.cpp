#include <gtest/gtest.h>

#include <random>

#include <trotline/base/errors.hpp>
#include <trotline/inference/diagram_batch.hpp>
#include <trotline/inference/thermal_line.hpp>

namespace trotline {
namespace {

DiagramBatch random_batch(Eigen::Index positions, Eigen::Index lines) {
  std::mt19937_64 engine(20260605);
  std::uniform_real_distribution<double> uniform;
  std::normal_distribution<double> normal;
  DiagramBatch batch{Eigen::VectorXd(lines), Eigen::ArrayXXd(positions, lines),
                     Eigen::ArrayXXd(positions, lines)};
  for (Eigen::Index k = 0; k < lines; ++k)
    batch.upper_energy_k[k] = 2.766 * static_cast<double>((k + 1) * (k + 2));
  for (Eigen::Index i = 0; i < positions; ++i) {
    const double beta = 1.0 / (8.0 + 200.0 * uniform(engine));
    for (Eigen::Index k = 0; k < lines; ++k) {
      batch.sigma(i, k) = 0.01 + 0.3 * uniform(engine);
      batch.ln_nu_over_gu(i, k) = 28.0 - beta * batch.upper_energy_k[k] + batch.sigma(i, k) * normal(engine);
    }
  }
  return batch;
}

TEST(DiagramBatch, AgreesWithTheFitOfOneDiagram) {
  const DiagramBatch batch = random_batch(333, 12);
  const DiagramBatchFit fit = fit_thermal_lines(batch);
  for (Eigen::Index i = 0; i < 333; ++i) {
    DiagramData data;
    data.upper_energy_k = batch.upper_energy_k;
    data.frequency_hz = Eigen::VectorXd::Constant(12, 1e11);
    data.ln_nu_over_gu = batch.ln_nu_over_gu.row(i).transpose();
    data.covariance = batch.sigma.row(i).square().matrix().asDiagonal();
    const ThermalLineFit one = fit_thermal_line(data);
    constexpr double kBound = 1e-11;  // stated in the header
    EXPECT_NEAR(fit.intercept[i], one.intercept, kBound * std::abs(one.intercept));
    EXPECT_NEAR(fit.inverse_temperature_per_k[i], one.inverse_temperature_per_k,
                kBound * std::sqrt(one.inverse_temperature_variance) +
                    kBound * std::abs(one.inverse_temperature_per_k));
    EXPECT_NEAR(fit.intercept_variance[i], one.intercept_variance, kBound * one.intercept_variance);
    EXPECT_NEAR(fit.inverse_temperature_variance[i], one.inverse_temperature_variance,
                kBound * one.inverse_temperature_variance);
    EXPECT_NEAR(fit.covariance[i], one.covariance, kBound * std::abs(one.covariance));
    EXPECT_NEAR(fit.chi2[i], one.chi2, 1e-9 * one.chi2);
  }
}

TEST(DiagramBatch, SameBitsWhateverTheThreadsAndTheNeighbours) {
  const DiagramBatch batch = random_batch(1001, 7);
  const DiagramBatchFit one = fit_thermal_lines(batch);
  for (const int threads : {2, 3, 16, 2000}) {
    const DiagramBatchFit other = fit_thermal_lines(batch, threads);
    EXPECT_TRUE((one.intercept == other.intercept).all());
    EXPECT_TRUE((one.inverse_temperature_variance == other.inverse_temperature_variance).all());
    EXPECT_TRUE((one.chi2 == other.chi2).all());
  }
  const DiagramBatch tail{batch.upper_energy_k, batch.ln_nu_over_gu.bottomRows(5), batch.sigma.bottomRows(5)};
  EXPECT_TRUE((fit_thermal_lines(tail).intercept == one.intercept.tail(5)).all());
}

TEST(DiagramBatch, LeavesOutLinesWithoutWeight) {
  DiagramBatch batch = random_batch(9, 6);
  batch.sigma.col(5).setConstant(std::numeric_limits<double>::infinity());
  const DiagramBatchFit fit = fit_thermal_lines(batch);
  const DiagramBatch fewer{batch.upper_energy_k.head(5), batch.ln_nu_over_gu.leftCols(5),
                           batch.sigma.leftCols(5)};
  const DiagramBatchFit expected = fit_thermal_lines(fewer);
  EXPECT_TRUE(fit.intercept.isApprox(expected.intercept, 1e-12));
  EXPECT_TRUE(fit.chi2.isApprox(expected.chi2, 1e-9));
}

TEST(DiagramBatch, RefusesShapesThatDisagree) {
  DiagramBatch batch = random_batch(9, 6);
  batch.sigma.conservativeResize(9, 5);
  EXPECT_THROW((void)fit_thermal_lines(batch), DomainError);
  EXPECT_THROW((void)fit_thermal_lines(DiagramBatch{}), DomainError);
  EXPECT_EQ(fit_thermal_lines(random_batch(0, 6)).chi2.size(), 0);
}

}  // namespace
}  // namespace trotline
