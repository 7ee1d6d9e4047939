// trotline species: parts, tables, figures, review.

#include <fmt/format.h>
#include <nlohmann/json.hpp>

#include <trotline/base/files.hpp>

#include "program_fixture.hpp"

namespace trotline {
namespace {

using ::testing::ElementsAre;
using ::testing::HasSubstr;
using ::testing::Not;

class SpeciesVerb : public ProgramTest {};

TEST_F(SpeciesVerb, WritesTablesAndFiguresOfWhatWasAskedFor) {
  const std::string out = (folder_.path() / "out").string();
  const Outcome outcome = run({"species", "CO", "--levels", "--lines", "100 GHz..400 GHz", "--at", "30 K",
                               "--partition", "10,30", "--out", out, "--figures", "svg"});
  EXPECT_EQ(outcome.code, ExitCode::done) << outcome.err;
  EXPECT_THAT(names_in("out"),
              ElementsAre("levels-levels.tsv", "levels-lines.tsv", "levels-text.tsv", "levels.ecsv",
                          "levels.gp", "levels.svg", "lines-labels.tsv", "lines-lines.tsv", "lines-text.tsv",
                          "lines.ecsv", "lines.gp", "lines.svg", "partition.ecsv"));
  EXPECT_THAT(outcome.out, HasSubstr("without background, T = 30 K, N = 1e+14 cm-2"));
}

TEST_F(SpeciesVerb, LeavesOutFaintLines) {
  const Outcome all = run({"species", "H2CO", "--lines", "200 GHz..400 GHz", "--at", "60 K", "--json"});
  const Outcome strong = run({"species", "H2CO", "--lines", "200 GHz..400 GHz", "--at", "60 K",
                              "--stronger-than", "5 K km/s", "--json"});
  const auto lines_of = [](const Outcome& outcome) { return nlohmann::json::parse(outcome.out).at("lines"); };
  std::size_t expected = 0;
  for (const auto& line : lines_of(all)) expected += line.at("intensity_k_km_s") >= 5.0 ? 1U : 0U;
  EXPECT_EQ(lines_of(strong).size(), expected);
  EXPECT_GT(expected, 0U);
  EXPECT_LT(expected, lines_of(all).size());
}

/// The thin LTE intensities of `species` are what `fit` makes of them: the same temperature and column
/// density.
TEST_F(SpeciesVerb, PredictsWhatFitRecovers) {
  const Outcome predicted = run({"species", "H2CO", "--lines", "200 GHz..400 GHz", "--at", "60 K", "--column",
                                 "3e13 cm-2", "--stronger-than", "0.1 K km/s", "--json"});
  std::string table = "transition,intensity [K km/s],intensity_error [K km/s]\n";
  const auto species = nlohmann::json::parse(predicted.out);
  for (const auto& line : species.at("lines")) {
    const auto w = line.at("intensity_k_km_s").get<double>();
    table += fmt::format("\"{}\",{},{}\n", line.at("transition").get<std::string>(), w, 0.05 * w);
  }
  const Outcome fitted = run(
      {"fit", folder_.file("predicted.csv", table), "--species", "H2CO", "--background", "0 K", "--json"});
  ASSERT_EQ(fitted.code, ExitCode::done) << fitted.err;
  const auto result = nlohmann::json::parse(fitted.out);
  EXPECT_NEAR(result.at("temperature_k").at("value").get<double>(), 60.0, 1e-6 * 60.0);
  EXPECT_NEAR(result.at("column_density_cm2").at("value").get<double>(), 3e13, 1e-6 * 3e13);
}

TEST_F(SpeciesVerb, ReviewsAFileAndRefusesOneThatContradictsItself) {
  const Outcome good = run({"species", "CO", "--check"});
  EXPECT_EQ(good.code, ExitCode::done);
  EXPECT_THAT(good.out, HasSubstr("0 wrong"));
  // Two levels and a line between two spin isomers, which nature does not know.
  const std::string file = folder_.file("bad.yaml", R"(name: Bad
kind: levels
levels:
  list:
    - {label: "0", energy: 0 K, degeneracy: 1, spin: para}
    - {label: "1", energy: 10 K, degeneracy: 9, spin: ortho}
  from: invented
transitions:
  list:
    - {upper: "1", lower: "0", frequency: 208.366 GHz, einstein_a: 1e-5 s-1}
  from: invented
partition: from_levels
)");
  const Outcome bad = run({"species", file, "--check"});
  EXPECT_EQ(bad.code, ExitCode::bad_input) << bad.out << bad.err;
  EXPECT_THAT(bad.out, HasSubstr("contradicts itself"));
  EXPECT_THAT(bad.out, HasSubstr("spin isomers"));
}

/// Formula and labels are the user's own text: none of it may stand in a script.
TEST_F(SpeciesVerb, DrawsHostileTextAsText) {
  const std::string file = folder_.file("hostile.yaml", R"(name: X
formula: 'a"b`touch pwned`@{/:Bold c}^_\'
kind: levels
levels:
  complete_to: 90 K
  list:
    - {label: '0"`touch pwned`', energy: 0 K, degeneracy: 1}
    - {label: "1@{^_", energy: 10 K, degeneracy: 3}
  from: invented
transitions:
  list:
    - {upper: "1@{^_", lower: '0"`touch pwned`', frequency: 208.366 GHz, einstein_a: 1e-5 s-1}
  from: invented
partition: from_levels
)");
  const std::string out = (folder_.path() / "out").string();
  const Outcome outcome = run({"species", file, "--levels", "--lines", "all", "--at", "5 K", "--out", out});
  EXPECT_EQ(outcome.code, ExitCode::done) << outcome.err;
  for (const char* script : {"levels.gp", "lines.gp"}) {
    EXPECT_THAT(read_file(out + "/" + script), Not(HasSubstr("pwned"))) << script;
  }
  EXPECT_FALSE(std::filesystem::exists(out + "/pwned"));
}

TEST_F(SpeciesVerb, ComparesTwoSpecies) {
  const Outcome same = run({"species", "H2CO", "--compare", "h2co"});
  EXPECT_THAT(same.out, HasSubstr("first / second = 1, constant within 0 %: of one convention"));
  const Outcome other = run({"species", "CO", "--compare", "13CO"});
  EXPECT_THAT(other.out, HasSubstr("no way of counting spins"));
  EXPECT_EQ(
      nlohmann::json::parse(run({"species", "CO", "--compare", "13CO", "--json"}).out).at("common_lines"),
      20);
}

}  // namespace
}  // namespace trotline
