#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <unistd.h>

#include <cmath>
#include <filesystem>
#include <fstream>
#include <random>
#include <sstream>

#include <trotline/base/files.hpp>
#include <trotline/report/corner_data.hpp>
#include <trotline/report/corner_figure.hpp>
#include <trotline/report/write_outputs.hpp>

#include "report/invented_results.hpp"

namespace trotline {
namespace {

namespace fs = std::filesystem;
using namespace testing_room;
using testing::HasSubstr;
using testing::IsEmpty;
using testing::IsSubsetOf;
using testing::Not;
using testing::UnorderedElementsAre;

class CornerFolder : public testing::Test {
 protected:
  void SetUp() override {
    std::string name = (fs::temp_directory_path() / "trotline-corner-XXXXXX").string();
    ASSERT_NE(::mkdtemp(name.data()), nullptr);
    path_ = name;
  }
  void TearDown() override { fs::remove_all(path_); }
  [[nodiscard]] std::string read(const std::string& name) const { return read_file((path_ / name).string()); }
  fs::path path_;
};

/// Correlated Gaussian draws of ln N, ln T and further parameters.
Result with_draws(std::size_t parameters, std::size_t count = 2000) {
  const char* const names[] = {"ln_column_density_cm2_1", "ln_temperature_k_1", "ln_column_density_cm2_2",
                               "ln_temperature_k_2",      "background_k",       "ln_source_size_arcsec_1"};
  Result result = invented_result();
  std::mt19937_64 random(7);
  std::normal_distribution<double> normal;
  result.posterior.draws.resize(parameters);
  for (std::size_t k = 0; k < parameters; ++k)
    result.parameters.push_back({names[k], k % 2 == 0 ? 32.0 : 4.0, 0.1});
  for (std::size_t i = 0; i < count; ++i) {
    double last = 0.0;
    for (std::size_t k = 0; k < parameters; ++k) {
      last = 0.8 * last + 0.6 * normal(random);
      result.posterior.draws[k].push_back(result.parameters[k].value + 0.1 * last);
    }
  }
  return result;
}

/// Sums of the third column, one for each block.
std::vector<std::size_t> counts_of_blocks(const std::string& text) {
  std::vector<std::size_t> sums;
  std::istringstream lines(text);
  bool open = false;
  for (std::string line; std::getline(lines, line);) {
    if (line.empty()) open = false;
    if (line.empty() || line.front() == '#') continue;
    if (!open) sums.push_back(0);
    open = true;
    std::istringstream cells(line);
    double low = 0.0;
    double high = 0.0;
    std::size_t count = 0;
    cells >> low >> high >> count;
    sums.back() += count;
  }
  return sums;
}

TEST(CornerData, NamesQuantitiesWithTheirUnits) {
  EXPECT_EQ(corner_name("ln_column_density_cm2"), "log₁₀ N (cm⁻²)");
  EXPECT_EQ(corner_name("ln_column_density_cm2_ortho_2"), "log₁₀ N₂, ortho (cm⁻²)");
  EXPECT_EQ(corner_name("ln_temperature_k_1"), "T₁ (K)");
  EXPECT_EQ(corner_name("ln_source_size_arcsec"), "size (arcsec)");
  EXPECT_EQ(corner_name("background_k"), "background (K)");
}

TEST(CornerData, ShowsTheQuantityAndNotItsLogarithm) {
  Result result = invented_result();
  result.parameters = {{"ln_column_density_cm2", 0, 0}, {"ln_temperature_k", 0, 0}};
  result.posterior.draws = {{std::log(1e14), std::log(1e15), kNotKnown},
                            {std::log(20.0), std::log(40.0), 3.0}};
  const auto parameters = corner_parameters(result);
  ASSERT_EQ(parameters.size(), 2U);
  ASSERT_EQ(parameters[0].draws.size(), 2U) << "a draw with a number that is none is left out";
  EXPECT_NEAR(parameters[0].draws[0], 14.0, 1e-12);
  EXPECT_NEAR(parameters[0].draws[1], 15.0, 1e-12);
  EXPECT_NEAR(parameters[1].draws[0], 20.0, 1e-12);
  EXPECT_NEAR(parameters[1].median, 30.0, 1e-12);
}

TEST(CornerData, HistogramCountsEveryDrawFarOnesToo) {
  Result result = with_draws(2);
  result.posterior.draws[1][3] = 9.0;  // e^9 K, beside e^4
  for (const CornerParameter& parameter : corner_parameters(result)) {
    std::size_t sum = 0;
    const auto bins = corner_histogram(parameter);
    for (const CornerBin& bin : bins) sum += bin.count;
    EXPECT_EQ(sum, 2000U);
    EXPECT_LT(bins.size(), 150U);
  }
}

/// The ellipse of a Gaussian of two variables holds 1 - exp(-r^2/2): 68 % within 1.51 sigma, 95 % within 2.45
/// (e.g. Press et al., Numerical Recipes, 15.6, Delta chi2 of two parameters).
TEST(CornerData, ContoursOfAGaussianAreItsEllipses) {
  Result result = invented_result();
  result.parameters = {{"background_k", 0, 0}, {"background_k", 0, 0}};
  result.posterior.draws.resize(2);
  std::mt19937_64 random(11);
  std::normal_distribution<double> normal;
  for (int i = 0; i < 20000; ++i) {
    for (auto& draws : result.posterior.draws) draws.push_back(normal(random));
  }
  const auto parameters = corner_parameters(result);
  const CornerPanel panel = corner_panel(parameters[0], parameters[1]);
  const auto mean_radius = [](const std::vector<Segment>& contour) {
    double length = 0.0;
    double sum = 0.0;
    for (const Segment& s : contour) {
      const double step = std::hypot(s.x1 - s.x0, s.y1 - s.y0);
      sum += step * std::hypot(s.x0, s.y0);
      length += step;
    }
    return sum / length;
  };
  // 20000 draws: a radius at one angle scatters by some per cent, the mean round the contour by less than 2 %
  EXPECT_NEAR(mean_radius(panel.contour68), std::sqrt(-2.0 * std::log(0.32)), 0.03);
  EXPECT_NEAR(mean_radius(panel.contour95), std::sqrt(-2.0 * std::log(0.05)), 0.05);
}

TEST(CornerData, StandsDrawsThatAreAllAlike) {
  Result result = with_draws(2);
  result.posterior.draws[0].assign(2000, 32.0);
  const auto parameters = corner_parameters(result);
  std::size_t sum = 0;
  for (const CornerBin& bin : corner_histogram(parameters[0])) sum += bin.count;
  EXPECT_EQ(sum, 2000U);
  EXPECT_THAT(corner_panel(parameters[0], parameters[1]).cells, Not(IsEmpty()));
}

TEST_F(CornerFolder, WritesFiguresScriptAndData) {
  const auto names =
      write_corner(with_draws(2), path_, {FigureFormat::svg, FigureFormat::pdf, FigureFormat::png});
  EXPECT_THAT(names, UnorderedElementsAre("corner.svg", "corner.pdf", "corner.png", "corner.gp",
                                          "corner-histograms.tsv", "corner-cells.tsv", "corner-contours.tsv",
                                          "corner-text.tsv"));
  for (const std::string& name : names) EXPECT_GT(fs::file_size(path_ / name), 100U) << name;
  EXPECT_THAT(names, IsSubsetOf(output_family()));
  EXPECT_THAT(counts_of_blocks(read("corner-histograms.tsv")), testing::ElementsAre(2000U, 2000U));
  EXPECT_THAT(read("corner-text.tsv"), HasSubstr("2000 draws"));
  EXPECT_THAT(read("corner.svg"), HasSubstr("log₁₀ N₁ (cm⁻²)"));
}

TEST_F(CornerFolder, DrawsOneParameterAndSaysWhenThereAreTooMany) {
  write_corner(with_draws(1), path_, {FigureFormat::svg});
  EXPECT_THAT(counts_of_blocks(read("corner-histograms.tsv")), testing::ElementsAre(2000U));
  write_corner(with_draws(6), path_, {FigureFormat::svg});
  EXPECT_EQ(counts_of_blocks(read("corner-histograms.tsv")), std::vector<std::size_t>(5, 2000U));
  EXPECT_THAT(read("corner-text.tsv"), HasSubstr("2000 draws, first 5 of 6 parameters"));
}

TEST_F(CornerFolder, DrawsNothingFromFewDraws) {
  EXPECT_THAT(write_corner(invented_result(), path_, {FigureFormat::svg}), IsEmpty());
  EXPECT_THAT(write_corner(with_draws(2, 99), path_, {FigureFormat::svg}), IsEmpty());
  EXPECT_TRUE(fs::is_empty(path_));
}

TEST_F(CornerFolder, KeepsTheUsersTextOutOfTheScript) {
  const Result plain = with_draws(2);
  write_corner(plain, path_, {FigureFormat::svg});
  const std::string script = read("corner.gp");
  for (const std::string& text : hostile_texts()) {
    Result hostile = with_hostile_text(plain, text);
    hostile.parameters[0].name = "ln_column_density_cm2_" + text + "_1";
    write_corner(hostile, path_, {FigureFormat::svg});
    EXPECT_EQ(read("corner.gp"), script) << text;
    EXPECT_FALSE(fs::exists(path_ / "pwned"));
  }
}

TEST_F(CornerFolder, SameDrawsSameBytes) {
  write_corner(with_draws(3), path_, {FigureFormat::svg, FigureFormat::pdf});
  const std::string svg = read("corner.svg");
  const std::string pdf = read("corner.pdf");
  write_corner(with_draws(3), path_, {FigureFormat::svg, FigureFormat::pdf});
  EXPECT_TRUE(read("corner.svg") == svg);
  EXPECT_TRUE(read("corner.pdf") == pdf);
}

}  // namespace
}  // namespace trotline
