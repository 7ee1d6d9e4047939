// Wrong command lines: each has its exit code and a message that says what was wrong and what to do.

#include "program_fixture.hpp"

namespace trotline {
namespace {

using ::testing::HasSubstr;

struct WrongLine {
  std::vector<std::string> arguments;  ///< "TABLE" stands for a table that is right
  ExitCode code;
  std::vector<std::string> words;  ///< all of which the message holds
};

std::vector<WrongLine> wrong_lines() {
  const ExitCode usage = ExitCode::wrong_command_line;
  const ExitCode input = ExitCode::bad_input;
  return {
      {{"fti", "TABLE"}, usage, {"no verb 'fti'", "did you mean 'fit'?"}},
      {{"fit"}, usage, {"needs an argument", "LINES", "--help"}},
      {{"fit", "TABLE"}, usage, {"no species", "--species CO"}},
      {{"fit", "TABLE", "--species"}, usage, {"--species"}},
      {{"fit", "TABLE", "--specis", "CO"}, usage, {"no option '--specis'", "did you mean '--species'?"}},
      {{"fit", "TABLE", "extra", "--species", "CO"}, usage, {"'extra'", "one argument too many"}},
      {{"fit", "TABLE", "--species", "CO", "--species", "CS"}, usage, {"--species"}},
      {{"fit", "TABLE", "--species", "CO", "--background", "2.7"}, usage, {"--background", "no unit", "2.725 K"}},
      {{"fit", "TABLE", "--species", "CO", "--background", "3 parsec"}, usage, {"--background", "parsec"}},
      {{"fit", "TABLE", "--species", "CO", "--background", "2e5 K"}, usage, {"--background", "1000 K"}},
      {{"fit", "TABLE", "--species", "CO", "--source-size", "1e-170 arcsec"}, usage, {"--source-size", "8 arcsec"}},
      {{"fit", "TABLE", "--species", "CO", "--calibration-error", "100 %"}, usage, {"--calibration-error", "10 %"}},
      {{"fit", "TABLE", "--species", "CO", "--beam", "27 GHz"}, usage, {"--beam", "unit of a frequency", "27.4 arcsec"}},
      {{"fit", "TABLE", "--species", "CO", "--temperature", "-4 K"}, usage, {"--temperature", "not above zero"}},
      {{"fit", "TABLE", "--species", "CO", "--figures", "gif"}, usage, {"--figures", "gif", "svg"}},
      {{"fit", "TABLE", "--species", "CO", "--method", "magic"}, usage, {"--method", "magic", "line"}},
      {{"fit", "TABLE", "--species", "CO", "--frequency", "9 GHz..8 GHz"}, usage, {"--frequency", "empty"}},
      {{"fit", "TABLE", "--species", "CO", "--least-snr", "three"}, usage, {"--least-snr", "three"}},
      {{"fit", "TABLE", "--species", "XYZ"}, input, {"XYZ"}},
      {{"fit", "no-such-table.csv", "--species", "CO"}, input, {"no-such-table.csv", "no such file"}},
      {{"fit", "/", "--species", "CO"}, input, {"/", "folder"}},
      {{"fit", "TABLE", "--species", "CO", "--only", "9-8"}, input, {"lines.csv", "'only'", "'9-8'", "1-0"}},
      {{"fit", "TABLE", "--species", "CO", "--source-size", "8 arcsec"}, input, {"lines.csv:2", "no beam", "'beam'"}},
      {{"fit", "TABLE", "--species", "CO", "--temperature", "2 K"}, input, {"2 K", "background"}},
      {{"fit", "TABLE", "--species", "CO", "--source", "Nowhere"}, ExitCode::done, {}},  // nameless rows take it
      {{"fit", "no-such-run.yaml"}, input, {"no-such-run.yaml", "no such file"}},
      {{"species", "C0"}, input, {"C0"}},
      {{"species", "CO", "--lines", "80 GHz"}, usage, {"--lines", "80 GHz", "range"}},
      {{"species", "CO", "--partition", "warm"}, usage, {"--partition", "warm", "kelvin"}},
      {{"species", "CO", "--partition", "1e6"}, input, {"CO", "1e+06 K", "to"}},
      {{"species", "--levels"}, usage, {"name of a species", "trotline species CO"}},
      {{"species", "CO", "--at", "40"}, usage, {"--at", "no unit"}},
      {{"species", "CO", "--at", "0 K"}, usage, {"--at", "not above 0 K"}},
      {{"species", "CO", "--at", "1e6 K"}, input, {"CO", "1e+06 K", "to"}},
      {{"species", "CO", "--column", "1e14 cm-2"}, usage, {"--column", "--at"}},
      {{"species", "CO", "--stronger-than", "1 K km/s"}, usage, {"--stronger-than", "--at"}},
      {{"species", "CO", "--at", "40 K", "--stronger-than", "1 K"}, usage, {"--stronger-than", "K km/s"}},
      {{"species", "CO", "--check", "--compare", "CS"}, usage, {"--check", "--compare", "one at a time"}},
      {{"species", "CO", "--check", "--at", "40 K"}, usage, {"--at", "--check"}},
      {{"species", "CO", "--compare", "C0"}, input, {"C0"}},
      {{"species", "CO", "--figures", "svg"}, usage, {"--figures", "--out"}},
      {{}, usage, {"verb"}},
  };
}

class WrongCommandLines : public ProgramTest {};

TEST_F(WrongCommandLines, EachIsRefusedWithAWordOfWhatToDo) {
  for (const WrongLine& line : wrong_lines()) {
    std::vector<std::string> arguments = line.arguments;
    for (std::string& argument : arguments) {
      if (argument == "TABLE") argument = table();
    }
    const Outcome outcome = run(arguments);
    EXPECT_EQ(static_cast<int>(outcome.code), static_cast<int>(line.code)) << ::testing::PrintToString(arguments);
    for (const std::string& word : line.words) {
      EXPECT_THAT(outcome.err, HasSubstr(word)) << ::testing::PrintToString(arguments);
    }
    if (line.code != ExitCode::done) {
      EXPECT_EQ(outcome.out, "") << ::testing::PrintToString(arguments);
    }
  }
}

TEST_F(WrongCommandLines, LeaveNothingBehind) {
  const std::string out = (folder_.path() / "out").string();
  EXPECT_EQ(run({"fit", table(), "--species", "XYZ", "--out", out}).code, ExitCode::bad_input);
  EXPECT_EQ(run({"fit", table(), "--species", "CO", "--out", out, "--only", "9-8"}).code, ExitCode::bad_input);
  EXPECT_FALSE(std::filesystem::exists(out));
  EXPECT_THAT(names_in("."), ::testing::ElementsAre("lines.csv"));
}

TEST_F(WrongCommandLines, AnOutputFolderThatIsAFileIsRefused) {
  const std::string file = folder_.file("taken", "keep me");
  const Outcome outcome = run({"fit", table(), "--species", "CO", "--out", file, "--figures", "none"});
  EXPECT_EQ(outcome.code, ExitCode::fault);
  EXPECT_THAT(outcome.err, HasSubstr("is no folder"));
  std::ifstream kept(file);
  EXPECT_EQ(std::string(std::istreambuf_iterator<char>(kept), {}), "keep me");
}

}  // namespace
}  // namespace trotline
