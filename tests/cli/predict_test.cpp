#include <nlohmann/json.hpp>

#include <sstream>

#include <trotline/base/files.hpp>

#include "program_fixture.hpp"

namespace trotline {
namespace {

using ::testing::HasSubstr;
using ::testing::IsSupersetOf;

class Predict : public ProgramTest {
 protected:
  static std::vector<std::string> command(const std::vector<std::string>& more) {
    std::vector<std::string> all = {"predict",      "CS",     "--temperature",    "20 K",
                                    "--line-width", "2 km/s", "--column-density", "1e13 cm-2"};
    all.insert(all.end(), more.begin(), more.end());
    return all;
  }
};

TEST_F(Predict, WritesJsonTableAndFigure) {
  const std::string out = (folder_.path() / "plan").string();
  const Outcome outcome =
      run(command({"--rms", "10 mK", "--channel", "0.5 km/s", "--choose", "3", "--json", "--out", out}));
  ASSERT_EQ(outcome.code, ExitCode::done) << outcome.err;
  const auto document = nlohmann::json::parse(outcome.out);
  EXPECT_EQ(document.at("species"), "CS");
  int chosen = 0;
  for (const auto& line : document.at("lines")) chosen += line.at("chosen").get<bool>() ? 1 : 0;
  EXPECT_EQ(chosen, 3);
  EXPECT_THAT(names_in("plan"), IsSupersetOf({"prediction.json", "prediction.ecsv", "prediction.svg",
                                              "prediction.png", "prediction.pdf", "prediction.gp"}));
}

TEST_F(Predict, TellsLinesChoiceAndWhatTheModelIs) {
  const Outcome outcome = run(command(
      {"--bands", "80 GHz..400 GHz at 120 K", "--time", "30 min", "--channel", "0.5 km/s", "--choose", "3"}));
  ASSERT_EQ(outcome.code, ExitCode::done) << outcome.err;
  EXPECT_THAT(outcome.out, HasSubstr("one layer in LTE"));
  EXPECT_THAT(outcome.out, HasSubstr("chosen"));
  EXPECT_THAT(outcome.out, HasSubstr("30 min"));
  EXPECT_THAT(outcome.out, HasSubstr("brightest"));
}

TEST_F(Predict, WrongOptionsAreExplained) {
  const auto err = [&](const std::vector<std::string>& more) { return run(command(more)).err; };
  EXPECT_THAT(err({"--rms", "10"}), HasSubstr("--rms: "));
  EXPECT_THAT(err({"--bands", "116 GHz..84 GHz"}), HasSubstr("--bands: "));
  EXPECT_THAT(err({"--choose", "1"}), HasSubstr("2 to 40"));
  EXPECT_THAT(err({"--aim", "temprature"}), HasSubstr("did you mean 'temperature'"));
  EXPECT_EQ(run({"predict", "CS"}).code, ExitCode::bad_input);
  EXPECT_EQ(run(command({"--channel", "fast"})).code, ExitCode::wrong_command_line);
}

/// Three of these four lines lie side by side at the end of the axis: all are named, inside of it.
TEST_F(Predict, EveryChosenLineIsNamedInTheFigure) {
  const std::string out = (folder_.path() / "named").string();
  const Outcome outcome = run({"predict", "H2CO", "--temperature", "60 K", "--column-density", "3e13 cm-2",
                               "--line-width", "3 km/s", "--bands", "200 GHz..300 GHz", "--rms", "20 mK",
                               "--channel", "0.5 km/s", "--choose", "4", "--out", out});
  ASSERT_EQ(outcome.code, ExitCode::done) << outcome.err;
  std::istringstream lines(read_file(out + "/prediction-lines.tsv"));
  double last_ghz = 0.0;
  int chosen = 0;
  for (std::string line; std::getline(lines, line);) {
    if (line.starts_with("#")) continue;
    last_ghz = std::stod(line);
    chosen += line.ends_with("\t1") ? 1 : 0;
  }
  std::istringstream texts(read_file(out + "/prediction-text.tsv"));
  int named = 0;
  for (std::string line; std::getline(texts, line);) {
    if (line.starts_with("#")) continue;
    const std::size_t y = line.rfind('\t');
    const double x_ghz = std::stod(line.substr(line.rfind('\t', y - 1) + 1));
    EXPECT_LT(x_ghz, 1.01 * last_ghz) << line;  // the axis has at least that margin
    ++named;
  }
  EXPECT_EQ(chosen, 4);
  EXPECT_EQ(named, chosen);
}

}  // namespace
}  // namespace trotline
