// Damaged files of spectra: each must be refused with the file and the keyword or the part that is wrong.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <random>

#include <trotline/base/errors.hpp>
#include <trotline/observation/line_measurement.hpp>

#include "spectrum_zoo.hpp"

#if defined(__SANITIZE_ADDRESS__)
/// CFITSIO 4.2 does not free its buffer when a compressed tile is damaged; the process is not harmed.
extern "C" const char* __lsan_default_suppressions() { return "leak:imcomp_decompress_tile\n"; }
#endif

namespace trotline {
namespace {

/// Opens and reads everything. @return the error, or "no error"
std::string outcome(const std::string& bytes) {
  try {
    const SpectrumFile file(bytes, "damaged.fits", {});
    for (std::size_t i = 0; i < file.size(); ++i) (void)file.read(i);
  } catch (const InputError& error) {
    return error.what();
  }
  return "no error";
}

/// Replaces the value of a keyword, in columns 11 to 30 of its card; the last card of that name where `last`.
std::string with_value(std::string bytes, const std::string& keyword, const std::string& value,
                       bool last = false) {
  std::string name = keyword;
  name.resize(8, ' ');
  name += "= ";
  const std::size_t at = last ? bytes.rfind(name) : bytes.find(name);
  if (at == std::string::npos) throw std::runtime_error("no keyword " + keyword);
  std::string field = value;
  if (field.size() < 20) field.insert(0, 20 - field.size(), ' ');
  if (value.starts_with('\'')) {
    field = value;
    field.resize(std::max<std::size_t>(20, value.size()), ' ');
  }
  return bytes.replace(at + 10, field.size(), field);
}

/// Renames a keyword, so that it is missing.
std::string without(std::string bytes, const std::string& keyword) {
  std::string name = keyword;
  name.resize(8, ' ');
  const std::size_t at = bytes.find(name + "=");
  if (at == std::string::npos) throw std::runtime_error("no keyword " + keyword);
  return bytes.replace(at, 8, "XXXXXXXX");
}

/// A byte that is no blank behind a keyword's '=': CFITSIO then finds no value, and once used what lay in memory.
std::string good_with_sign(std::string bytes, const std::string& keyword) {
  std::string name = keyword;
  name.resize(8, ' ');
  bytes.at(bytes.find(name + "= ") + 9) = '\xEF';
  return bytes;
}

constexpr long kCube = 256;

std::string one_image() { return zoo::image(zoo::vrad()); }
std::string one_table() { return zoo::table(zoo::vrad(), 2, "E", true); }

struct Damaged {
  const char* name;
  std::string bytes;
  const char* found;
};

void PrintTo(const Damaged& damaged, std::ostream* stream) { *stream << damaged.name; }

class DamagedSpectrum : public testing::TestWithParam<Damaged> {};

TEST_P(DamagedSpectrum, IsRefusedByName) {
  const std::string message = outcome(GetParam().bytes);
  EXPECT_THAT(message, testing::StartsWith("damaged.fits"));
  EXPECT_THAT(message, testing::HasSubstr(GetParam().found));
  EXPECT_THAT(message, testing::HasSubstr("; expected "));
}

std::vector<Damaged> damaged_images() {
  const std::string good = one_image();
  return {
      {"Empty", "", "the table is empty"},
      {"OneByte", "S", "no column of frequencies"},
      {"HeaderCut", good.substr(0, 1000), "the keyword END is missing"},
      {"DataCut", good.substr(0, 4000), "its data should take 4096 bytes"},
      {"NoData", good.substr(0, 2880), "its data should take 4096 bytes"},
      {"NotSimple", with_value(good, "SIMPLE", "F"), "keyword SIMPLE is 'F'"},
      {"BitpixOdd", with_value(good, "BITPIX", "7"), "keyword BITPIX is '7'"},
      {"BitpixMissing", without(good, "BITPIX"), "keyword BITPIX is missing"},
      {"NaxisTooLarge", with_value(good, "NAXIS", "3"), "keyword NAXIS2 is missing"},
      {"NaxisNegative", with_value(good, "NAXIS", "-1"), "keyword NAXIS is '-1'"},
      {"NaxisText", with_value(good, "NAXIS", "'one'"), "keyword NAXIS is 'one'"},
      {"LengthNegative", with_value(good, "NAXIS1", "-5"), "keyword NAXIS1 is '-5'"},
      {"LengthAbsurd", with_value(good, "NAXIS1", "99999999999999"), "keyword NAXIS1"},
      {"NoBlankAfterTheSign", good_with_sign(good, "NAXIS1"), "keyword NAXIS1 is missing"},
      {"TextWithoutEnd", with_value(good, "CTYPE1", "'VRAD"), "keyword CTYPE1"},
      {"LengthOverflows", with_value(good, "NAXIS1", "9223372036854775807"),
       "keyword NAXIS1 is '9223372036854775807'"},
      {"LengthZero", with_value(good, "NAXIS1", "0"), "the file holds no spectrum"},
      {"StepZero", with_value(good, "CDELT1", "0.0"), "keyword CDELT1 is 0"},
      {"StepMissing", without(good, "CDELT1"), "keyword CDELT1 is missing"},
      {"PixelNotANumber", with_value(good, "CRPIX1", "NaN"), "keyword CRPIX1 is 'NaN'"},
      {"ValueInfinite", with_value(good, "CRVAL1", "Infinity"), "keyword CRVAL1 is 'Infinity'"},
      {"ValueMissing", without(good, "CRVAL1"), "keyword CRVAL1 is missing"},
      {"NoRestFrequency", without(good, "RESTFRQ"), "keyword RESTFRQ is missing"},
      {"RestFrequencyAbsurd", with_value(good, "RESTFRQ", "1000.0"), "keyword RESTFRQ is 1000 Hz"},
      {"NoFrame", without(good, "SPECSYS"), "the frame of the spectral axis is not given"},
      {"UnknownFrame", with_value(good, "SPECSYS", "'ROCKET'"), "keyword SPECSYS is 'ROCKET'"},
      {"UnknownType", with_value(good, "CTYPE1", "'WARP'"), "CTYPE1 = 'WARP'"},
      {"NoType", without(good, "CTYPE1"), "no keyword CTYPEn at all"},
      {"UnknownAxisUnit", with_value(good, "CUNIT1", "'knot'"), "CUNIT 'knot'"},
      {"NoUnit", without(good, "BUNIT"), "BUNIT) is missing"},
      {"UnknownUnit", with_value(good, "BUNIT", "'counts'"), "the unit of the intensities is 'counts'"},
      {"UnitOfAnotherKind", with_value(good, "BUNIT", "'MJy/sr'"), "the unit of the intensities is 'MJy/sr'"},
      {"BeamNotANumber", with_value(good, "BMAJ", "NaN"), "keyword BMAJ is 'NaN'"},
      {"ControlCharacter",
       [&] {
         std::string b = good;
         b[85] = '\n';
         return b;
       }(),
       "control character"},
      {"NoSpectralAxis", with_value(good, "CTYPE1", "'RA---SIN'"), "an image without spectral axis"},
      {"Cube", zoo::image(zoo::vrad(), {.lengths = {kCube, 4}}), "a cube of 256 x 4 values"},
      {"GzipCut", zoo::gzipped(good).substr(0, 500), "the gzip file ends too early"},
      {"GzipHeaderOnly", zoo::gzipped(good).substr(0, 12), "the gzip file ends too early"},
      {"GzipDamaged",
       [&] {
         std::string b = zoo::gzipped(good);
         b.replace(40, 60, std::string(60, '\x55'));
         return b;
       }(),
       "the gzip file is damaged"},
      {"GzipOfSomethingElse", zoo::gzipped("hello"), "no column of frequencies"},
  };
}

std::vector<Damaged> damaged_tables() {
  const std::string good = one_table();
  const std::string packed = zoo::image(zoo::freq(), {.compression = GZIP_1});
  return {
      {"ColumnMissing", with_value(good, "TTYPE1", "'DATUM'"), "a table without a vector column DATA"},
      {"RowsAbsurd", with_value(good, "NAXIS2", "9999999"), "its data should take"},
      {"WidthWrong", with_value(good, "NAXIS1", "4000"),
       "keyword NAXIS1 says 4000 bytes a row but the columns take"},
      {"FormUnknown", with_value(good, "TFORM1", "'1024Z'"), "keyword TFORM1 is '1024Z'"},
      {"FormMissing", without(good, "TFORM2"), "keyword TFORM2 is missing"},
      {"FieldsTooMany", with_value(good, "TFIELDS", "12"), "keyword TFORM8 is missing"},
      {"FieldsNegative", with_value(good, "TFIELDS", "-1"), "keyword TFIELDS is '-1'"},
      {"HeapNegative", with_value(good, "PCOUNT", "-2880"), "keyword PCOUNT is '-2880'"},
      {"GroupsZero", with_value(good, "GCOUNT", "0"), "keyword GCOUNT is '0'"},
      {"TextInPlaceOfSpectra", with_value(good, "TFORM1", "'4096A'"), "does not hold arrays of numbers"},
      {"ShapeOfAnotherSize", with_value(good, "TTYPE7", "'TDIM1'"), "no keyword CTYPEn at all"},
      {"UnknownUnit", with_value(good, "TUNIT1", "'V'"), "the unit of the intensities is 'V'"},
      {"UnitMissing", without(good, "TUNIT1"), "BUNIT) is missing"},
      {"FrameMissing", without(good, "SPECSYS"), "the frame of the spectral axis is not given"},
      {"DataCut", good.substr(0, good.size() - 4000), "its data should take"},
      {"NoRows", zoo::table(zoo::vrad(), 0, "E", true), "a table without rows"},
      {"CompressionUnknown", with_value(packed, "ZCMPTYPE", "'SQUASH'"), "keyword ZCMPTYPE is 'SQUASH'"},
      {"CompressedSizeAbsurd", with_value(packed, "ZNAXIS1", "999999999"), "absurdly larger"},
      {"CompressedTileAbsurd", with_value(packed, "ZTILE1", "99999999"), "ZTILE1 = 99999999"},
      {"CompressedAxes", with_value(packed, "ZNAXIS", "77"), "keyword ZNAXIS is 77"},
  };
}

std::vector<Damaged> damaged_texts() {
  const std::string head = "# rest_frequency: 100 GHz\n";
  return {
      {"NoHeader", "1.0 2.0\n2.0 3.0\n", "the first line holds the number"},
      {"NoAxis", "channel intensity [K]\n1 2\n2 3\n", "no column of frequencies, velocities or wavelengths"},
      {"NoIntensity", "v_lsr [km/s] flux [K]\n1 2\n2 3\n", "no column 'intensity'"},
      {"NoAxisUnit", head + "v_lsr intensity [K]\n1 2\n2 3\n", "column 'v_lsr' has no unit"},
      {"NoIntensityUnit", head + "v_lsr [km/s] intensity\n1 2\n2 3\n", "BUNIT) is missing"},
      {"WrongAxisUnit", head + "v_lsr [GHz] intensity [K]\n1 2\n2 3\n", "is a unit of a frequency"},
      {"NoRestFrequency", "v_lsr [km/s] intensity [K]\n1 2\n2 3\n", "its rest frequency is not given"},
      {"BadRestFrequency", "# rest_frequency: 100\nv_lsr [km/s] intensity [K]\n1 2\n2 3\n",
       "'100' has no unit"},
      {"NoFrame", "frequency [GHz] intensity [K]\n1 2\n2 3\n", "the frame of the axis is not given"},
      {"OtherFrame", "# frame: TOPO\nfrequency [GHz] intensity [K]\n1 2\n2 3\n", "the frame is 'TOPO'"},
      {"NotSteady", head + "v_lsr [km/s] intensity [K]\n1 2\n2 3\n1.5 3\n",
       "does not go on in the same sense"},
      {"Repeated", head + "v_lsr [km/s] intensity [K]\n1 2\n1 3\n", "does not go on in the same sense"},
      {"OneChannel", head + "v_lsr [km/s] intensity [K]\n1 2\n", "the spectrum has 1 channels"},
      {"NoChannels", head + "v_lsr [km/s] intensity [K]\n", "the spectrum has 0 channels"},
      {"NoNumber", head + "v_lsr [km/s] intensity [K]\n1 2\n2 x\n", "column 'intensity' holds 'x'"},
      {"AxisNotFinite", head + "v_lsr [km/s] intensity [K]\nnan 2\n2 3\n", "column 'v_lsr' holds 'nan'"},
      {"NegativeFrequency", "# frame: LSRK\nfrequency [GHz] intensity [K]\n-1 2\n2 3\n",
       "gives no frequency above 0"},
      {"TwoAxes", "v_lsr [km/s] frequency [GHz] intensity [K]\n1 2 3\n2 3 4\n", "two columns for the axis"},
      {"Ragged", head + "v_lsr [km/s] intensity [K]\n1 2\n2\n", "1 cells in this row"},
      {"BadMask", head + "v_lsr [km/s] intensity [K] mask\n1 2 0\n2 3 no_idea\n",
       "column 'mask' holds 'no_idea'"},
      {"BadScale", "# scale: TR*\n" + head + "v_lsr [km/s] intensity [K]\n1 2\n2 3\n",
       "the comment 'scale' is 'TR*'"},
      {"NulByte", std::string("v_lsr [km/s] intensity [K]\n1 2\n2 \0 3\n", 38), "a NUL byte"},
  };
}

INSTANTIATE_TEST_SUITE_P(Images, DamagedSpectrum, testing::ValuesIn(damaged_images()),
                         [](const auto& damaged) { return damaged.param.name; });
INSTANTIATE_TEST_SUITE_P(Tables, DamagedSpectrum, testing::ValuesIn(damaged_tables()),
                         [](const auto& damaged) { return damaged.param.name; });
INSTANTIATE_TEST_SUITE_P(Texts, DamagedSpectrum, testing::ValuesIn(damaged_texts()),
                         [](const auto& damaged) { return damaged.param.name; });

TEST(DamagedSpectrum, EveryTruncationIsAnErrorOrTheSameSpectra) {
  for (const std::string& whole : {one_image(), one_table(), zoo::gzipped(one_image()),
                                   zoo::image(zoo::freq(), {.compression = GZIP_1})}) {
    const SpectrumFile good(whole, "whole", {});
    const Eigen::ArrayXd expected = good.read(0).intensity;
    for (std::size_t size = 0; size < whole.size(); size += 149) {
      try {
        const SpectrumFile file(whole.substr(0, size), "part", {});
        ASSERT_EQ(file.size(), good.size());
        EXPECT_TRUE((file.read(0).intensity == expected).all()) << size;
      } catch (const InputError&) {
        SUCCEED();
      }
    }
  }
}

TEST(DamagedSpectrum, FlippedBytesOfHeadersNeverCrash) {
  std::mt19937 random(3);
  for (const std::string& whole :
       {one_image(), one_table(), zoo::image(zoo::freq(), {.compression = GZIP_1})}) {
    for (int i = 0; i < 400; ++i) {
      std::string bytes = whole;
      for (int k = 0; k < 4; ++k)
        bytes[random() % std::min<std::size_t>(bytes.size(), 11520)] = static_cast<char>(random());
      (void)outcome(bytes);
    }
  }
}

}  // namespace
}  // namespace trotline
