#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <trotline/base/errors.hpp>
#include <trotline/observation/line_measurement.hpp>

#include "simulated_spectra.hpp"

namespace trotline {
namespace {

using simulation::kRestHz;

MeasurementOptions options_with_window(double width_km_s, std::optional<int> order = 0) {
  MeasurementOptions options;
  options.window_km_s = width_km_s;
  options.baseline.order = order;
  return options;
}

struct Pulls {
  double mean = 0.0;
  double sigma = 0.0;
};

Pulls statistics(const std::vector<double>& pulls) {
  double sum = 0.0;
  double squares = 0.0;
  for (const double pull : pulls) {
    sum += pull;
    squares += pull * pull;
  }
  const auto n = static_cast<double>(pulls.size());
  return {sum / n, std::sqrt(squares / n - sum * sum / n / n)};
}

/// The program tests/validation/observation/intensity_pulls runs many cases; these are corners with fewer spectra.
struct PullCase {
  const char* name;
  const char* noise;
  int order;
  int window;
  double signal_to_noise;
};

void PrintTo(const PullCase& c, std::ostream* stream) { *stream << c.name; }

class IntensityPulls : public testing::TestWithParam<PullCase> {};

TEST_P(IntensityPulls, HaveMeanZeroAndSpreadOne) {
  const PullCase& c = GetParam();
  constexpr int kSpectra = 600;
  std::mt19937_64 random(20240301);
  simulation::Setup setup;
  setup.baseline_order = c.order;
  setup.kernel = simulation::kernel_named(c.noise);
  const double width = c.window * simulation::kChannelKmS;
  const double centre =
      0.5 * simulation::kChannelKmS;  // between two channels: the windows have even numbers of them
  setup.lines = {{centre, c.signal_to_noise * simulation::kChannelKmS * std::sqrt(c.window), width / 3.3}};
  MeasurementOptions options = options_with_window(width - 0.1 * simulation::kChannelKmS, c.order);
  options.vlsr_km_s = centre;
  std::vector<double> pulls;
  for (int i = 0; i < kSpectra; ++i) {
    const auto measured = measure_lines(simulation::spectrum(setup, random), {{"line", kRestHz}}, options);
    ASSERT_EQ(measured.lines[0].status, LineStatus::measured) << measured.lines[0].trouble;
    pulls.push_back((measured.lines[0].intensity - setup.lines[0].area) / measured.lines[0].sigma());
  }
  // Four times the scatter of mean and standard deviation of 600 pulls, and what an honest error may be off:
  // 0.02.
  EXPECT_NEAR(statistics(pulls).mean, 0.0, 4.0 / std::sqrt(kSpectra) + 0.02);
  EXPECT_NEAR(statistics(pulls).sigma, 1.0, 4.0 / std::sqrt(2.0 * kSpectra) + 0.02);
}

INSTANTIATE_TEST_SUITE_P(Corners, IntensityPulls,
                         testing::Values(PullCase{"WhiteFlatNarrow", "white", 0, 4, 10.0},
                                         PullCase{"WhiteSteepWide", "white", 5, 200, 3.0},
                                         PullCase{"HanningWide", "hanning", 2, 60, 10.0},
                                         PullCase{"BoxNarrow", "box of 4", 1, 4, 50.0},
                                         PullCase{"GaussianWide", "gaussian", 3, 200, 10.0}),
                         [](const auto& c) { return c.param.name; });

TEST(LineMeasurement, WhiteNoiseOnAFlatBaselineGivesTheTextbookError) {
  // sigma_W = rms dv sqrt(n (1 + n / m)): n channels of the line, m of the baseline, which is their mean. The
  // rms itself scatters by sqrt(2 / m) in its square, for which 1 + 2 / m makes up.
  std::mt19937_64 random(5);
  simulation::Setup setup;
  setup.lines = {{0.0, 5.0, 1.0}};
  const auto measured =
      measure_lines(simulation::spectrum(setup, random), {{"line", kRestHz}}, options_with_window(4.95));
  const LineMeasurement& line = measured.lines[0];
  ASSERT_EQ(line.channels, 49U);  // centres at multiples of 0.1 km/s from -2.4 to 2.4
  const auto n = static_cast<double>(line.channels);
  const auto m = static_cast<double>(line.baseline_channels);
  ASSERT_LT(measured.correlation.rho.size(), 3);
  if (measured.correlation.rho.size() == 1) {
    const double unit = line.rms * simulation::kChannelKmS * std::sqrt(1.0 + 2.0 / m);
    EXPECT_NEAR(line.noise_sigma, unit * std::sqrt(n), 1e-9);
    EXPECT_NEAR(line.sigma(), unit * std::sqrt(n * (1.0 + n / m)), 1e-9);
  }
  EXPECT_NEAR(line.rms, 1.0, 5.0 / std::sqrt(2.0 * m));
}

TEST(NoiseCorrelation, SeesTheSmoothing) {
  // Channels for each independent one: (sum of the kernel)^2 / sum of its squares, exactly.
  std::mt19937_64 random(6);
  for (const auto& [name, expected] : std::vector<std::pair<std::string, double>>{
           {"white", 1.0}, {"hanning", 1.0 / 0.375}, {"box of 4", 4.0}}) {
    const Eigen::ArrayXd noise = simulation::noise(20000, simulation::kernel_named(name), random);
    const auto found = estimate_noise_correlation(noise, std::vector<bool>(20000, false));
    // The sum of the autocorrelation over lags up to L scatters by sqrt((2 L + 1) s / n) of itself, s the
    // sum.
    EXPECT_NEAR(found.channels_per_independent_one() / expected, 1.0,
                5.0 * std::sqrt(2.0 * 9.0 * expected / 20000.0))
        << name;
    EXPECT_FALSE(found.reaches_limit);
  }
}

TEST(NoiseCorrelation, VarianceOfASumIsItsDoubleSum) {
  NoiseCorrelation correlation;
  correlation.rho.resize(3);
  correlation.rho << 1.0, 0.5, 0.2;
  Eigen::VectorXd a(4);
  a << 1.0, 2.0, -1.0, 0.5;
  double expected = 0.0;
  for (int i = 0; i < 4; ++i) {
    for (int j = 0; j < 4; ++j) {
      const int lag = std::abs(i - j);
      expected += a(i) * a(j) * (lag < 3 ? correlation.rho(lag) : 0.0);
    }
  }
  EXPECT_NEAR(correlation.variance_of(a), expected, 1e-14);
}

TEST(NoiseCorrelation, OfNothingIsWhite) {
  const auto found =
      estimate_noise_correlation(Eigen::ArrayXd::Constant(100, NAN), std::vector<bool>(100, false));
  EXPECT_EQ(found.channels, 0U);
  EXPECT_EQ(found.channels_per_independent_one(), 1.0);
}

TEST(Baseline, TheAverageOverOrdersFollowsACubic) {
  std::mt19937_64 random(7);
  std::vector<double> pulls;
  constexpr int kSpectra = 300;
  for (int i = 0; i < kSpectra; ++i) {
    simulation::Setup setup;
    setup.channels = 600;
    Spectrum spectrum = simulation::spectrum(setup, random);
    for (int k = 0; k < 600; ++k) {
      const double x = 2.0 * k / 599.0 - 1.0;
      spectrum.intensity(k) += 4.0 * x * x * x - 2.0 * x + 3.0 * x * x;
    }
    const auto measured =
        measure_lines(spectrum, {{"line", kRestHz}}, options_with_window(20.0, std::nullopt));
    EXPECT_GE(measured.lines[0].baseline_order, 2);
    pulls.push_back(measured.lines[0].intensity / measured.lines[0].sigma());
  }
  // Four times the scatter, and 0.05: so honest are errors of averages over orders
  // (docs/intensity_errors.md).
  EXPECT_NEAR(statistics(pulls).mean, 0.0, 4.0 / std::sqrt(kSpectra) + 0.05);
  EXPECT_NEAR(statistics(pulls).sigma, 1.0, 4.0 / std::sqrt(2.0 * kSpectra) + 0.05);
}

TEST(Baseline, IsExactForAPolynomialAndForgetsAnUnlistedLine) {
  Spectrum spectrum;
  spectrum.axis = simulation::axis(400);
  spectrum.intensity.resize(400);
  std::mt19937_64 random(8);
  std::normal_distribution<double> normal(0.0, 1e-3);
  for (int i = 0; i < 400; ++i) spectrum.intensity(i) = 5.0 + 0.01 * i + normal(random);
  for (int i = 300; i < 305; ++i) spectrum.intensity(i) += 50.0;  // nobody listed this
  const auto measured = measure_lines(spectrum, {{"line", kRestHz}}, options_with_window(3.0, 1));
  EXPECT_NEAR(measured.lines[0].intensity, 0.0, 5.0 * measured.lines[0].sigma());
  EXPECT_LT(measured.lines[0].rms, 2e-3);
}

TEST(Baseline, ALineThatNobodyListedDoesNotBiasIt) {
  // 2026-12-01: a line of S/N 13 beside the window raised W by three errors, its wings being below the clip.
  std::mt19937_64 random(31);
  simulation::Setup setup;
  setup.lines = {{0.0, 40.0, 1.8}, {13.6, 25.0, 1.8}};
  std::vector<double> pulls;
  constexpr int kSpectra = 300;
  for (int i = 0; i < kSpectra; ++i) {
    const auto measured = measure_lines(simulation::spectrum(setup, random), {{"line", kRestHz}},
                                        options_with_window(6.0, std::nullopt));
    pulls.push_back((measured.lines[0].intensity - 40.0) / measured.lines[0].sigma());
  }
  EXPECT_NEAR(statistics(pulls).mean, 0.0, 4.0 / std::sqrt(kSpectra) + 0.1);
  EXPECT_NEAR(statistics(pulls).sigma, 1.0, 4.0 / std::sqrt(2.0 * kSpectra) + 0.05);
}

TEST(GaussianLines, OneLineIsRecoveredWithHonestErrors) {
  std::mt19937_64 random(9);
  std::vector<double> area;
  std::vector<double> velocity;
  std::vector<double> width;
  std::vector<double> peak;
  constexpr int kSpectra = 500;
  simulation::Setup setup;
  setup.channels = 800;
  setup.kernel = simulation::kernel_named("hanning");
  setup.lines = {{0.3, 40.0, 2.0}};
  const double true_peak = 0.9394372786996513 * 40.0 / 2.0;  // 2 sqrt(ln 2 / pi) area / fwhm
  for (int i = 0; i < kSpectra; ++i) {
    const auto measured =
        measure_lines(simulation::spectrum(setup, random), {{"line", kRestHz}}, options_with_window(8.0));
    ASSERT_TRUE(measured.lines[0].gaussian.has_value());
    const GaussianLine& fit = *measured.lines[0].gaussian;
    area.push_back((fit.area.value - 40.0) / fit.area.sigma);
    velocity.push_back((fit.velocity_km_s.value - 0.3) / fit.velocity_km_s.sigma);
    width.push_back((fit.fwhm_km_s.value - 2.0) / fit.fwhm_km_s.sigma);
    peak.push_back((fit.peak.value - true_peak) / fit.peak.sigma);
  }
  for (const auto& pulls : {area, velocity, width, peak}) {
    // Four times the scatter, and 0.1 for what averaging over a channel does to width and peak (it adds 1/12
    // channel^2 to the variance: 2e-4 km/s here, against errors of 0.01 km/s).
    EXPECT_NEAR(statistics(pulls).mean, 0.0, 4.0 / std::sqrt(kSpectra) + 0.1);
    EXPECT_NEAR(statistics(pulls).sigma, 1.0, 4.0 / std::sqrt(2.0 * kSpectra) + 0.02);
  }
}

/// Two lines, the second one at a higher velocity in the scale of the first.
std::vector<LineRequest> pair_of_lines(double separation_km_s) {
  const double second_hz = kRestHz * (1.0 - separation_km_s / simulation::kLightKmS);
  return {{"a", kRestHz}, {"b", second_hz}};
}

TEST(GaussianLines, TwoBlendedLinesOneWidthApartAreRecoveredWithoutBias) {
  std::mt19937_64 random(10);
  std::vector<double> first;
  std::vector<double> second;
  constexpr int kSpectra = 500;
  simulation::Setup setup;
  setup.channels = 800;
  setup.lines = {{0.0, 30.0, 2.0}, {2.0, 20.0, 2.0}};
  int fitted = 0;
  for (int i = 0; i < kSpectra; ++i) {
    const auto measured =
        measure_lines(simulation::spectrum(setup, random), pair_of_lines(2.0), options_with_window(7.0));
    const LineMeasurement& a = measured.lines[0];
    const LineMeasurement& b = measured.lines[1];
    if (!a.blend.empty()) continue;
    ++fitted;
    EXPECT_EQ(a.method, "joint fit of Gaussians");
    EXPECT_THAT(a.fitted_with, testing::ElementsAre("b"));
    first.push_back((a.intensity - 30.0) / a.sigma());
    second.push_back((b.intensity - 20.0) / b.sigma());
  }
  EXPECT_GT(fitted, kSpectra * 95 / 100);
  for (const auto& pulls : {first, second}) {
    EXPECT_NEAR(statistics(pulls).mean, 0.0, 4.0 / std::sqrt(kSpectra) + 0.02);
    EXPECT_NEAR(statistics(pulls).sigma, 1.0, 4.0 / std::sqrt(2.0 * kSpectra) + 0.02);
  }
}

TEST(GaussianLines, LinesThatCannotBeToldApartBecomeOneBlend) {
  std::mt19937_64 random(11);
  simulation::Setup setup;
  setup.channels = 800;
  setup.lines = {{0.0, 30.0, 2.0}, {0.4, 20.0, 2.0}};
  const auto measured =
      measure_lines(simulation::spectrum(setup, random), pair_of_lines(0.4), options_with_window(7.0));
  const LineMeasurement& a = measured.lines[0];
  const LineMeasurement& b = measured.lines[1];
  EXPECT_FALSE(a.blend.empty());
  EXPECT_EQ(a.blend, b.blend);
  EXPECT_EQ(a.intensity, b.intensity);
  EXPECT_NEAR(a.intensity, 50.0, 5.0 * a.sigma());
  EXPECT_FALSE(a.gaussian.has_value());
}

TEST(GaussianLines, OfAGroupOnlyWhatCannotBeToldApartIsBlended) {
  std::mt19937_64 random(29);
  simulation::Setup setup;
  // Two lines 0.3 widths apart, a third four widths away: frequencies rise where velocities fall.
  const std::vector<double> offsets = {0.0, -0.6, -8.0};
  setup.lines = {{offsets[0], 60.0, 2.0}, {offsets[1], 40.0, 2.0}, {offsets[2], 50.0, 2.0}};
  std::vector<LineRequest> requests;
  for (std::size_t i = 0; i < 3; ++i) {
    requests.push_back({std::string(1, static_cast<char>('a' + i)),
                        kRestHz * (1.0 - offsets[i] / simulation::kLightKmS)});
  }
  std::vector<double> blend;
  std::vector<double> alone;
  constexpr int kSpectra = 300;
  for (int i = 0; i < kSpectra; ++i) {
    const auto measured =
        measure_lines(simulation::spectrum(setup, random), requests, options_with_window(9.0)).lines;
    ASSERT_FALSE(measured[0].blend.empty());
    EXPECT_EQ(measured[0].blend, measured[1].blend);
    EXPECT_EQ(measured[0].intensity, measured[1].intensity);
    ASSERT_TRUE(measured[2].blend.empty());
    ASSERT_TRUE(measured[2].gaussian.has_value());
    blend.push_back((measured[0].intensity - 100.0) / measured[0].sigma());
    alone.push_back((measured[2].intensity - 50.0) / measured[2].sigma());
  }
  // Four times the scatter of mean and standard deviation of the pulls, and 0.05 that errors may be off.
  for (const auto& pulls : {blend, alone}) {
    EXPECT_NEAR(statistics(pulls).mean, 0.0, 4.0 / std::sqrt(kSpectra) + 0.05);
    EXPECT_NEAR(statistics(pulls).sigma, 1.0, 4.0 / std::sqrt(2.0 * kSpectra) + 0.05);
  }
}

TEST(GaussianLines, LinesTooFaintForAFitBecomeOneBlend) {
  std::mt19937_64 random(12);
  simulation::Setup setup;
  setup.channels = 800;
  const auto measured =
      measure_lines(simulation::spectrum(setup, random), pair_of_lines(2.0), options_with_window(7.0));
  EXPECT_FALSE(measured.lines[0].blend.empty());
  EXPECT_FALSE(measured.lines[0].detected);
}

TEST(LineMeasurement, NonDetectionsKeepTheirMeasurement) {
  std::mt19937_64 random(13);
  simulation::Setup setup;
  int negative = 0;
  for (int i = 0; i < 100; ++i) {
    const Spectrum spectrum = simulation::spectrum(setup, random);
    const MeasurementOptions options = options_with_window(5.0);
    const auto measured = measure_lines(spectrum, {{"line", kRestHz}}, options);
    const LineMeasurement& line = measured.lines[0];
    EXPECT_DOUBLE_EQ(line.limit, 3.0 * line.sigma());
    EXPECT_FALSE(line.gaussian.has_value());
    negative += line.intensity < 0.0 ? 1 : 0;
    const IntensityTable table = to_intensity_table(spectrum, measured, options);
    ASSERT_EQ(table.rows.size(), 1U);
    EXPECT_EQ(table.rows[0].intensity, line.intensity);
    EXPECT_FALSE(table.rows[0].is_limit);
    EXPECT_EQ(table.rows[0].note.value().find("below 3 sigma, limit ") == std::string::npos, line.detected);
  }
  // Half of them, within 4 sqrt(100) / 2.
  EXPECT_NEAR(negative, 50, 20);
}

TEST(LineMeasurement, CalibrationIsKeptApart) {
  std::mt19937_64 random(14);
  simulation::Setup setup;
  setup.lines = {{0.0, 50.0, 1.0}};
  MeasurementOptions options = options_with_window(5.0);
  options.calibration_error = 0.1;
  const Spectrum spectrum = simulation::spectrum(setup, random);
  const auto measured = measure_lines(spectrum, {{"line", kRestHz}}, options);
  EXPECT_NEAR(measured.lines[0].calibration_sigma, 0.1 * measured.lines[0].intensity, 1e-12);
  EXPECT_LT(measured.lines[0].sigma(), 2.0);
  const IntensityTable table = to_intensity_table(spectrum, measured, options);
  EXPECT_EQ(table.rows[0].calibration_error, 0.1);
  EXPECT_EQ(table.rows[0].intensity_sigma, measured.lines[0].sigma());
}

TEST(LineMeasurement, TheWindowIsFoundFromTheStrongestLine) {
  std::mt19937_64 random(15);
  simulation::Setup setup;
  setup.lines = {{4.0, 60.0, 2.5}};
  MeasurementOptions options;
  options.search_km_s = 30.0;
  options.baseline.order = 0;
  const auto measured = measure_lines(simulation::spectrum(setup, random), {{"line", kRestHz}}, options);
  EXPECT_NEAR(0.5 * (measured.window.low_km_s + measured.window.high_km_s), 4.0, 0.3);
  EXPECT_NEAR(measured.window.high_km_s - measured.window.low_km_s, 7.5, 1.0);
  EXPECT_NEAR(measured.lines[0].intensity, 60.0, 5.0 * measured.lines[0].sigma());
  const auto nothing =
      measure_lines(simulation::spectrum(simulation::Setup{}, random), {{"line", kRestHz}}, options);
  ASSERT_EQ(nothing.warnings.size(), 1U);
  EXPECT_THAT(nothing.warnings[0], testing::HasSubstr("no line stands out"));
}

TEST(LineMeasurement, ABlindingLineIsFoundWhateverTheWidthOfTheBand) {
  // 50 sigma a channel, 2.5 km/s wide; the search of 40 km/s for wide bands leaves no baseline in 60 km/s.
  for (const int channels : {300, 450, 600, 700, 800, 900, 950, 1200}) {
    std::mt19937_64 random(40);
    simulation::Setup setup;
    setup.channels = channels;
    setup.baseline_size = 0.0;
    setup.lines = {{0.0, 133.0, 2.5}};
    const Spectrum spectrum = simulation::spectrum(setup, random);
    const auto measured = measure_lines(spectrum, {{"line", kRestHz}}, {});
    ASSERT_EQ(measured.lines[0].status, LineStatus::measured) << channels << measured.lines[0].trouble;
    EXPECT_TRUE(measured.lines[0].detected) << channels;
    EXPECT_NEAR(measured.lines[0].intensity, 133.0, 4.0 * measured.lines[0].sigma()) << channels;
    EXPECT_LT(measured.lines[0].sigma(), 3.0) << channels;
    EXPECT_THAT(to_intensity_table(spectrum, measured, {}).warnings, testing::IsEmpty()) << channels;
  }
}

TEST(LineMeasurement, AWindowThatLeavesTooLittleBaselineIsNamedWithTheOptionsThatMendIt) {
  std::mt19937_64 random(41);
  simulation::Setup setup;
  setup.baseline_size = 0.0;
  setup.lines = {{0.0, 133.0, 2.5}};
  MeasurementOptions options;
  options.search_km_s = 40.0;
  for (const int channels : {600, 700, 800}) {
    setup.channels = channels;
    const Spectrum spectrum = simulation::spectrum(setup, random);
    const IntensityTable table =
        to_intensity_table(spectrum, measure_lines(spectrum, {{"line", kRestHz}}, options), options);
    const auto names_options = testing::AllOf(testing::HasSubstr("line line is"), testing::HasSubstr("baseline"),
                                              testing::HasSubstr("--search"), testing::HasSubstr("--window"));
    EXPECT_THAT(table.warnings, testing::Contains(names_options)) << channels;
  }
}

TEST(LineMeasurement, NoLineOfABandIsNoWeakLine) {
  std::mt19937_64 random(42);
  const auto measured = measure_lines(simulation::spectrum({}, random), {{"line", 3.0 * kRestHz}}, {});
  EXPECT_EQ(measured.lines.at(0).status, LineStatus::not_covered);
  EXPECT_THAT(measured.warnings, testing::IsEmpty());
}

Spectrum strong_line(std::uint64_t seed) {
  std::mt19937_64 random(seed);
  simulation::Setup setup;
  setup.lines = {{0.0, 100.0, 2.0}};
  setup.baseline_size = 0.0;
  return simulation::spectrum(setup, random);
}

LineMeasurement measured_in(const Spectrum& spectrum, double vlsr_km_s = 0.0, double window_km_s = 8.0) {
  MeasurementOptions options = options_with_window(window_km_s);
  options.vlsr_km_s = vlsr_km_s;
  return measure_lines(spectrum, {{"line", kRestHz}}, options).lines[0];
}

TEST(LineFlags, AreAbsentFromAGoodLine) { EXPECT_TRUE(measured_in(strong_line(16)).flags.empty()); }

TEST(LineFlags, SaturationIsSeen) {
  Spectrum spectrum = strong_line(17);
  spectrum.intensity = spectrum.intensity.min(30.0);
  const LineMeasurement line = measured_in(spectrum);
  EXPECT_TRUE(line.has(LineFlag::saturation));
  EXPECT_FALSE(line.is_trusted());
}

TEST(LineFlags, AWindowBeyondTheBandIsAnEdge) {
  const Spectrum spectrum = strong_line(18);
  const double edge_km_s = 0.5 * 1024 * simulation::kChannelKmS;
  const LineMeasurement line = measured_in(spectrum, edge_km_s - 1.0);
  EXPECT_EQ(line.status, LineStatus::measured);
  EXPECT_TRUE(line.has(LineFlag::edge));
  EXPECT_TRUE(line.has(LineFlag::one_sided));
  EXPECT_EQ(measured_in(spectrum, edge_km_s + 10.0).status, LineStatus::not_covered);
}

TEST(LineFlags, AHoleIsBridgedAndSaid) {
  Spectrum spectrum = strong_line(19);
  const double whole = measured_in(spectrum).intensity;
  spectrum.intensity(512) = NAN;
  const LineMeasurement line = measured_in(spectrum);
  EXPECT_TRUE(line.has(LineFlag::hole));
  EXPECT_FALSE(line.is_trusted());
  EXPECT_NEAR(line.intensity, whole,
              0.5);  // one channel of 100, bridged within its noise and the curvature of the line
  for (int i = 480; i < 540; ++i) spectrum.intensity(i) = NAN;
  EXPECT_EQ(measured_in(spectrum).status, LineStatus::not_measured);
  EXPECT_THAT(measured_in(spectrum).trouble, testing::HasSubstr("have no value"));
}

TEST(LineFlags, WingsAndBowlsAreSeenBesideTheWindow) {
  EXPECT_TRUE(measured_in(strong_line(20), 0.0, 2.0).has(LineFlag::wing));
  Spectrum bowl = strong_line(21);
  for (int i = 0; i < 1024; ++i) {
    if (std::abs(i - 512) > 40 && std::abs(i - 512) < 70) bowl.intensity(i) -= 5.0;
  }
  EXPECT_TRUE(measured_in(bowl).has(LineFlag::negative_bowl));
}

TEST(LineFlags, NeighboursAreNamedWithTheirVelocity) {
  const Spectrum spectrum = strong_line(22);
  std::vector<LineRequest> requests = pair_of_lines(1.5);
  requests[1].tag = "other";
  requests[1].measure = false;
  const auto measured = measure_lines(spectrum, requests, options_with_window(8.0));
  ASSERT_EQ(measured.lines.size(), 1U);
  EXPECT_TRUE(measured.lines[0].has(LineFlag::neighbour));
  ASSERT_EQ(measured.lines[0].neighbours.size(), 1U);
  EXPECT_THAT(measured.lines[0].neighbours[0], testing::HasSubstr("other b at 1.50 km/s"));
}

TEST(LineMeasurement, WorksTheSameInBothSensesOfTheAxis) {
  const Spectrum spectrum = strong_line(23);
  Spectrum turned = spectrum;
  turned.intensity = spectrum.intensity.reverse();
  turned.axis = SpectralAxis(spectrum.axis.frequency_hz(1023.0), spectrum.axis.width_hz(0), 1024);
  const LineMeasurement one = measured_in(spectrum);
  const LineMeasurement other = measured_in(turned);
  EXPECT_NEAR(one.intensity, other.intensity, 1e-9);
  EXPECT_NEAR(one.sigma(), other.sigma(), 1e-9);
  EXPECT_NEAR(one.gaussian->velocity_km_s.value, other.gaussian->velocity_km_s.value, 1e-9);
}

TEST(LineMeasurement, ScalesWithTheUnit) {
  Spectrum spectrum = strong_line(24);
  const LineMeasurement one = measured_in(spectrum);
  spectrum.intensity *= 1e-6;
  const LineMeasurement small = measured_in(spectrum);
  EXPECT_NEAR(small.intensity * 1e6 / one.intensity, 1.0, 1e-9);
  EXPECT_NEAR(small.sigma() * 1e6 / one.sigma(), 1.0, 1e-9);
}

TEST(LineMeasurement, SaysWhyThereIsNoNumber) {
  Spectrum flat;
  flat.axis = simulation::axis(300);
  flat.intensity = Eigen::ArrayXd::Zero(300);
  EXPECT_THAT(measured_in(flat).trouble, testing::HasSubstr("no noise"));
  Spectrum empty = flat;
  empty.intensity.setConstant(NAN);
  EXPECT_THAT(measured_in(empty).trouble, testing::HasSubstr("have no value"));
  Spectrum tiny = strong_line(25);
  EXPECT_THAT(measured_in(tiny, 0.0, 102.0).trouble, testing::HasSubstr("too few for the baseline"));
  EXPECT_THAT(measured_in(tiny, 0.05, 0.02).trouble,
              testing::AnyOf("", testing::HasSubstr("outside of the band")));
}

TEST(LineMeasurement, RefusesRequestsThatMakeNoSense) {
  const Spectrum spectrum = strong_line(26);
  const auto refuses = [&](const LineRequest& request, const MeasurementOptions& options) {
    EXPECT_THROW((void)measure_lines(spectrum, {request}, options), InputError);
  };
  MeasurementOptions options = options_with_window(8.0);
  refuses({"line", 0.0}, options);
  refuses({"line", NAN}, options);
  refuses({.label = "line", .rest_frequency_hz = kRestHz, .window = VelocityRange{1.0, 1.0}}, options);
  options.window_km_s = -1.0;
  refuses({"line", kRestHz}, options);
  options = options_with_window(8.0);
  options.calibration_error = 1.5;
  refuses({"line", kRestHz}, options);
  options = options_with_window(8.0, -1);
  refuses({"line", kRestHz}, options);
  options = options_with_window(8.0);
  options.vlsr_km_s = 1e9;
  refuses({"line", kRestHz}, options);
}

TEST(LineMeasurement, UntrustedLinesStayOutOfTheTableAndAreNamed) {
  Spectrum spectrum = strong_line(27);
  spectrum.intensity(512) = NAN;
  const MeasurementOptions options = options_with_window(8.0);
  const IntensityTable table =
      to_intensity_table(spectrum, measure_lines(spectrum, {{"line", kRestHz}}, options), options);
  EXPECT_TRUE(table.rows.empty());
  ASSERT_EQ(table.warnings.size(), 1U);
  EXPECT_THAT(table.warnings[0],
              testing::AllOf(testing::HasSubstr("line is left out"), testing::HasSubstr("hole")));
}

TEST(LineMeasurement, PanelsHoldDataBaselineAndModel) {
  MeasurementOptions options = options_with_window(8.0);
  options.keep_panels = true;
  const auto measured = measure_lines(strong_line(28), {{"line", kRestHz}}, options);
  ASSERT_TRUE(measured.lines[0].panel.has_value());
  const LinePanel& panel = *measured.lines[0].panel;
  EXPECT_EQ(panel.velocity_km_s.size(), panel.intensity.size());
  EXPECT_EQ(panel.model.size(), panel.intensity.size());
  Eigen::Index highest = 0;
  panel.model.maxCoeff(&highest);
  EXPECT_NEAR(panel.velocity_km_s(highest), 0.0, 0.2);
}

}  // namespace
}  // namespace trotline
