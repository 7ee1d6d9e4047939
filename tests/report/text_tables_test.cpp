#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/report/rounding.hpp>
#include <trotline/report/text_tables.hpp>

#include "support/temporary_folder.hpp"

namespace trotline {
namespace {

using ::testing::HasSubstr;
using testing_support::TemporaryFolder;

const std::vector<TableColumn> kColumns = {{"name", CellType::text, "", "what it is called", 8},
                                           {"column_density", CellType::number, "cm-2", "how much", 1},
                                           {"lines", CellType::whole, "", "how many", 1},
                                           {"good", CellType::flag, "", "whether", 1}};

std::string written(std::unique_ptr<TableWriter> (*make)(const std::filesystem::path&),
                    const TemporaryFolder& folder) {
  const auto path = folder.path() / "table";
  const auto writer = make(path);
  writer->add({std::string("a, \"b\""), 1e14, std::int64_t{12}, true});
  writer->add({std::string(), std::nan(""), Cell{}, Cell{}});
  writer->finish();
  return read_file(path.string());
}

TEST(TextTables, CsvHasUnitsInItsHeaderAndQuotesWhatNeedsIt) {
  const TemporaryFolder folder;
  EXPECT_EQ(written([](const std::filesystem::path& path) { return csv_writer(path, kColumns); }, folder),
            "name,column_density [cm-2],lines,good\n\"a, \"\"b\"\"\",1.0e+14,12,true\n\"\",,,\n");
}

TEST(TextTables, EcsvHasItsHeader) {
  const TemporaryFolder folder;
  const std::string text = written(
      [](const std::filesystem::path& path) {
        return ecsv_writer(path, kColumns, {{"survey", "a: \"b\"\nc"}});
      },
      folder);
  EXPECT_THAT(text, ::testing::StartsWith("# %ECSV 1.0\n# ---\n# delimiter: ','\n"));
  EXPECT_THAT(
      text,
      HasSubstr(
          "# - {name: column_density, unit: \"cm-2\", datatype: float64, description: \"how much\"}\n"));
  EXPECT_THAT(text, HasSubstr("#   survey: \"a: \\\"b\\\" c\"\n"));
  EXPECT_THAT(text, HasSubstr("\n\"a, \"\"b\"\"\",1.0e+14,12,True\n"));
}

TEST(TextTables, VotableEscapesAndSpellsUnitsAsTheStandardHasThem) {
  const TemporaryFolder folder;
  const std::string text = written(
      [](const std::filesystem::path& path) {
        return votable_writer(path, kColumns, {{"survey", "<&>"}});
      },
      folder);
  EXPECT_THAT(text, HasSubstr("unit=\"cm**-2\""));
  EXPECT_THAT(text, HasSubstr("value=\"&lt;&amp;&gt;\""));
  EXPECT_THAT(text, HasSubstr("<TR><TD>a, &quot;b&quot;</TD><TD>1.0e+14</TD><TD>12</TD><TD>true</TD></TR>"));
  EXPECT_THAT(text, HasSubstr("<TR><TD></TD><TD>NaN</TD><TD></TD><TD></TD></TR>"));
}

TEST(TextTables, AFileThatCannotBeWrittenIsAnErrorAtItsBeginningOrItsEnd) {
  EXPECT_THROW((void)csv_writer("/nowhere/table.csv", kColumns), SystemError);
  const auto writer = csv_writer("/dev/full", kColumns);
  EXPECT_THROW(
      {
        for (int i = 0; i < 10000; ++i) writer->add({std::string("x"), 1.0, std::int64_t{1}, true});
        writer->finish();
      },
      SystemError);
}

TEST(LatexText, EscapesWhatLatexWouldObey) {
  EXPECT_EQ(latex_text("a_b & 50% #1 $x {y}"), "a\\_b \\& 50\\% \\#1 \\$x \\{y\\}");
  EXPECT_EQ(latex_text("\\input{x}~^"), "\\textbackslash{}input\\{x\\}\\textasciitilde{}\\textasciicircum{}");
  EXPECT_EQ(latex_text("\xCE\xB1 \xC3\xA9 \U0001F31F"), "$\\alpha$ \xC3\xA9 [U+1F31F]");
  EXPECT_EQ(latex_text("a--b"), "a{-}{-}b");
}

TEST(LatexNumber, TurnsTheRoundedNumberIntoMath) {
  EXPECT_EQ(latex_number(value_with_error(62.347, 3.09, Glyphs::ascii)), "$62.3 \\pm 3.1$");
  EXPECT_EQ(latex_number(value_with_error(1.2341e14, 4.3e12, Glyphs::ascii)),
            "$(1.234 \\pm 0.043) \\times 10^{14}$");
}

}  // namespace
}  // namespace trotline
