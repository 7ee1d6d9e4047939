// The same table, written in each format by this test, must be read to identical rows.
#include <random>

#include <trotline/observation/intensity_table.hpp>

#include "table_support.hpp"

namespace trotline {
namespace {

enum class Kind { text, number, flag };

struct Column {
  std::string name;
  std::string unit;
  Kind kind = Kind::text;
  std::vector<std::string> cells;
};

using Columns = std::vector<Column>;

std::string csv_cell(const std::string& text) {
  std::string quoted;
  for (const char c : text) quoted += c == '"' ? std::string("\"\"") : std::string(1, c);
  return "\"" + quoted + "\"";
}

std::string header_name(const Column& column) {
  return column.unit.empty() ? column.name : column.name + " [" + column.unit + "]";
}

/// Rows of cells joined by `separator`, after a header line.
std::string joined(const Columns& columns, const std::string& header, const std::string& separator) {
  std::string text = header + "\n";
  for (std::size_t row = 0; row < columns[0].cells.size(); ++row) {
    for (std::size_t i = 0; i < columns.size(); ++i) {
      const std::string& cell = columns[i].cells[row];
      text +=
          (i == 0 ? "" : separator) + (columns[i].kind == Kind::text || cell.empty() ? csv_cell(cell) : cell);
    }
    text += "\n";
  }
  return text;
}

template <class Name>
std::string header_line(const Columns& columns, const std::string& separator, const Name& name) {
  std::string text;
  for (std::size_t i = 0; i < columns.size(); ++i) text += (i == 0 ? "" : separator) + name(columns[i]);
  return text;
}

std::string as_csv(const Columns& columns) {
  return joined(columns, header_line(columns, ",", header_name), ",");
}

std::string as_text(const Columns& columns) {
  return joined(columns, header_line(columns, "  ", header_name), "\t ");
}

std::string as_ecsv(const Columns& columns, const std::string& delimiter) {
  static const std::vector<std::string> kTypes = {"string", "float64", "bool"};
  std::string text = "# %ECSV 1.0\n# ---\n# delimiter: '" + delimiter + "'\n# datatype:\n";
  for (const Column& column : columns) {
    text += "# - name: " + column.name + "\n";
    if (!column.unit.empty()) text += "#   unit: '" + column.unit + "'\n";
    text += "#   datatype: " + kTypes[static_cast<std::size_t>(column.kind)] + "\n";
  }
  return text +
         joined(columns, header_line(columns, delimiter, [](const Column& c) { return c.name; }), delimiter);
}

std::string as_fits(const Columns& columns) {
  static const std::vector<std::string> kForms = {"40A", "1D", "1L"};
  FitsBuilder fits;
  std::vector<FitsBuilder::Column> made;
  for (const Column& column : columns)
    made.push_back({column.name, kForms[static_cast<std::size_t>(column.kind)], column.unit});
  fits.table(made);
  for (std::size_t i = 0; i < columns.size(); ++i) {
    for (std::size_t row = 0; row < columns[i].cells.size(); ++row) {
      const std::string& cell = columns[i].cells[row];
      const int column = static_cast<int>(i) + 1;
      const auto at = static_cast<long long>(row) + 1;
      if (columns[i].kind == Kind::text) {
        fits.put(column, at, cell);
      } else if (cell.empty()) {
        fits.put_undefined(column, at);
      } else if (columns[i].kind == Kind::flag) {
        fits.put(column, at, cell == "True");
      } else {
        fits.put(column, at, std::stod(cell));
      }
    }
  }
  return fits.bytes();
}

/// An invented table with every column, cells left out at random.
Columns random_columns(std::mt19937_64& random) {
  const std::size_t rows = 1 + random() % 8;
  const auto text = [&](const char* name, std::vector<std::string> words) {
    Column column{name, "", Kind::text, {}};
    for (std::size_t i = 0; i < rows; ++i) column.cells.push_back(words[random() % words.size()]);
    return column;
  };
  const auto number = [&](const char* name, const char* unit, double low, double high, bool may_lack) {
    Column column{name, unit, Kind::number, {}};
    std::uniform_real_distribution<double> draw(low, high);
    for (std::size_t i = 0; i < rows; ++i) {
      const bool lacks = may_lack && random() % 3 == 0;
      column.cells.push_back(lacks ? "" : fmt::format("{}", draw(random)));
    }
    return column;
  };
  Columns columns = {text("transition", {"1-0", "1(0,1)-0(0,0)", "J = 2-1"}),
                     number("frequency", random() % 2 == 0 ? "GHz" : "MHz", 80.0, 900.0, true),
                     number("intensity", random() % 2 == 0 ? "K km/s" : "mK m s-1", 0.1, 50.0, false),
                     number("intensity_error", "K km/s", 0.01, 1.0, false),
                     number("beam_fwhm", random() % 2 == 0 ? "arcsec" : "arcmin", 5.0, 40.0, true),
                     number("fwhm", random() % 2 == 0 ? "km/s" : "m/s", 0.5, 9.0, true),
                     number("calibration_error", random() % 2 == 0 ? "%" : "", 0.0, 0.9, true),
                     number("forward_efficiency", "", 0.9, 1.0, true),
                     number("main_beam_efficiency", "", 0.3, 0.8, true),
                     text("scale", {"", "Tmb", "TA*"}),
                     text("source", {"", "Reed Bed 3", "a, b", "\"q\""}),
                     text("species", {"", "CO", "c-C3H2"}),
                     text("calibration_group", {"", "E090", "E150"}),
                     text("blend", {"", "A"}),
                     text("note", {"", "x", "# no comment"})};
  Column limit{"limit", "", Kind::flag, {}};
  for (std::size_t i = 0; i < rows; ++i)
    limit.cells.push_back(std::vector<std::string>{"True", "False", ""}[random() % 3]);
  columns.push_back(limit);
  std::shuffle(columns.begin(), columns.end(), random);
  return columns;
}

TEST(IntensityTableFormats, EveryFormatGivesIdenticalRows) {
  std::mt19937_64 random(77);
  for (int draw = 0; draw < 60; ++draw) {
    const Columns columns = random_columns(random);
    const auto csv = parse_intensity_table(as_csv(columns), "t.csv");
    SCOPED_TRACE(as_csv(columns));
    EXPECT_TRUE(csv.warnings.empty());
    expect_same_rows(csv, parse_intensity_table(as_text(columns), "t.txt"));
    expect_same_rows(csv, parse_intensity_table(as_ecsv(columns, ","), "t.ecsv"));
    expect_same_rows(csv, parse_intensity_table(as_ecsv(columns, " "), "t.ecsv"));
    expect_same_rows(csv, parse_intensity_table(as_fits(columns), "t.fits"));
    expect_same_rows(csv, parse_intensity_table(to_ecsv(csv), "t.ecsv"));
    if (HasFailure()) return;
  }
}

TEST(IntensityTableFormats, FitsColumnsMayBeIntegersFloatsAndUndefined) {
  FitsBuilder fits;
  fits.table({{"TRANSITION", "6A", ""},
              {"FREQUENCY", "1J", "MHz"},
              {"INTENSITY", "1I", "K km/s"},
              {"INTENSITY_ERROR", "1E", "K km/s"},
              {"LIMIT", "1B", ""},
              {"FWHM", "1I", "km/s"}});
  fits.key("TNULL6", -999);
  for (int row = 1; row <= 2; ++row) {
    fits.put(1, row, std::string("1-0"));
    fits.put(2, row, 115271.0);
    fits.put(3, row, 4.0);
    fits.put(4, row, 0.25);
    fits.put(5, row, row == 1 ? 0.0 : 1.0);
    fits.put(6, row, row == 1 ? 3.0 : -999.0);
  }
  const auto table = parse_intensity_table(fits.bytes(), "t.fits");
  ASSERT_EQ(table.rows.size(), 2U);
  EXPECT_EQ(table.rows[0].transition, "1-0");
  EXPECT_DOUBLE_EQ(table.rows[0].frequency_hz.value(), 115.271e9);
  EXPECT_EQ(table.rows[0].intensity, 4.0);
  EXPECT_EQ(table.rows[0].intensity_sigma, 0.25);
  EXPECT_FALSE(table.rows[0].is_limit);
  EXPECT_TRUE(table.rows[1].is_limit);
  EXPECT_EQ(table.rows[0].fwhm_km_s, 3.0);
  EXPECT_FALSE(table.rows[1].fwhm_km_s.has_value());
}

TEST(IntensityTableFormats, FitsNotANumberMeansNotGiven) {
  FitsBuilder fits;
  fits.table({{"frequency", "1D", "GHz"},
              {"intensity", "1D", "K km/s"},
              {"intensity_error", "1D", "K km/s"},
              {"beam_fwhm", "1D", "arcsec"}});
  fits.put(1, 1, 115.0);
  fits.put(2, 1, 1.0);
  fits.put(3, 1, 0.1);
  fits.put(4, 1, std::numeric_limits<double>::quiet_NaN());
  EXPECT_FALSE(parse_intensity_table(fits.bytes(), "t.fits").rows.at(0).beam_fwhm_rad.has_value());
}

TEST(IntensityTableFormats, FitsTableIsFoundBehindOtherExtensions) {
  FitsBuilder fits;
  fits.table({{"other", "1J", ""}});
  fits.put(1, 1, 5.0);
  fits.table(
      {{"frequency", "1D", "GHz"}, {"intensity", "1D", "K km/s"}, {"intensity_error", "1D", "K km/s"}});
  fits.put(1, 1, 115.0);
  fits.put(2, 1, 1.5);
  fits.put(3, 1, 0.1);
  EXPECT_EQ(parse_intensity_table(fits.bytes(), "t.fits").rows.at(0).intensity, 1.5);
}

}  // namespace
}  // namespace trotline
