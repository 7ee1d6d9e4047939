#include <gtest/gtest.h>

#include <thread>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/observation/line_measurement.hpp>
#include <trotline/observation/spectrum.hpp>

#include "reference_files.hpp"
#include "spectrum_zoo.hpp"

namespace trotline {
namespace {

SpectrumFile open(const std::string& bytes, const std::string& name = "zoo",
                  const SpectrumOptions& options = {}) {
  return SpectrumFile(bytes, name, options);
}

MeasurementOptions zoo_options() {
  MeasurementOptions options;
  options.vlsr_km_s = zoo::kVlsrKmS;
  options.window_km_s = 12.0;  // 6.1 standard deviations to each side hold all but 1e-9 of a Gaussian
  options.baseline.order = 1;
  return options;
}

TEST(SpectrumZoo, TheSameSourceComesOutOfEveryFile) {
  const auto specimens = zoo::specimens();
  EXPECT_GE(specimens.size(), 24U);
  for (const zoo::Specimen& specimen : specimens) {
    SCOPED_TRACE(specimen.name);
    const SpectrumFile file = open(specimen.bytes, specimen.name);
    ASSERT_EQ(file.size(), specimen.spectra);
    for (std::size_t i = 0; i < file.size(); ++i) {
      const Spectrum spectrum = file.read(i);
      const auto measured = measure_lines(spectrum, {{"1-0", zoo::kRestHz}}, zoo_options());
      ASSERT_EQ(measured.lines.size(), 1U);
      const LineMeasurement& line = measured.lines[0];
      ASSERT_EQ(line.status, LineStatus::measured) << line.trouble;
      EXPECT_NEAR(line.intensity / (zoo::true_area() * specimen.per_kelvin), 1.0, specimen.tolerance);
      ASSERT_TRUE(line.gaussian.has_value());
      EXPECT_NEAR(line.gaussian->velocity_km_s.value, zoo::kVlsrKmS, 1e-3);  // 1 m/s
      EXPECT_NEAR(line.gaussian->fwhm_km_s.value, zoo::kFwhmKmS, 1e-3);
      EXPECT_TRUE(line.is_trusted());
    }
  }
}

TEST(SpectrumZoo, KeywordsComeAlong) {
  const Spectrum spectrum = open(zoo::image(zoo::vrad())).read(0);
  EXPECT_EQ(spectrum.object, "Invented Pond");
  EXPECT_NEAR(spectrum.beam_fwhm_rad.value(), 0.006 * std::numbers::pi / 180.0, 1e-12);
  EXPECT_EQ(spectrum.rest_frequency_hz, zoo::kRestHz);
  EXPECT_EQ(spectrum.axis_type, "VRAD");
  EXPECT_EQ(spectrum.scale, IntensityScale::main_beam);
  EXPECT_EQ(open(zoo::image(zoo::freq(), {.unit = "K (Ta*)"})).read(0).scale, IntensityScale::antenna);
  EXPECT_EQ(open(zoo::image(zoo::freq(), {.unit = "mJy/beam"})).read(0).scale, IntensityScale::flux_per_beam);
  const SpectrumFile table = open(zoo::table(zoo::vrad(), 2, "E", true));
  EXPECT_EQ(table.read(1).object, "pond 2");
  EXPECT_EQ(table.read(1).name, "zoo, extension 1, row 2");
}

TEST(SpectrumZoo, HolesAreNotZeros) {
  std::string bytes;
  {
    FitsBuilder fits;
    fits.image(LONG_IMG, {zoo::kChannels});
    zoo::axis_keywords(fits, zoo::vrad());
    fits.key("BUNIT", std::string("K"));
    fits.key("BSCALE", 1e-6);
    fits.key("BZERO", 0.0);
    fits.key("BLANK", -999);
    fits.rescan();
    std::vector<double> values = zoo::vrad().samples();
    values[10] = -999e-6;
    fits.pixels(values);
    bytes = fits.bytes();
  }
  const Spectrum with_blank = open(bytes).read(0);
  EXPECT_TRUE(std::isnan(with_blank.intensity(10)));
  EXPECT_EQ((with_blank.intensity.isNaN()).count(), 1);

  FitsBuilder masked;
  zoo::add_image(masked, zoo::vrad());
  masked.image(BYTE_IMG, {zoo::kChannels});
  masked.key("EXTNAME", std::string("MASK"));
  std::vector<double> mask(zoo::kChannels, 0.0);
  mask[20] = mask[21] = 1.0;
  masked.pixels(mask);
  const SpectrumFile file = open(masked.bytes());
  ASSERT_EQ(file.size(), 1U);
  EXPECT_EQ(file.read(0).intensity.isNaN().count(), 2);
  EXPECT_TRUE(std::isnan(file.read(0).intensity(21)));

  std::vector<double> values = zoo::vrad().samples();
  values[5] = std::numeric_limits<double>::quiet_NaN();
  values[6] = std::numeric_limits<double>::infinity();
  FitsBuilder floats;
  floats.image(FLOAT_IMG, {zoo::kChannels});
  zoo::axis_keywords(floats, zoo::vrad());
  floats.key("BUNIT", std::string("K"));
  floats.pixels(values);
  EXPECT_EQ(open(floats.bytes()).read(0).intensity.isNaN().count(), 2);

  const Spectrum text =
      open("# frame: LSRK\nfrequency [GHz],intensity [K],mask\n100,1,0\n100.1,,0\n100.2,3,1\n100.3,nan,0\n")
          .read(0);
  EXPECT_EQ(text.intensity.isNaN().count(), 3);
}

TEST(SpectrumZoo, FlagsOfATableMaskChannels) {
  FitsBuilder fits;
  fits.table({{"DATA", "8E", "K"}, {"FLAGS", "8B", ""}});
  zoo::axis_keywords(fits, zoo::vrad());
  fits.put(1, 1, std::vector<double>(8, 1.5));
  fits.put(2, 1, std::vector<double>{0, 0, 1, 0, 0, 0, 0, 4});
  const Spectrum spectrum = open(fits.bytes()).read(0);
  EXPECT_EQ(spectrum.intensity.isNaN().count(), 2);
  EXPECT_TRUE(std::isnan(spectrum.intensity(7)));
}

TEST(SpectrumZoo, TopocentricSpectraAreMovedToTheLsr) {
  // The ratio is the one that astropy gives for this place, date and direction:
  // tests/reference/spectral_axes.py, entry topocent_0: 115203496269.07019 / 115187861000.0.
  zoo::Axis axis = zoo::with(zoo::freq(), "FREQ",
                             {{"SPECSYS", "TOPOCENT"},
                              {"DATE-OBS", "2015-02-11T02:03:04.5"},
                              {"RA", "83.81"},
                              {"DEC", "-5.375"},
                              {"OBSGEO-X", "2225142.0"},
                              {"OBSGEO-Y", "-5440307.0"},
                              {"OBSGEO-Z", "-2481029.0"}});
  axis.frame_ratio = 115203496269.07019 / 115187861000.0;
  const Spectrum spectrum = open(zoo::image(axis)).read(0);
  EXPECT_EQ(spectrum.frame, RestFrame::topocentric);
  const auto measured = measure_lines(spectrum, {{"1-0", zoo::kRestHz}}, zoo_options());
  EXPECT_NEAR(measured.lines.at(0).gaussian.value().velocity_km_s.value, zoo::kVlsrKmS, 1e-3);  // 1 m/s
}

TEST(SpectrumZoo, RealFilesAreOpenedOrRefusedWithTheReason) {
  const std::map<std::string, std::string> expected = {
      {"iras2a_hdo_vrad_no_cunit_jybeam.fits", "a cube of 3 x 4 x 7 x 1 values"},
      {"small_equatorial_vopt.fits", "a cube of 7 x 5 x 4 values"},
      {"freq_then_stokes_axis4_hz_uppercase.fits", "a cube of 20 x 20 x 20 x 4 values"},
      {"multi_extension_sci_err_dq_no_spectral.fits", "no spectrum"},
      {"two_axis_image_no_spectral_axis.fits", "an image without spectral axis"}};
  for (const auto& [name, reason] : expected) {
    const auto path = test::reference_file("fits/" + name);
    if (path.empty()) GTEST_SKIP() << "no folder of real files";
    try {
      const SpectrumFile file(path.string());
      ADD_FAILURE() << name << " was opened";
    } catch (const InputError& error) {
      EXPECT_THAT(error.what(), testing::AllOf(testing::HasSubstr(name), testing::HasSubstr(reason)));
    }
  }
}

TEST(SpectrumZoo, AThreadMayReadWhileAnotherDoes) {
  const SpectrumFile file = open(zoo::table(zoo::vrad(), 8, "E", true));
  std::vector<std::thread> threads;
  for (int t = 0; t < 4; ++t) {
    threads.emplace_back([&] {
      for (std::size_t i = 0; i < file.size(); ++i)
        EXPECT_EQ(file.read(i).object, "pond " + std::to_string(i + 1));
    });
  }
  for (std::thread& thread : threads) thread.join();
}

}  // namespace
}  // namespace trotline
