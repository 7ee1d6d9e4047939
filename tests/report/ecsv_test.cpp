#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <yaml-cpp/yaml.h>

#include <bit>
#include <charconv>
#include <map>
#include <sstream>

#include <trotline/base/text.hpp>
#include <trotline/observation/intensity_table.hpp>
#include <trotline/report/display_text.hpp>
#include <trotline/report/ecsv.hpp>

#include "report/invented_results.hpp"

namespace trotline {
namespace {

using namespace testing_room;
using testing::ElementsAre;

/// One row of comma-separated values, with quotes as RFC 4180 has them.
std::vector<std::string> cells_of(const std::string& row) {
  std::vector<std::string> cells(1);
  bool quoted = false;
  for (std::size_t i = 0; i < row.size(); ++i) {
    if (quoted && row[i] == '"' && i + 1 < row.size() && row[i + 1] == '"') {
      cells.back() += row[++i];
    } else if (row[i] == '"') {
      quoted = !quoted;
    } else if (row[i] == ',' && !quoted) {
      cells.emplace_back();
    } else {
      cells.back() += row[i];
    }
  }
  return cells;
}

/// An ECSV text taken apart: its YAML header and its rows by column name.
struct Table {
  YAML::Node header;
  std::vector<std::map<std::string, std::string>> rows;
};

Table read_table(const std::string& text) {
  std::istringstream stream(text);
  std::string yaml;
  Table table;
  std::vector<std::string> names;
  for (std::string line; std::getline(stream, line);) {
    if (line.starts_with("# ")) {
      if (!line.starts_with("# %")) yaml += line.substr(2) + "\n";
    } else if (names.empty()) {
      names = cells_of(line);
    } else {
      const auto cells = cells_of(line);
      if (cells.size() != names.size()) throw std::runtime_error("a row of another length: " + line);
      table.rows.emplace_back();
      for (std::size_t i = 0; i < names.size(); ++i) table.rows.back()[names[i]] = cells[i];
    }
  }
  table.header = YAML::Load(yaml);
  return table;
}

TEST(LinesEcsv, HasOneRowALineAndDeclaresEveryColumn) {
  const Result result = invented_result({.limits = 2, .unused = 1});
  const std::string text = lines_ecsv(result);
  EXPECT_TRUE(text.starts_with("# %ECSV 1.0\n# ---\n"));
  const Table table = read_table(text);
  ASSERT_EQ(table.rows.size(), result.lines.size());
  EXPECT_EQ(table.header["delimiter"].as<std::string>(), ",");
  EXPECT_EQ(table.header["datatype"].size(), table.rows[0].size());
  for (const auto& column : table.header["datatype"]) {
    EXPECT_TRUE(table.rows[0].contains(column["name"].as<std::string>()));
    EXPECT_FALSE(column["description"].as<std::string>().empty());
  }
}

TEST(LinesEcsv, GivesUnitsToWhatHasADimension) {
  const Table table = read_table(lines_ecsv(invented_result()));
  std::map<std::string, std::string> units;
  for (const auto& column : table.header["datatype"]) {
    if (column["unit"]) units[column["name"].as<std::string>()] = column["unit"].as<std::string>();
  }
  const std::map<std::string, std::string> expected = {{"frequency", "MHz"},
                                                       {"intensity", "K km s-1"},
                                                       {"intensity_error", "K km s-1"},
                                                       {"beam_fwhm", "arcsec"}, {"critical_density", "cm-3"},
                                                       {"fwhm", "km s-1"},
                                                       {"upper_energy", "K"},
                                                       {"einstein_a", "s-1"},
                                                       {"model_intensity", "K km s-1"}};
  EXPECT_EQ(units, expected);
}

TEST(LinesEcsv, NumbersReadBackToTheSameBits) {
  std::mt19937_64 random(12);
  Result result = invented_result({.lines = 1});
  for (int draw = 0; draw < 500; ++draw) {
    const auto number = std::bit_cast<double>(random());
    if (!std::isfinite(number)) continue;
    result.lines[0].einstein_a_s1 = number;
    const auto back = parse_number(read_table(lines_ecsv(result)).rows[0]["einstein_a"]);
    ASSERT_TRUE(back.has_value());
    EXPECT_EQ(std::bit_cast<std::uint64_t>(*back), std::bit_cast<std::uint64_t>(number));
  }
}

TEST(LinesEcsv, LeavesCellsEmptyForWhatIsNotKnown) {
  Result result = invented_result({.lines = 2});
  result.lines[0].optical_depth = kNotKnown;
  const Table table = read_table(lines_ecsv(result));
  EXPECT_EQ(table.rows[0].at("optical_depth"), "");
  EXPECT_EQ(table.rows[0].at("note"), "");
  EXPECT_EQ(table.rows[0].at("used"), "True");
}

TEST(LinesEcsv, KeepsResultAndProvenanceInItsHeader) {
  const Result result = invented_result();
  const YAML::Node meta = read_table(lines_ecsv(result)).header["meta"];
  EXPECT_EQ(meta["schema"].as<std::string>(), "trotline-result-1");
  EXPECT_EQ(meta["temperature_k"]["value"].as<double>(), result.temperature_k.value);
  EXPECT_EQ(meta["provenance"]["table_file"].as<std::string>(), "lantern.csv");
  EXPECT_EQ(meta["provenance"]["options"]["background"].as<std::string>(), "2.7255 K");
  EXPECT_TRUE(meta["source_size_arcsec"].IsNull());
  EXPECT_EQ(meta["checks"].size(), 3U);
  EXPECT_FALSE(meta["lines"]);
}

TEST(LinesEcsv, WritesNumbersThatEveryYamlReadsAsNumbers) {
  Result result = invented_result();
  result.p_value = 1e-5;  // YAML 1.1 takes "1e-05" for a text
  result.chi2 = 1e20;
  EXPECT_THAT(lines_ecsv(result), testing::HasSubstr("\"p_value\": 1.0e-05\n"));
  EXPECT_THAT(lines_ecsv(result), testing::HasSubstr("\"chi2\": 1.0e+20\n"));
}

TEST(LinesEcsv, HoldsEveryTextAsData) {
  for (const std::string& text : hostile_texts()) {
    const Table table = read_table(lines_ecsv(with_hostile_text(invented_result({.lines = 3}), text)));
    ASSERT_EQ(table.rows.size(), 3U) << text;
    EXPECT_EQ(table.rows[1].at("transition"), display_text(text));
    EXPECT_EQ(table.header["meta"]["source"].as<std::string>(), display_text(text));
    EXPECT_EQ(table.header["meta"]["provenance"]["options"][display_text(text)].as<std::string>(),
              display_text(text));
  }
}

TEST(LinesEcsv, IsAnIntensityTableThatCanBeReadAgain) {
  Result result = invented_result({.limits = 2});
  result.lines[1].calibration_error = 0.1;
  result.lines[1].calibration_group = "band 3, \"low\"";
  result.lines[2].beam_fwhm_arcsec = kNotKnown;
  const IntensityTable table = parse_intensity_table(lines_ecsv(result), "lines.ecsv");
  ASSERT_EQ(table.rows.size(), result.lines.size());
  for (std::size_t i = 0; i < table.rows.size(); ++i) {
    const LineResult& line = result.lines[i];
    EXPECT_EQ(table.rows[i].transition, line.transition);
    EXPECT_EQ(table.rows[i].intensity, line.intensity_k_km_s);
    EXPECT_EQ(table.rows[i].intensity_sigma, line.intensity_error_k_km_s);
    EXPECT_EQ(table.rows[i].scale, IntensityScale::main_beam);
    EXPECT_EQ(table.rows[i].is_limit, line.limit);
    EXPECT_NEAR(table.rows[i].frequency_hz.value_or(0.0), line.frequency_mhz * 1e6,
                1e-6 * line.frequency_mhz);
  }
  EXPECT_EQ(table.rows[1].calibration_error, 0.1);
  EXPECT_EQ(table.rows[1].calibration_group, "band 3, \"low\"");
  EXPECT_TRUE(table.rows[0].beam_fwhm_rad.has_value());
  EXPECT_FALSE(table.rows[2].beam_fwhm_rad.has_value());
}

TEST(LinesEcsv, StandsAResultWithoutLines) { EXPECT_TRUE(read_table(lines_ecsv(Result{})).rows.empty()); }

}  // namespace
}  // namespace trotline
