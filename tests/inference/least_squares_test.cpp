#include <trotline/inference/least_squares.hpp>

#include <gtest/gtest.h>

#include <filesystem>
#include <fstream>
#include <sstream>

#include <nlohmann/json.hpp>

#include <trotline/base/errors.hpp>

#include "support/shared_folder.hpp"

namespace trotline {
namespace {

namespace fs = std::filesystem;

void expect_relative(double actual, double expected, double tolerance) {
  EXPECT_LE(std::abs(actual - expected), tolerance * std::abs(expected)) << actual << " against " << expected;
}

/// The Norris data: calibration of ozone monitors. y and x from line 61 on, as the file's header says.
void read_norris(const fs::path& path, Eigen::VectorXd& x, Eigen::VectorXd& y) {
  std::ifstream file(path);
  std::string line;
  std::vector<std::pair<double, double>> points;
  for (int number = 1; std::getline(file, line); ++number) {
    std::istringstream fields(line);
    double first = 0.0;
    double second = 0.0;
    if (number >= 61 && fields >> first >> second) points.emplace_back(second, first);
  }
  x.resize(static_cast<Eigen::Index>(points.size()));
  y.resize(x.size());
  for (Eigen::Index i = 0; i < x.size(); ++i) {
    x[i] = points[static_cast<std::size_t>(i)].first;
    y[i] = points[static_cast<std::size_t>(i)].second;
  }
}

// Certified values of NIST StRD, linear regression, data set Norris (lower level of difficulty, observed
// data; https://www.itl.nist.gov/div898/strd/lls/data/Norris.shtml).
TEST(LeastSquares, ReproducesCertifiedNorrisTo1e9) {
  const fs::path path = testing_support::reference_file("nist_strd/Norris.dat");
  if (!fs::exists(path)) GTEST_SKIP() << "the certified data set is not here";
  Eigen::VectorXd x;
  Eigen::VectorXd y;
  read_norris(path, x, y);
  ASSERT_EQ(x.size(), 36);
  const auto fit = weighted_least_squares(straight_line_design(x), y, Eigen::VectorXd::Ones(36));
  const double variance = fit.chi2 / fit.dof;
  expect_relative(fit.coefficients[0], -0.262323073774029, 1e-9);
  expect_relative(fit.coefficients[1], 1.00211681802045, 1e-9);
  expect_relative(std::sqrt(variance * fit.covariance(0, 0)), 0.232818234301152, 1e-9);
  expect_relative(std::sqrt(variance * fit.covariance(1, 1)), 0.429796848199937e-03, 1e-9);
  expect_relative(std::sqrt(variance), 0.884796396144373, 1e-9);
  EXPECT_EQ(fit.dof, 34);
}

nlohmann::json reference() {
  std::ifstream file(fs::path(TROTLINE_SOURCE_DIR) / "tests" / "reference" / "least_squares.json");
  return nlohmann::json::parse(file);
}

Eigen::VectorXd vector_of(const nlohmann::json& numbers) {
  const auto values = numbers.get<std::vector<double>>();
  return Eigen::Map<const Eigen::VectorXd>(values.data(), static_cast<Eigen::Index>(values.size()));
}

Eigen::MatrixXd matrix_of(const nlohmann::json& rows) {
  Eigen::MatrixXd matrix(rows.size(), rows.at(0).size());
  for (Eigen::Index i = 0; i < matrix.rows(); ++i) {
    matrix.row(i) = vector_of(rows.at(static_cast<std::size_t>(i))).transpose();
  }
  return matrix;
}

// tests/reference/least_squares.py: statsmodels WLS and GLS; values stored beside it.
TEST(LeastSquares, AgreesWithStatsmodelsWeightedAndGeneralised) {
  int cases = 0;
  const nlohmann::json document = reference();
  for (const auto& entry : document.at("cases")) {
    const Eigen::MatrixXd design = straight_line_design(vector_of(entry.at("x")));
    const Eigen::VectorXd y = vector_of(entry.at("y"));
    const auto fit = entry.at("kind") == "weighted"
                         ? weighted_least_squares(design, y, vector_of(entry.at("sigma")))
                         : generalised_least_squares(design, y, matrix_of(entry.at("covariance")));
    const Eigen::VectorXd coefficients = vector_of(entry.at("coefficients"));
    const Eigen::MatrixXd covariance = matrix_of(entry.at("coefficient_covariance"));
    for (Eigen::Index i = 0; i < 2; ++i) {
      expect_relative(fit.coefficients[i], coefficients[i], 1e-9);
      for (Eigen::Index j = 0; j < 2; ++j) expect_relative(fit.covariance(i, j), covariance(i, j), 1e-9);
    }
    expect_relative(fit.chi2, entry.at("chi2").get<double>(), 1e-9);
    ++cases;
  }
  EXPECT_EQ(cases, 40);
}

TEST(LeastSquares, GeneralisedWithDiagonalCovarianceIsWeighted) {
  const Eigen::VectorXd x = Eigen::VectorXd::LinSpaced(7, 5.0, 300.0);
  const Eigen::VectorXd y = (x.array().sin() * 0.1 - 0.02 * x.array()).matrix();
  const Eigen::VectorXd sigma = Eigen::VectorXd::LinSpaced(7, 0.03, 0.2);
  const auto weighted = weighted_least_squares(straight_line_design(x), y, sigma);
  const auto general =
      generalised_least_squares(straight_line_design(x), y, sigma.array().square().matrix().asDiagonal());
  EXPECT_TRUE(weighted.coefficients.isApprox(general.coefficients, 1e-13));
  EXPECT_TRUE(weighted.covariance.isApprox(general.covariance, 1e-12));
}

TEST(LeastSquares, ReportsRankLossForTwoEqualAbscissas) {
  const Eigen::VectorXd x = Eigen::VectorXd::Constant(3, 16.6);
  const auto fit = weighted_least_squares(straight_line_design(x), Eigen::Vector3d(1, 2, 3), Eigen::Vector3d::Ones());
  EXPECT_FALSE(fit.usable);
  EXPECT_EQ(fit.rank, 1);
  EXPECT_TRUE(std::isnan(fit.coefficients[0]));
}

TEST(LeastSquares, RefusesWhatItCannotWeigh) {
  const Eigen::MatrixXd design = straight_line_design(Eigen::Vector3d(1, 2, 3));
  const Eigen::Vector3d y(1, 2, 4);
  EXPECT_THROW((void)weighted_least_squares(design, y, Eigen::Vector3d(1, 0, 1)), DomainError);
  EXPECT_THROW((void)weighted_least_squares(design, Eigen::Vector2d(1, 2), Eigen::Vector3d::Ones()), DomainError);
  EXPECT_THROW((void)weighted_least_squares(design, Eigen::Vector3d(1, NAN, 2), Eigen::Vector3d::Ones()), DomainError);
  EXPECT_THROW((void)generalised_least_squares(design, y, -Eigen::Matrix3d::Identity()), DomainError);
  EXPECT_THROW((void)generalised_least_squares(design, y, Eigen::Matrix2d::Identity()), DomainError);
}

// Abramowitz & Stegun 1972, Table 26.8: chi2 exceeded with probability 0.05.
TEST(ChiSquared, SurvivalAgreesWithTabulatedQuantiles) {
  EXPECT_NEAR(chi2_survival(3.84146, 1), 0.05, 5e-7);
  EXPECT_NEAR(chi2_survival(11.0705, 5), 0.05, 1e-6);
  EXPECT_NEAR(chi2_survival(18.3070, 10), 0.05, 1e-6);
  EXPECT_TRUE(std::isnan(chi2_survival(1.0, 0)));
}

}  // namespace
}  // namespace trotline
