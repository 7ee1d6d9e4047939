#include <fstream>
#include <numbers>
#include <random>
#include <sstream>

#include <trotline/observation/intensity_table.hpp>

#include "table_support.hpp"

namespace trotline {
namespace {

constexpr double kArcsecRad = std::numbers::pi / 648000.0;  // 180 * 3600 arcsec are pi rad

IntensityTable parse(const std::string& text) { return parse_intensity_table(text, "lines.csv"); }

std::string reference(const std::string& name) {
  std::ifstream stream(std::string(TROTLINE_SOURCE_DIR "/tests/reference/") + name, std::ios::binary);
  std::stringstream bytes;
  bytes << stream.rdbuf();
  EXPECT_FALSE(bytes.str().empty()) << name;
  return bytes.str();
}

TEST(IntensityTable, CsvIsReadWithItsUnits) {
  const auto table = parse(
      "# made for this test\r\n"
      "transition,frequency [GHz],intensity [K km/s],intensity_error [K km/s],beam_fwhm [arcsec],limit\r\n"
      "1-0,115.271,4.21,0.08,27.0,false\r\n"
      "\r\n"
      "2-1,230.538,-0.3,0.1,,no\r\n");
  ASSERT_EQ(table.rows.size(), 2U);
  EXPECT_TRUE(table.warnings.empty());
  EXPECT_EQ(table.rows[0].transition, "1-0");
  EXPECT_DOUBLE_EQ(table.rows[0].frequency_hz.value(), 115.271e9);
  EXPECT_EQ(table.rows[0].intensity, 4.21);
  EXPECT_EQ(table.rows[0].intensity_sigma, 0.08);
  EXPECT_DOUBLE_EQ(table.rows[0].beam_fwhm_rad.value(), 27.0 * kArcsecRad);
  EXPECT_FALSE(table.rows[0].is_limit);
  EXPECT_EQ(table.rows[0].line_number, 3U);
  EXPECT_EQ(table.rows[1].line_number, 5U);
  EXPECT_EQ(table.rows[1].intensity, -0.3);
  EXPECT_FALSE(table.rows[1].beam_fwhm_rad.has_value());
}

TEST(IntensityTable, EveryColumnOfTheContractIsUnderstood) {
  const auto table = parse(
      "\xEF\xBB\xBF"
      "Frequency [MHz],Intensity [mK km/s],Intensity_Error [K m/s],SCALE,source,species,beam_fwhm "
      "[arcmin],fwhm [m/s],"
      "calibration_group,calibration_error [%],forward_efficiency [%],main_beam_efficiency,blend,note\n"
      "230538,4210,80,TA*,\"Pond, \"\"the\"\" east\",13CO,0.45,1200,E230,10,95,0.63,A,first\n");
  const IntensityRow& row = table.rows.at(0);
  EXPECT_DOUBLE_EQ(row.frequency_hz.value(), 230.538e9);
  EXPECT_DOUBLE_EQ(row.intensity, 4.21);        // 4210 mK km/s
  EXPECT_DOUBLE_EQ(row.intensity_sigma, 0.08);  // 80 K m/s
  EXPECT_EQ(row.scale, IntensityScale::antenna);
  EXPECT_EQ(row.source, "Pond, \"the\" east");
  EXPECT_EQ(row.species, "13CO");
  EXPECT_DOUBLE_EQ(row.beam_fwhm_rad.value(), 27.0 * kArcsecRad);  // 0.45 arcmin
  EXPECT_DOUBLE_EQ(row.fwhm_km_s.value(), 1.2);
  EXPECT_EQ(row.calibration_group, "E230");
  EXPECT_DOUBLE_EQ(row.calibration_error.value(), 0.1);
  EXPECT_DOUBLE_EQ(row.forward_efficiency.value(), 0.95);
  EXPECT_EQ(row.main_beam_efficiency, 0.63);
  EXPECT_EQ(row.blend, "A");
  EXPECT_EQ(row.note, "first");
}

TEST(IntensityTable, WhiteSpaceTextTakesTabsAndQuotedCells) {
  const auto table = parse(
      "transition\tintensity [K km/s]  intensity_error [K km s-1]\tnote\n"
      "# a comment\n"
      "  \"1(0,1) - 0(0,0)\"  1.5 0.1 \"\"\n"
      "2-1\t2.5\t0.2\t\"two words\"");
  ASSERT_EQ(table.rows.size(), 2U);
  EXPECT_EQ(table.rows[0].transition, "1(0,1) - 0(0,0)");
  EXPECT_FALSE(table.rows[0].note.has_value());
  EXPECT_EQ(table.rows[1].note, "two words");
}

TEST(IntensityTable, FluxPerBeamIsItsOwnScale) {
  const auto table =
      parse("transition,intensity [mJy/beam km/s],intensity_error [Jy/beam km/s]\n1-0,400,0.05\n");
  EXPECT_EQ(table.rows[0].scale, IntensityScale::flux_per_beam);
  EXPECT_DOUBLE_EQ(table.rows[0].intensity, 0.4);
  EXPECT_EQ(table.rows[0].intensity_sigma, 0.05);
}

TEST(IntensityTable, EveryWordForALimitIsUnderstood) {
  for (const auto& [word, limit] : std::vector<std::pair<std::string, bool>>{{"true", true},
                                                                             {"false", false},
                                                                             {"Yes", true},
                                                                             {"NO", false},
                                                                             {"1", true},
                                                                             {"0", false},
                                                                             {"T", true},
                                                                             {"f", false},
                                                                             {"", false}}) {
    const auto table =
        parse("transition,intensity [K km/s],intensity_error [K km/s],limit\n1-0,1,0.3," + word + "\n");
    EXPECT_EQ(table.rows[0].is_limit, limit) << word;
  }
}

TEST(IntensityTable, OnlyALimitMayGoWithoutAnError) {
  const auto table = parse("transition,intensity [K km/s],limit\n1-0,1,true\n");
  EXPECT_TRUE(table.rows[0].is_limit);
  EXPECT_TRUE(std::isnan(table.rows[0].intensity_sigma));
}

TEST(IntensityTable, UnknownColumnsAreNamedAndNotUsed) {
  const auto table = parse(
      "transition,intensity [K km/s],intensity_error [K km/s],intensity_eror [K km/s],rms\n1-0,1,0.1,9,3\n");
  ASSERT_EQ(table.warnings.size(), 2U);
  EXPECT_THAT(table.warnings[0],
              testing::AllOf(testing::HasSubstr("'intensity_eror'"), testing::HasSubstr("passed over"),
                             testing::HasSubstr("did you mean 'intensity_error'?")));
  EXPECT_THAT(table.warnings[1], testing::HasSubstr("'rms'"));
  EXPECT_EQ(table.rows[0].intensity_sigma, 0.1);
}

TEST(IntensityTable, QuotedCellsMayRunOverLines) {
  const auto table =
      parse("transition,intensity [K km/s],intensity_error [K km/s],note\n1-0,1,0.1,\"a\nb\"\n2-1,1,0.1,c\n");
  EXPECT_EQ(table.rows[0].note, "a\nb");
  EXPECT_EQ(table.rows[1].line_number, 4U);
}

TEST(IntensityTable, LinesMayEndInCarriageReturnsAlone) {
  const auto table = parse("transition,intensity [K km/s],intensity_error [K km/s]\r1-0,1,0.1\r2-1,2,0.1");
  ASSERT_EQ(table.rows.size(), 2U);
  EXPECT_EQ(table.rows[1].line_number, 3U);
}

TEST(IntensityTable, EcsvWrittenByAnIndependentLibraryIsRead) {
  // Written by astropy 5.2.1 with tests/reference/ecsv_check.py, which holds the same numbers.
  for (const char* name : {"astropy_space.ecsv", "astropy_comma.ecsv"}) {
    SCOPED_TRACE(name);
    const auto table = parse_intensity_table(reference(name), name);
    ASSERT_EQ(table.rows.size(), 3U);
    EXPECT_EQ(table.rows[0].transition, "1(0,1)-0(0,0)");
    EXPECT_DOUBLE_EQ(table.rows[0].frequency_hz.value(), 115.271e9);
    EXPECT_EQ(table.rows[0].intensity, 4.21);
    EXPECT_EQ(table.rows[0].intensity_sigma, 0.08);
    EXPECT_DOUBLE_EQ(table.rows[0].beam_fwhm_rad.value(), 27.4 * kArcsecRad);
    EXPECT_EQ(table.rows[0].note, "a \"quoted\" word, and a comma");
    EXPECT_FALSE(table.rows[1].beam_fwhm_rad.has_value());  // masked there
    EXPECT_FALSE(table.rows[1].note.has_value());
    EXPECT_TRUE(table.rows[2].is_limit);
    EXPECT_FALSE(table.rows[1].is_limit);
  }
}

IntensityTable golden_table() {
  IntensityTable table;
  IntensityRow row;
  row.transition = "1(0,1)-0(0,0)";
  row.frequency_hz = 115.271 * 1e9;
  row.intensity = 4.21;
  row.intensity_sigma = 0.08;
  row.beam_fwhm_rad = 27.4 * 4.8481368110953598e-06;  // 27.4 arcsec: pi/648000 rad each
  row.note = "a \"quoted\" word, and a comma";
  table.rows.push_back(row);
  row.transition = "2-1";
  row.frequency_hz = 230.538 * 1e9;
  row.intensity = -0.5;
  row.beam_fwhm_rad.reset();
  row.note.reset();
  table.rows.push_back(row);
  row.transition = "#3-2";
  row.frequency_hz = 345.796 * 1e9;
  row.intensity = 1.0;
  row.intensity_sigma = std::numeric_limits<double>::quiet_NaN();
  row.is_limit = true;
  row.note = "Größe µ";
  table.rows.push_back(row);
  return table;
}

TEST(IntensityTable, WrittenEcsvIsTheTextThatAstropyReads) {
  // tests/reference/ecsv_check.py reads this file with astropy and compares every value and unit.
  EXPECT_EQ(to_ecsv(golden_table()), reference("trotline_table.ecsv"));
}

TEST(IntensityTable, MixedUnitsCannotBeWritten) {
  IntensityTable table = golden_table();
  table.rows[1].scale = IntensityScale::flux_per_beam;
  EXPECT_THROW((void)to_ecsv(table), InputError);
  table = golden_table();
  table.rows[0].intensity = std::numeric_limits<double>::infinity();
  EXPECT_THROW((void)to_ecsv(table), DomainError);
}

std::string random_text(std::mt19937_64& random) {
  static const std::vector<std::string> kPieces = {"a", "Z", "0", " ", ",", "\"", "\n", "\t", "#",    "[",
                                                   "]", "é", "{", ":", "-", "'",  "%",  "\\", "\r\n", "µ"};
  std::string text;
  for (std::size_t i = 1 + random() % 8; i > 0; --i) text += kPieces[random() % kPieces.size()];
  return text;
}

/// Any double with these bits in its mantissa, of a size that keeps its unit conversions finite.
double random_double(std::mt19937_64& random, double scale) {
  return scale * std::ldexp(1.0 + std::ldexp(static_cast<double>(random() >> 12U), -52),
                            static_cast<int>(random() % 40) - 20);
}

IntensityRow random_row(std::mt19937_64& random, bool flux) {
  const auto maybe = [&] { return random() % 3 != 0; };
  IntensityRow row;
  if (maybe()) row.transition = random_text(random);
  if (!row.transition || maybe()) row.frequency_hz = random_double(random, 1e11);
  row.intensity = random_double(random, random() % 2 == 0 ? 1.0 : -1.0);
  row.intensity_sigma = random_double(random, 0.1);
  row.scale = flux      ? IntensityScale::flux_per_beam
              : maybe() ? IntensityScale::main_beam
                        : IntensityScale::antenna;
  row.is_limit = row.intensity > 0.0 && !maybe();
  if (row.is_limit && !maybe()) row.intensity_sigma = std::numeric_limits<double>::quiet_NaN();
  if (maybe()) row.source = random_text(random);
  if (maybe()) row.species = random_text(random);
  if (maybe()) row.beam_fwhm_rad = random_double(random, 1e-4);
  if (maybe()) row.fwhm_km_s = random_double(random, 1.0);
  if (maybe()) row.calibration_group = random_text(random);
  if (maybe()) row.calibration_error = std::ldexp(static_cast<double>(random() >> 12U), -52);
  if (maybe()) row.main_beam_efficiency = 0.25 + std::ldexp(static_cast<double>(random() >> 13U), -52);
  if (maybe()) row.forward_efficiency = 0.75 + std::ldexp(static_cast<double>(random() >> 14U), -52);
  if (maybe()) row.blend = random_text(random);
  if (maybe()) row.note = random_text(random);
  return row;
}

TEST(IntensityTable, RoundTripThroughEcsvKeepsEveryBit) {
  std::mt19937_64 random(20240229);
  for (int draw = 0; draw < 300; ++draw) {
    IntensityTable table;
    const bool flux = random() % 4 == 0;
    for (std::size_t i = 1 + random() % 6; i > 0; --i) table.rows.push_back(random_row(random, flux));
    const std::string text = to_ecsv(table);
    SCOPED_TRACE(text);
    expect_same_rows(table, parse_intensity_table(text, "again.ecsv"));
    if (HasFailure()) return;
  }
}

}  // namespace
}  // namespace trotline
