// Broken tables: each must say where, what was found and what was expected.
#include <trotline/observation/intensity_table.hpp>

#include "table_support.hpp"

namespace trotline {
namespace {

struct Broken {
  const char* name;
  std::string bytes;
  const char* place;  ///< how the message begins
  const char* found;
  const char* expected;
};

void PrintTo(const Broken& broken, std::ostream* stream) { *stream << broken.name; }

std::string message_of(const std::string& bytes) {
  try {
    (void)parse_intensity_table(bytes, "bad");
  } catch (const InputError& error) {
    return error.what();
  }
  return "no error";
}

class BrokenTable : public testing::TestWithParam<Broken> {};

TEST_P(BrokenTable, IsRefusedWithPlaceFindingAndExpectation) {
  const std::string message = message_of(GetParam().bytes);
  EXPECT_THAT(message, testing::StartsWith(GetParam().place));
  EXPECT_THAT(message, testing::HasSubstr(GetParam().found));
  EXPECT_THAT(message, testing::HasSubstr(std::string("; expected ") + GetParam().expected));
  for (const char c : message) EXPECT_GE(static_cast<unsigned char>(c), 0x20U) << "one printable line";
}

const std::string kHeader =
    "transition,frequency [GHz],intensity [K km/s],intensity_error [K km/s],beam_fwhm [arcsec],limit\n";
const std::string kGood = "1-0,115.271,4.21,0.08,27.0,false\n";

std::string with_row(const std::string& row) { return kHeader + kGood + row + "\n"; }

std::string with_column(const std::string& column, const std::string& cell) {
  return "transition,intensity [K km/s],intensity_error [K km/s]," + column + "\n1-0,1,0.1," + cell + "\n";
}

std::string ecsv(const std::string& yaml,
                 const std::string& rest = "transition,intensity,intensity_error\n1-0,1,0.1\n") {
  return "# %ECSV 1.0\n" + yaml + rest;
}

const std::string kEcsvColumns =
    "# delimiter: ','\n# datatype:\n# - {name: transition, datatype: string}\n"
    "# - {name: intensity, unit: K km / s, datatype: float64}\n";

const std::vector<Broken> kText = {
    {"Empty", "", "bad: ", "the table is empty", "a header line"},
    {"OnlyComments", "# a\n\n#b\n", "bad: ", "the table is empty", "a header line"},
    {"NoRows", kHeader, "bad:1: ", "the table has no row", "one row"},
    {"NoHeader", "1-0,115.271,4.21,0.08,27.0,false\n", "bad:1: ", "holds the number '115.271'",
     "a header line"},
    {"HeaderInComment", "# frequency [GHz] intensity [K km/s] intensity_error [K km/s]\n115.3 4 0.1\n",
     "bad:2: ", "holds the number '115.3'",
     "a header line with the names of the columns; a header line does not begin with '#'"},
    {"Semicolons", "transition;intensity [K km/s];intensity_error [K km/s]\n1-0;4;0.1\n",
     "bad:1: ", "separated by ';'", "columns separated by commas"},
    {"ShortRow", with_row("2-1,230.538,4.0"), "bad:3: ", "3 cells", "6"},
    {"LongRow", with_row("2-1,230.538,4.0,0.1,12,false,x"), "bad:3: ", "7 cells", "6"},
    {"DecimalComma", with_row("2-1,230,538,4.0,0.1,12,false"), "bad:3: ", "7 cells", "6"},
    {"NoNumber", with_row("2-1,230.538,abc,0.1,12,false"), "bad:3: ", "column 'intensity' holds 'abc'",
     "a number"},
    {"HalfANumber", with_row("2-1,230.538,4.2x,0.1,12,false"), "bad:3: ", "column 'intensity' holds '4.2x'",
     "a number"},
    {"NumberWithItsUnit", with_row("2-1,230.538 GHz,4.2,0.1,12,false"),
     "bad:3: ", "column 'frequency' holds '230.538 GHz'", "a number"},
    {"NotFinite", with_row("2-1,230.538,nan,0.1,12,false"), "bad:3: ", "column 'intensity' holds 'nan'",
     "a finite number"},
    {"InfiniteError", with_row("2-1,230.538,4,inf,12,false"),
     "bad:3: ", "column 'intensity_error' holds 'inf'", "a finite number"},
    {"Overflow", with_row("2-1,1e305,4,0.1,12,false"), "bad:3: ", "column 'frequency' holds '1e305'",
     "a number that can be computed with"},
    {"ZeroError", with_row("2-1,230.538,4,0,12,false"), "bad:3: ", "column 'intensity_error' holds '0'",
     "a number above 0"},
    {"NegativeError", with_row("2-1,230.538,4,-0.1,12,false"),
     "bad:3: ", "column 'intensity_error' holds '-0.1'", "a number above 0"},
    {"NoErrorGiven", with_row("2-1,230.538,4,,12,false"), "bad:3: ", "column 'intensity_error' is empty",
     "a standard error above 0"},
    {"NoErrorColumn", "transition,intensity [K km/s]\n1-0,4\n",
     "bad:1: ", "there is no column 'intensity_error'", "a column 'intensity_error'"},
    {"MeasurementWithoutErrorColumn", "transition,intensity [K km/s],limit\n1-0,4,true\n2-1,4,false\n",
     "bad:3: ", "this measurement has no error", "the column"},
    {"NoIntensityGiven", with_row("2-1,230.538,,0.1,12,false"), "bad:3: ", "column 'intensity' is empty",
     "a number"},
    {"NoIntensityColumn", "transition,intensty [K km/s],intensity_error [K km/s]\n1-0,1,0.1\n",
     "bad:1: ", "there is no column 'intensity' among transition, intensty, intensity_error",
     "a column 'intensity'; did you mean that by 'intensty'?"},
    {"NoLine", "species,intensity [K km/s],intensity_error [K km/s]\nCO,1,0.1\n",
     "bad:1: ", "there is no column 'frequency'", "a column 'frequency'"},
    {"NeitherTransitionNorFrequency", with_row(",,4,0.1,12,false"),
     "bad:3: ", "neither a transition nor a frequency", "one of them"},
    {"NegativeBeam", with_row("2-1,230.538,4,0.1,-12,false"), "bad:3: ", "column 'beam_fwhm' holds '-12'",
     "a number above 0"},
    {"ZeroFrequency", with_row("2-1,0,4,0.1,12,false"), "bad:3: ", "column 'frequency' holds '0'",
     "a number above 0"},
    {"UnknownLimit", with_row("2-1,230.538,4,0.1,12,maybe"), "bad:3: ", "column 'limit' holds 'maybe'",
     "true or false"},
    {"NegativeLimit", with_row("2-1,230.538,-4,0.1,12,true"), "bad:3: ", "column 'intensity' holds '-4'",
     "an upper limit above 0"},
    {"DoubleColumn",
     "transition,intensity [K km/s],Intensity [K km/s],intensity_error [K km/s]\n1-0,1,1,0.1\n",
     "bad:1: ", "column 'intensity' stands there twice", "each column once"},
    {"NamelessColumn", "transition,intensity [K km/s],intensity_error [K km/s],\n1-0,1,0.1,\n",
     "bad:1: ", "column 4 has no name", "a name for every column"},
    {"NoUnit", "transition,intensity,intensity_error [K km/s]\n1-0,1,0.1\n",
     "bad:1: ", "column 'intensity' has no unit",
     "the unit of an integrated intensity, such as 'K km/s', written as in 'intensity [K km/s]'"},
    {"NoUnitOfFrequency", with_column("frequency", "115"), "bad:1: ", "column 'frequency' has no unit",
     "the unit of a frequency, such as 'GHz'"},
    {"UnknownUnit", with_column("frequency [gigs]", "115"),
     "bad:1: ", "column 'frequency': unit 'gigs' is not known", "a frequency such as '230.538 GHz'"},
    {"WrongUnit", with_column("beam_fwhm [km/s]", "12"),
     "bad:1: ", "column 'beam_fwhm': unit 'km/s' is a unit of a velocity", "an angle"},
    {"UnitOnText", with_column("note [K]", "x"), "bad:1: ", "column 'note' has the unit 'K'", "no unit"},
    {"UnitNotClosed", with_column("frequency [GHz", "115"), "bad:1: ", "opens a unit with '['",
     "a column such as"},
    {"UnitsOfTwoKinds", "transition,intensity [Jy/beam km/s],intensity_error [K km/s]\n1-0,1,0.1\n",
     "bad:1: ", "column 'intensity_error' has the unit 'K km/s'", "the same kind of unit"},
    {"PercentWithoutUnit", with_column("calibration_error", "10"),
     "bad:2: ", "column 'calibration_error' holds '10'",
     "a fraction from 0 to below 1; give a percentage with the unit '%'"},
    {"EfficiencyAboveOne", with_column("forward_efficiency", "95"),
     "bad:2: ", "column 'forward_efficiency' holds '95'", "a fraction above 0 and up to 1"},
    {"BeamEfficiencyAboveForward",
     "transition,intensity [K km/s],intensity_error [K "
     "km/s],forward_efficiency,main_beam_efficiency\n1-0,1,0.1,0.5,0.6\n",
     "bad:2: ", "column 'main_beam_efficiency' holds '0.6'", "a fraction not above forward_efficiency"},
    {"UnknownScale", with_column("scale", "TR*"), "bad:2: ", "column 'scale' holds 'TR*'", "Tmb or TA*"},
    {"ScaleAgainstUnit",
     "transition,intensity [Jy/beam km/s],intensity_error [Jy/beam km/s],scale\n1-0,1,0.1,Tmb\n",
     "bad:2: ", "column 'scale' holds 'Tmb'", "flux_per_beam"},
    {"OpenQuote", with_row("\"2-1,230.538,4,0.1,12,false"), "bad:3: ", "a quotation mark opens here",
     "a closing"},
    {"TextAfterQuote", with_row("\"2-1\"x,230.538,4,0.1,12,false"),
     "bad:3: ", "text follows a closing quotation mark", "the end of the cell"},
    {"OpenQuoteInTextHeader", "\"transition intensity [K km/s]\n1-0 1\n", "bad:1: ", "never closed",
     "a closing"},
    {"OpenUnitInTextHeader", "transition intensity [K km/s\n1-0 1\n",
     "bad:1: ", "the unit of column 'intensity' is not closed", "']'"},
    {"NotUtf8", with_row("2-1\xFF,230.538,4,0.1,12,false"), "bad:3: ", "bytes that are not UTF-8",
     "text in UTF-8"},
    {"NulByte", with_row(std::string("2-1\0,230.538,4,0.1,12,false", 28)), "bad:3: ", "a NUL byte",
     "text in UTF-8"},
    {"Utf16", std::string("\xFF\xFEt\0r\0", 6), "bad:1: ", "UTF-16", "text in UTF-8"},
    {"Gzip", "\x1F\x8B\x08", "bad: ", "a gzip file", "a table as ECSV, CSV, text or FITS; unpack it first"},
    {"Spreadsheet", "PK\x03\x04zzz", "bad: ", "a spreadsheet",
     "a table as ECSV, CSV, text or FITS; save the sheet"},
    {"VoTable", "<?xml version='1.0'?><VOTABLE/>", "bad: ", "an XML file", "a table as ECSV"},
};

const std::vector<Broken> kEcsv = {
    {"Version2", "# %ECSV 2.0\n# datatype:\ntransition\n", "bad:1: ", "'# %ECSV 2.0'", "'# %ECSV 1.0'"},
    {"NoYaml", ecsv("# ---\n# datatype: [\n"), "bad:", "no valid YAML", "an ECSV header"},
    {"YamlLine", ecsv("# delimiter: ','\n# a: {b\n# c: d\n"), "bad:", "no valid YAML", "an ECSV header"},
    {"DeepYaml", ecsv("# " + std::string(20000, '[') + "\n"), "bad:", "no valid YAML", "an ECSV header"},
    {"NoColumns", ecsv("# ---\n"), "bad:1: ", "the header lists no columns", "'datatype:'"},
    {"ScalarYaml", ecsv("# hello\n"), "bad:1: ", "the header lists no columns", "'datatype:'"},
    {"Delimiter", ecsv("# delimiter: '|'\n# datatype:\n# - {name: transition, datatype: string}\n"),
     "bad:1: ", "another delimiter", "delimiter: ','"},
    {"NamelessColumn", ecsv("# datatype:\n# - {datatype: string}\n"), "bad:3: ", "lacks its name",
     "entries such as"},
    {"UnknownDatatype", ecsv("# datatype:\n# - {name: transition, datatype: object}\n"),
     "bad:3: ", "column 'transition' has the datatype 'object'", "a datatype of ECSV 1.0"},
    {"TooFewNames", ecsv(kEcsvColumns), "bad:6: ", "3 names of columns", "2"},
    {"OtherName", ecsv(kEcsvColumns, "transition,intensty\n1-0,1\n"),
     "bad:6: ", "column 2 is named 'intensty'", "'intensity'"},
    {"NothingAfterHeader", ecsv(kEcsvColumns, ""), "bad:5: ", "ends after its header",
     "a line with the column names"},
    {"NoUnit",
     ecsv("# delimiter: ','\n# datatype:\n# - {name: transition, datatype: string}\n"
          "# - {name: intensity, datatype: float64}\n",
          "transition,intensity\n1-0,1\n"),
     "bad:6: ", "column 'intensity' has no unit",
     "the unit of an integrated intensity, such as 'K km/s', written as 'unit:'"},
    {"FractionInWholeColumn",
     ecsv("# delimiter: ','\n# datatype:\n# - {name: transition, datatype: string}\n"
          "# - {name: intensity, unit: K km / s, datatype: int64}\n# - {name: intensity_error, unit: K km / "
          "s, datatype: float64}\n",
          "transition,intensity,intensity_error\n1-0,1.5,0.1\n"),
     "bad:8: ", "column 'intensity' holds '1.5'", "a whole number, as its datatype int64 says"},
};

INSTANTIATE_TEST_SUITE_P(Text, BrokenTable, testing::ValuesIn(kText),
                         [](const auto& broken) { return broken.param.name; });
INSTANTIATE_TEST_SUITE_P(Ecsv, BrokenTable, testing::ValuesIn(kEcsv),
                         [](const auto& broken) { return broken.param.name; });

FitsBuilder::Column frequency() { return {"frequency", "1D", "GHz"}; }
FitsBuilder::Column intensity() { return {"intensity", "1D", "K km/s"}; }
FitsBuilder::Column intensity_error(const std::string& form = "1D") {
  return {"intensity_error", form, "K km/s"};
}

std::string fits_table(const std::vector<FitsBuilder::Column>& columns, int rows = 2) {
  FitsBuilder fits;
  fits.table(columns);
  for (int row = 1; row <= rows; ++row) {
    for (int i = 1; i <= static_cast<int>(columns.size()); ++i) fits.put(i, row, 1.0);
  }
  return fits.bytes();
}

TEST(BrokenFitsTable, WithoutTableIsRefused) {
  FitsBuilder fits;
  fits.run([&](int* status) { fits_create_img(fits.handle(), DOUBLE_IMG, 0, nullptr, status); });
  EXPECT_THAT(message_of(fits.bytes()),
              testing::AllOf(testing::StartsWith("bad: "), testing::HasSubstr("holds no table")));
}

TEST(BrokenFitsTable, UnitsAreDemandedByKeyword) {
  EXPECT_THAT(
      message_of(fits_table({frequency(), {"intensity", "1D", ""}, intensity_error()})),
      testing::AllOf(testing::HasSubstr("column 'intensity' has no unit"), testing::HasSubstr("TUNITn")));
}

TEST(BrokenFitsTable, VectorComplexAndBitColumnsAreRefused) {
  EXPECT_THAT(message_of(fits_table({frequency(), intensity(), intensity_error("4D")})),
              testing::HasSubstr("column 'intensity_error' holds 4 values a row; expected one value a row"));
  EXPECT_THAT(message_of(fits_table({frequency(), intensity(), intensity_error("1C")})),
              testing::HasSubstr("column 'intensity_error' holds complex numbers"));
  EXPECT_THAT(message_of(fits_table({frequency(), intensity(), intensity_error("1PD")}, 0)),
              testing::HasSubstr("column 'intensity_error' holds arrays of variable length"));
}

TEST(BrokenFitsTable, InfiniteAndUndefinedIntensityNameTheRow) {
  for (const double bad :
       {std::numeric_limits<double>::infinity(), std::numeric_limits<double>::quiet_NaN()}) {
    FitsBuilder fits;
    fits.table({frequency(), intensity(), intensity_error()});
    for (int i = 1; i <= 3; ++i) fits.put(i, 1, 1.0);
    for (int i = 1; i <= 3; ++i) fits.put(i, 2, i == 2 ? bad : 1.0);
    EXPECT_THAT(message_of(fits.bytes()), testing::StartsWith("bad:2: column 'intensity' "));
  }
}

TEST(BrokenFitsTable, EveryTruncationIsAnErrorOrTheWholeTable) {
  const std::string whole = fits_table({frequency(), intensity(), intensity_error()}, 400);
  const auto rows = parse_intensity_table(whole, "whole").rows.size();
  for (std::size_t size = 0; size < whole.size(); size += 311) {
    std::string part = whole.substr(0, size);
    try {
      EXPECT_EQ(parse_intensity_table(part, "part").rows.size(), rows) << size;
    } catch (const InputError&) {
      SUCCEED();
    }
  }
}

TEST(BrokenFitsTable, AbsurdSizesAreRefusedBeforeMemoryIsTaken) {
  std::string bytes = fits_table({frequency(), intensity(), intensity_error()});
  const std::size_t naxis2 = bytes.find("NAXIS2  =");
  ASSERT_NE(naxis2, std::string::npos);
  bytes.replace(naxis2 + 10, 20, "  999999999999999999");
  EXPECT_THAT(message_of(bytes), testing::StartsWith("bad: "));
}

TEST(BrokenTableFile, MissingFilesAndFoldersAreNamed) {
  EXPECT_THROW((void)read_intensity_table("/nonexistent/lines.csv"), InputError);
  EXPECT_THROW((void)read_intensity_table("/tmp"), InputError);
}

}  // namespace
}  // namespace trotline
