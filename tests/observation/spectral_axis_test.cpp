#include <nlohmann/json.hpp>

#include <fstream>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/observation/spectral_axis.hpp>
#include <trotline/physics/constants.hpp>

#include "reference_files.hpp"

namespace trotline {
namespace {

constexpr double kGivenRestFrequencyHz =
    115271201800.0;  // the one that spectral_axes.py takes where a header has none
constexpr double kOneMetreASecond = 1.0 / constants::kLightMPerS;

const nlohmann::json& reference() {
  static const nlohmann::json document =
      nlohmann::json::parse(read_file(TROTLINE_SOURCE_DIR "/tests/reference/spectral_axes.json"));
  return document;
}

std::string cards_of(const nlohmann::json& entry) {
  std::string cards;
  for (const auto& card : entry.at("cards")) cards += card.get<std::string>();
  return cards;
}

/// Files of cards may have them as lines.
std::string as_cards(const std::string& bytes) {
  if (bytes.find('\n') == std::string::npos) return bytes.substr(0, bytes.size() / 80 * 80);
  std::string cards;
  std::istringstream stream(bytes);
  for (std::string line; std::getline(stream, line);) {
    line.resize(80, ' ');
    cards += line;
  }
  return cards;
}

/// Largest difference of five channels, as a velocity over c.
double worst(const SpectralAxis& axis, const nlohmann::json& entry, const char* key) {
  double largest = 0.0;
  for (std::size_t i = 0; i < entry.at("channels").size(); ++i) {
    const double expected = entry.at(key).at(i).get<double>();
    largest = std::max(
        largest, std::abs(axis.frequency_hz(entry.at("channels").at(i).get<double>()) / expected - 1.0));
  }
  return largest;
}

TEST(SpectralAxis, AgreesWithAstropyForEveryConvention) {
  ASSERT_GE(reference().at("headers").size(), 50U);
  for (const auto& entry : reference().at("headers")) {
    const std::string name = entry.at("name");
    SCOPED_TRACE(name);
    const HeaderAxis read = read_spectral_axis(cards_of(entry), name);
    EXPECT_EQ(read.axis.size(), 512U);
    EXPECT_EQ(read.frame, RestFrame::lsrk);
    EXPECT_EQ(read.type, entry.at("type").get<std::string>());
    EXPECT_LT(worst(read.axis, entry, "frequency_hz"), 0.01 * kOneMetreASecond);
  }
}

TEST(SpectralAxis, FramesAreCorrectedAsAstropyDoes) {
  // Within 1 m/s: the ephemerides agree to centimetres a second, the apex of the Sun's motion to a tenth of
  // an arcsec.
  for (const auto& entry : reference().at("moving")) {
    const std::string name = entry.at("name");
    SCOPED_TRACE(name);
    const HeaderAxis read = read_spectral_axis(cards_of(entry), name);
    EXPECT_NE(read.frame, RestFrame::lsrk);
    EXPECT_LT(worst(read.axis, entry, "lsrk_hz"), kOneMetreASecond);
    const HeaderAxis as_written = read_spectral_axis_as_written(cards_of(entry), name);
    EXPECT_LT(worst(as_written.axis, entry, "frequency_hz"), 0.01 * kOneMetreASecond);
  }
}

TEST(SpectralAxis, RealHeadersAgreeWithAstropy) {
  std::size_t compared = 0;
  for (const auto& entry : reference().at("real")) {
    const std::string name = entry.at("name");
    const auto path = test::reference_file("fits/" + name);
    if (path.empty()) continue;
    SCOPED_TRACE(name);
    std::string bytes = read_file(path.string());
    if (name.ends_with(".fits")) bytes = bytes.substr(0, bytes.find("END     ", 0) / 80 * 80);
    AxisOptions options;
    if (bytes.find("RESTFR") == std::string::npos || name.starts_with("grs")) {
      options.rest_frequency_hz = kGivenRestFrequencyHz;
    }
    const HeaderAxis read = read_spectral_axis_as_written(as_cards(bytes), name, options);
    EXPECT_LT(worst(read.axis, entry, "frequency_hz"), 0.01 * kOneMetreASecond);
    ++compared;
  }
  if (compared == 0) GTEST_SKIP() << "no folder of real headers";
  EXPECT_EQ(compared, reference().at("real").size());
}

std::string read_real(const std::string& name) {
  const auto path = test::reference_file("fits/" + name);
  return path.empty() ? std::string{} : as_cards(read_file(path.string()));
}

TEST(SpectralAxis, OneAxisWrittenInFourRepresentationsIsOneAxis) {
  // The three headers describe the same channels around CRPIX; the linear axis through CRVAL is a tangent in
  // each representation, so that they agree near the reference channel only: there the headers' own digits
  // are the limit.
  const std::vector<std::string> names = {"orion-freq-1.hdr", "orion-velo-1.hdr", "orion-wave-1.hdr"};
  std::vector<double> reference_hz;
  for (const std::string& name : names) {
    const std::string cards = read_real(name);
    if (cards.empty()) GTEST_SKIP() << "no folder of real headers";
    reference_hz.push_back(read_spectral_axis(cards, name).axis.frequency_hz(0.0));
  }
  // 110.95087001 GHz at the first channel; differences of the printed digits below 1 m/s.
  EXPECT_NEAR(reference_hz[1] / reference_hz[0], 1.0, kOneMetreASecond);
  EXPECT_NEAR(reference_hz[2] / reference_hz[0], 1.0, kOneMetreASecond);
}

TEST(SpectralAxis, ExampleOfTheFitsPaperIsTopocentricFrequency) {
  // Greisen et al. 2006, A&A 446, 747, table 10: FREQ at channel 32 is 1.37835117405e9 Hz, step 9.765625e4
  // Hz.
  const std::string cards = read_real("greisen2006.hdr");
  if (cards.empty()) GTEST_SKIP() << "no folder of real headers";
  const HeaderAxis read = read_spectral_axis_as_written(cards, "greisen2006.hdr");
  EXPECT_EQ(read.frame, RestFrame::topocentric);
  EXPECT_NEAR(read.axis.frequency_hz(31.0), 1.37835117405e9, 0.5);
  EXPECT_NEAR(read.axis.frequency_hz(32.0) - read.axis.frequency_hz(31.0), 9.765625e4, 1e-4);
  // The same table has the barycentric frequency of that channel, 1.37847121643e9 Hz, from VELOSYS = 26.108
  // km/s with relativistic Doppler shift. The correction of trotline starts from date and place, for which
  // the paper gives a rounded date: 0.05 km/s are allowed.
  const HeaderAxis lsrk = read_spectral_axis(cards, "greisen2006.hdr");
  const double barycentric_hz = 1.37847121643e9;
  const double bary_from_lsrk = lsrk.axis.frequency_hz(31.0);
  // Towards 17h 20m, -0d 58' the LSR is ahead of the barycentre by at most 20 km/s.
  EXPECT_LT(std::abs(bary_from_lsrk / barycentric_hz - 1.0), 20.1e3 * kOneMetreASecond);
}

TEST(SpectralAxis, LinearAxisAndTableInvertThemselves) {
  Eigen::ArrayXd curved(100);
  for (Eigen::Index i = 0; i < 100; ++i) curved(i) = 1e11 / (1.0 + 1e-4 * static_cast<double>(i));
  for (const SpectralAxis& axis : {SpectralAxis(1e11, 1e5, 100), SpectralAxis(1e11, -1e5, 100),
                                   SpectralAxis(curved), SpectralAxis(curved.reverse())}) {
    for (const double channel : {0.0, 0.25, 37.9, 98.0, 99.0, -0.5, 99.5}) {
      EXPECT_NEAR(axis.channel_of(axis.frequency_hz(channel)), channel, 1e-6);
    }
    EXPECT_GT(axis.width_hz(0), 0.0);
    EXPECT_LT(axis.low_hz(), axis.high_hz());
    EXPECT_DOUBLE_EQ(axis.scaled(2.0).frequency_hz(7.0), 2.0 * axis.frequency_hz(7.0));
  }
}

TEST(SpectralAxis, WidthsAddUpToTheBand) {
  Eigen::ArrayXd curved(50);
  for (Eigen::Index i = 0; i < 50; ++i) curved(i) = 1e11 / (1.0 + 1e-3 * static_cast<double>(i));
  const SpectralAxis axis{curved};
  double sum = 0.0;
  for (std::size_t i = 0; i < axis.size(); ++i) sum += axis.width_hz(i);
  EXPECT_NEAR(sum / (axis.high_hz() - axis.low_hz()), 1.0, 1e-12);
}

TEST(SpectralAxis, RefusesImpossibleFrequencies) {
  EXPECT_THROW(SpectralAxis(1e9, 0.0, 10), DomainError);
  EXPECT_THROW(SpectralAxis(1e9, -1e9, 10), DomainError);
  EXPECT_THROW(SpectralAxis(std::numeric_limits<double>::quiet_NaN(), 1.0, 10), DomainError);
  EXPECT_THROW(SpectralAxis(Eigen::ArrayXd::Constant(5, 1e9)), DomainError);
  EXPECT_THROW(SpectralAxis(Eigen::ArrayXd::LinSpaced(1, 1e9, 1e9)), DomainError);
}

/// A header of one spectral axis; each change replaces or removes a card.
std::string header(const std::map<std::string, std::string>& changes = {}) {
  std::map<std::string, std::string> keywords = {
      {"NAXIS", "1"},       {"NAXIS1", "512"},   {"CTYPE1", "'VRAD'"}, {"CRVAL1", "0.0"},
      {"CDELT1", "100.0"},  {"CRPIX1", "256.0"}, {"CUNIT1", "'m/s'"},  {"RESTFRQ", "115271201800.0"},
      {"SPECSYS", "'LSRK'"}};
  for (const auto& [key, value] : changes) keywords[key] = value;
  std::string cards;
  for (const auto& [key, value] : keywords) {
    if (value.empty()) continue;
    std::string card = fmt::format("{:<8}= {}", key, value);
    card.resize(80, ' ');
    cards += card;
  }
  return cards;
}

std::string refusal(const std::map<std::string, std::string>& changes, const AxisOptions& options = {}) {
  try {
    (void)read_spectral_axis(header(changes), "spectrum.fits", options);
  } catch (const InputError& error) {
    return error.what();
  }
  return "no error";
}

struct Broken {
  const char* name;
  std::map<std::string, std::string> changes;
  const char* found;
};

void PrintTo(const Broken& broken, std::ostream* stream) { *stream << broken.name; }

class BrokenAxis : public testing::TestWithParam<Broken> {};

TEST_P(BrokenAxis, NamesTheKeyword) {
  const std::string message = refusal(GetParam().changes);
  EXPECT_THAT(message, testing::StartsWith("spectrum.fits: "));
  EXPECT_THAT(message, testing::HasSubstr(GetParam().found));
  EXPECT_THAT(message, testing::HasSubstr("; expected "));
}

INSTANTIATE_TEST_SUITE_P(
    Headers, BrokenAxis,
    testing::ValuesIn(std::vector<Broken>{
        {"NoCtype", {{"CTYPE1", ""}}, "no keyword CTYPEn at all"},
        {"UnknownCtype", {{"CTYPE1", "'SPEED'"}}, "CTYPE1 = 'SPEED'"},
        {"TwoSpectralAxes",
         {{"CTYPE2", "'FREQ'"}, {"NAXIS", "2"}, {"CRVAL2", "1e9"}, {"CDELT2", "1e6"}},
         "several spectral axes"},
        {"StepZero", {{"CDELT1", "0.0"}}, "keyword CDELT1 is 0"},
        {"StepMissing", {{"CDELT1", ""}}, "keyword CDELT1 is missing"},
        {"StepNotANumber", {{"CDELT1", "NaN"}}, "keyword CDELT1 is 'NaN'"},
        {"StepText", {{"CDELT1", "'fast'"}}, "keyword CDELT1 is 'fast'"},
        {"PixelNotANumber", {{"CRPIX1", "NaN"}}, "keyword CRPIX1 is 'NaN'"},
        {"PixelInfinite", {{"CRPIX1", "1e999"}}, "keyword CRPIX1 is '1e999'"},
        {"ValueMissing", {{"CRVAL1", ""}}, "keyword CRVAL1 is missing"},
        {"ValueNotANumber", {{"CRVAL1", "-"}}, "keyword CRVAL1 is '-'"},
        {"UnknownUnit", {{"CUNIT1", "'furlong'"}}, "CUNIT 'furlong'"},
        {"WrongUnit", {{"CUNIT1", "'GHz'"}}, "CUNIT 'GHz'"},
        {"NoRestFrequency", {{"RESTFRQ", ""}}, "keyword RESTFRQ is missing"},
        {"RestFrequencyZero", {{"RESTFRQ", "0.0"}}, "keyword RESTFRQ is missing"},
        {"RestFrequencyInOtherUnits", {{"RESTFRQ", "115.27"}}, "keyword RESTFRQ is 115.27 Hz"},
        {"RestFrequencyNegative", {{"RESTFRQ", "-1e11"}}, "keyword RESTFRQ is -"},
        {"NoFrame", {{"SPECSYS", ""}}, "the frame of the spectral axis is not given"},
        {"UnknownFrame", {{"SPECSYS", "'MOON'"}}, "keyword SPECSYS is 'MOON'"},
        {"FrameOfTheSource", {{"SPECSYS", "'SOURCE'"}}, "from which no way leads"},
        {"BarycentricWithoutDirection", {{"SPECSYS", "'BARYCENT'"}}, "the direction of the source"},
        {"TopocentricWithoutDate",
         {{"SPECSYS", "'TOPOCENT'"}, {"RA", "83.8"}, {"DEC", "-5.4"}},
         "the date of the observation"},
        {"TopocentricWithoutTime",
         {{"SPECSYS", "'TOPOCENT'"}, {"RA", "83.8"}, {"DEC", "-5.4"}, {"DATE-OBS", "'2015-01-01'"}},
         "the time of day"},
        {"TopocentricWithoutSite",
         {{"SPECSYS", "'TOPOCENT'"}, {"RA", "83.8"}, {"DEC", "-5.4"}, {"DATE-OBS", "'2015-01-01T00:00:00'"}},
         "the place of the telescope"},
        {"BadVelref", {{"SPECSYS", ""}, {"VELREF", "99"}}, "keyword VELREF is 99"},
        {"FasterThanLight", {{"CTYPE1", "'VELO'"}, {"CRVAL1", "4e8"}}, "spectral axis"},
        {"NegativeFrequency", {{"CRVAL1", "3e8"}}, "impossible frequencies"},
        {"NegativeWavelength",
         {{"CTYPE1", "'WAVE'"}, {"CUNIT1", "'m'"}, {"CRVAL1", "-1.0"}},
         "spectral axis"},
        {"TableAxis", {{"CTYPE1", "'WAVE-TAB'"}, {"CUNIT1", "'m'"}}, "CTYPE1 is 'WAVE-TAB'"},
        {"UnknownGrid", {{"CTYPE1", "'VRAD-XXX'"}}, "CTYPE 'VRAD-XXX'"},
        {"NoChannels", {{"NAXIS1", "0"}}, "keyword NAXIS1 is 0"},
        {"AbsurdChannels", {{"NAXIS1", "99999999999"}}, "keyword NAXIS1 is 99999999999"},
        {"FractionOfChannels", {{"NAXIS1", "5.5"}}, "keyword NAXIS1 is 5.5"},
        {"NaxisMissing", {{"NAXIS1", ""}}, "keyword NAXIS1 is missing"},
        {"SingularMatrix", {{"CD1_1", "0.0"}}, "keyword CD1_1 is 0"},
    }),
    [](const auto& broken) { return broken.param.name; });

TEST(SpectralAxis, ACallerMayStateWhatTheHeaderLacks) {
  EXPECT_EQ(refusal({{"RESTFRQ", ""}}, {.rest_frequency_hz = 115271201800.0, .frame = {}}), "no error");
  EXPECT_EQ(refusal({{"SPECSYS", ""}}, {.rest_frequency_hz = {}, .frame = RestFrame::lsrk}), "no error");
}

TEST(SpectralAxis, WhatTheHeaderSaysOfItsFrameIsNotOverruled) {
  const AxisOptions options{.rest_frequency_hz = {}, .frame = RestFrame::topocentric};
  EXPECT_EQ(read_spectral_axis(header(), "x", options).frame, RestFrame::lsrk);
}

TEST(SpectralAxis, VelrefMayBeAText) {
  const HeaderAxis read = read_spectral_axis(header({{"SPECSYS", ""}, {"VELREF", "'257     '"}}), "x");
  EXPECT_EQ(read.frame, RestFrame::lsrk);
}

TEST(SpectralAxis, MissingUnitIsSiAndSaid) {
  const HeaderAxis read = read_spectral_axis(header({{"CUNIT1", ""}}), "x");
  ASSERT_EQ(read.warnings.size(), 1U);
  EXPECT_THAT(read.warnings[0], testing::HasSubstr("CUNIT1 is missing"));
}

TEST(SpectralAxis, FortranExponentsAndCommentsAreRead) {
  const HeaderAxis read = read_spectral_axis(header({{"RESTFRQ", "1.152712018D+11 / [Hz] a line"}}), "x");
  EXPECT_EQ(read.rest_frequency_hz, 115271201800.0);
}

}  // namespace
}  // namespace trotline
