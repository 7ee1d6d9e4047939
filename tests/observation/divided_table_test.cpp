#include <fmt/format.h>
#include <gmock/gmock.h>

#include <filesystem>
#include <random>
#include <thread>

#include <trotline/base/files.hpp>
#include <trotline/observation/divided_table.hpp>

#include "table_support.hpp"

namespace trotline {
namespace {

using ::testing::HasSubstr;
namespace fs = std::filesystem;

class DividedTableTest : public ::testing::Test {
 protected:
  void SetUp() override {
    std::string name = (fs::temp_directory_path() / "trotline-divided-XXXXXX").string();
    ASSERT_NE(mkdtemp(name.data()), nullptr);
    folder_ = name;
  }
  void TearDown() override { fs::remove_all(folder_); }

  std::string file(const std::string& name, const std::string& bytes) const {
    write_file(folder_ / name, bytes);
    return (folder_ / name).string();
  }

  fs::path folder_;
};

const char* const kHeader = "source,species,transition,intensity [K km/s],intensity_error [K km/s]\n";

/// Rows of many sources, one after the other or mixed.
std::string many_sources(int sources, bool mixed) {
  std::vector<std::string> rows;
  std::mt19937_64 random(3);
  for (int s = 0; s < sources; ++s) {
    for (int j = 1; j <= 4; ++j) {
      rows.push_back(fmt::format("\"Reef \"\"{}\"\"\",{},{}-{},{:.3f},0.1\n", s, s % 2 ? "CO" : "CS", j,
                                 j - 1, 0.1 * (s % 97) + j));
    }
  }
  if (mixed) std::shuffle(rows.begin(), rows.end(), random);
  std::string text = kHeader;
  for (const std::string& row : rows) text += row;
  return text;
}

/// The rows of one source and species, taken from the whole table.
IntensityTable picked(const IntensityTable& whole, const TablePart& part) {
  IntensityTable table;
  for (const IntensityRow& row : whole.rows) {
    if (row.source == part.source && row.species == part.species) table.rows.push_back(row);
  }
  return table;
}

void expect_parts_are_the_whole(const std::string& path) {
  const IntensityTable whole = read_intensity_table(path);
  const DividedTable divided(path);
  std::size_t rows = 0;
  for (std::size_t i = 0; i < divided.parts().size(); ++i) {
    const IntensityTable part = divided.read(i);
    const IntensityTable expected = picked(whole, divided.parts()[i]);
    expect_same_rows(part, expected);
    for (std::size_t r = 0; r < part.rows.size(); ++r) {
      ASSERT_EQ(part.rows[r].line_number, expected.rows[r].line_number);
    }
    EXPECT_EQ(part.rows.size(), divided.parts()[i].rows);
    EXPECT_EQ(part.rows.front().line_number, divided.parts()[i].first_line);
    rows += part.rows.size();
  }
  EXPECT_EQ(rows, whole.rows.size());
}

TEST_F(DividedTableTest, PartsOfACsvAreWhatTheWholeTableHolds) {
  expect_parts_are_the_whole(file("one.csv", many_sources(50, false)));
  expect_parts_are_the_whole(file("mixed.csv", many_sources(50, true)));
}

TEST_F(DividedTableTest, PartsOfOtherFormatsAreWhatTheWholeTableHolds) {
  const IntensityTable whole = read_intensity_table(file("one.csv", many_sources(9, true)));
  expect_parts_are_the_whole(file("one.ecsv", to_ecsv(whole)));
  expect_parts_are_the_whole(
      file("words.txt",
           "# a comment\n\nsource transition intensity [K km/s] intensity_error [K km/s]\n"
           "A 1-0 1.0 0.1 \r\n# between\r\n\"B x\" 1-0 2.0 0.1\r\nA 2-1 3.0 0.2"));
}

TEST_F(DividedTableTest, PartsOfAFitsTableAreWhatTheWholeTableHolds) {
  FitsBuilder fits;
  fits.table({{"transition", "8A", ""},
              {"intensity", "1D", "K km/s"},
              {"intensity_error", "1D", "K km/s"},
              {"source", "8A", ""}});
  for (int row = 1; row <= 40; ++row) {
    fits.put(1, row, fmt::format("{}-{}", row, row - 1));
    fits.put(2, row, 1.0 + row);
    fits.put(3, row, 0.1);
    fits.put(4, row, fmt::format("Reef {}", row % 7));
  }
  expect_parts_are_the_whole(file("table.fits", std::string(fits.bytes())));
}

TEST_F(DividedTableTest, RecordsAcrossTheBlocksOfAFileStayWhole) {
  // 60000 sources of 4 rows are 9 MB: more than two blocks. Some quoted cells hold line breaks.
  std::string text = many_sources(60000, false);
  text += "\"two\nlines\",CO,1-0,1.0,0.1\n" + std::string(5 << 20, ' ') + "\n\"two\nlines\",CO,2-1,1.0,0.1";
  const std::string path = file("long.csv", text);
  const DividedTable divided(path);
  ASSERT_EQ(divided.parts().size(), 60001u);
  for (const std::size_t i : {0u, 1u, 28000u, 59999u}) {
    const IntensityTable part = divided.read(i);
    ASSERT_EQ(part.rows.size(), 4u);
    EXPECT_EQ(part.rows[0].source, fmt::format("Reef \"{}\"", i));
    EXPECT_EQ(part.rows[3].line_number, 2 + 4 * i + 3);
  }
  EXPECT_EQ(divided.read(60000).rows.size(), 2u);
}

TEST_F(DividedTableTest, AFingerprintFollowsTheValuesOnly) {
  const std::string row = "A,CO,1-0,1.0,0.1\n";
  const auto print = [&](const std::string& text) {
    return DividedTable(file("a.csv", text)).parts()[0].fingerprint;
  };
  const std::string plain = print(kHeader + row);
  EXPECT_EQ(print("# made today\n" + std::string(kHeader) + row + "B,CO,1-0,2.0,0.1\n"), plain);
  EXPECT_EQ(print(kHeader + std::string("\n  A , CO,\"1-0\",1.0,0.1 \n")), plain);
  EXPECT_NE(print(kHeader + std::string("A,CO,1-0,1.1,0.1\n")), plain);
  EXPECT_NE(print("source,species,transition,intensity [K m/s],intensity_error [K km/s]\n" + row), plain);
}

TEST_F(DividedTableTest, ABadRowCostsItsOwnPartOnly) {
  const std::string path =
      file("bad.csv", std::string(kHeader) + "A,CO,1-0,1.0,0.1\nB,CO,1-0,much,0.1\nC,CO,1-0\n");
  const DividedTable divided(path);
  ASSERT_EQ(divided.parts().size(), 3u);
  EXPECT_EQ(divided.read(0).rows.size(), 1u);
  EXPECT_THAT([&] { (void)divided.read(1); },
              ::testing::ThrowsMessage<InputError>(HasSubstr("bad.csv:3: column 'intensity'")));
  EXPECT_THAT([&] { (void)divided.read(2); },
              ::testing::ThrowsMessage<InputError>(HasSubstr("bad.csv:4: 3 cells")));
}

TEST_F(DividedTableTest, WhatConcernsTheWholeTableIsSaidAtOnce) {
  const auto message = [&](const std::string& text) -> std::string {
    try {
      DividedTable(file("t.csv", text));
    } catch (const InputError& error) {
      return error.what();
    }
    return "nothing";
  };
  EXPECT_THAT(message(""), HasSubstr("empty"));
  EXPECT_THAT(message(kHeader), HasSubstr("no row"));
  EXPECT_THAT(message("source,transition,intensity [K km/s]\nA,1-0,1\n"), HasSubstr("intensity_error"));
  EXPECT_THAT(message(std::string(kHeader) + "A,CO,1-0,1.0,0.1\n\"B,CO,1-0,1.0,0.1\n"),
              HasSubstr("t.csv:3: a quotation mark"));
  EXPECT_THAT(message(std::string(kHeader) + "A\xff,CO,1-0,1.0,0.1\n"),
              HasSubstr("t.csv:2: bytes that are not UTF-8"));
  EXPECT_THAT(message("\x1f\x8b rest"), HasSubstr("gzip"));
  EXPECT_THAT([&] { DividedTable("/nowhere/t.csv"); },
              ::testing::ThrowsMessage<InputError>(HasSubstr("cannot be read")));
  EXPECT_THAT([&] { DividedTable(folder_.string()); },
              ::testing::ThrowsMessage<InputError>(HasSubstr("is a folder")));
}

TEST_F(DividedTableTest, AFileThatChangesMeanwhileIsNoticed) {
  const std::string path = file("t.csv", std::string(kHeader) + "A,CO,1-0,1.0,0.1\nB,CO,1-0,2.0,0.1\n");
  const DividedTable divided(path);
  file("t.csv", std::string(kHeader) + "A,CO,1-0,1.5,0.1\nB,CO,1-0,2.0,0.1\n");
  EXPECT_THAT([&] { (void)divided.read(0); }, ::testing::ThrowsMessage<InputError>(HasSubstr("has changed")));
  EXPECT_EQ(divided.read(1).rows.size(), 1u);
  file("t.csv", kHeader);
  EXPECT_THAT([&] { (void)divided.read(1); }, ::testing::ThrowsMessage<InputError>(HasSubstr("has changed")));
}

TEST_F(DividedTableTest, SeveralThreadsReadAtOnce) {
  const std::string path = file("one.csv", many_sources(400, true));
  const DividedTable divided(path);
  std::vector<std::thread> threads;
  std::vector<std::size_t> rows(4);
  for (std::size_t t = 0; t < 4; ++t) {
    threads.emplace_back([&, t] {
      for (std::size_t i = t; i < divided.parts().size(); i += 4) rows[t] += divided.read(i).rows.size();
    });
  }
  for (std::thread& thread : threads) thread.join();
  EXPECT_EQ(rows[0] + rows[1] + rows[2] + rows[3], 1600u);
}

}  // namespace
}  // namespace trotline
