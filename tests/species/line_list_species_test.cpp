// Species made from line lists: levels rebuilt, doubled rows, degeneracies, A from intensities.

#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <unistd.h>

#include <cmath>
#include <filesystem>
#include <fstream>
#include <map>

#include <trotline/base/errors.hpp>
#include <trotline/physics/constants.hpp>
#include <trotline/species/species_file.hpp>

#include "reference_files.hpp"

namespace trotline {
namespace {

namespace fs = std::filesystem;
using testing::HasSubstr;
using testing::IsEmpty;

class LineListSpecies : public testing::Test {
 protected:
  void SetUp() override {
    folder = fs::temp_directory_path() /
             fmt::format("trotline-list-{}-{}", ::getpid(),
                         testing::UnitTest::GetInstance()->current_test_info()->name());
    fs::create_directories(folder);
  }
  void TearDown() override { fs::remove_all(folder); }

  [[nodiscard]] Species from_list(const std::string& rows,
                                  const std::string& more = "partition: from_levels\n",
                                  const std::string& block = "  intensity: log10_a\n") const {
    std::ofstream(folder / "made.cat") << rows;
    return parse_species(
        "name: M\nkind: line_list\nline_list:\n  file: made.cat\n" + block + "  from: made up\n" + more,
        (folder / "M.yaml").string());
  }

  [[nodiscard]] std::string complaint_about(const std::string& rows,
                                            const std::string& block = "  intensity: log10_a\n") const {
    try {
      (void)from_list(rows, "partition: from_levels\n", block);
    } catch (const InputError& error) {
      return error.what();
    }
    return "accepted";
  }
  fs::path folder;
};

/// One row: frequency [MHz], E_l [1/cm], g_u, format and the 24 columns of quantum numbers.
std::string row(double mhz, double lower_per_cm, int g, int format, const std::string& quanta,
                double logarithm = -5.0) {
  return fmt::format("{:13.4f}{:8.4f}{:8.4f} 2{:10.4f}{:3}  99001{:4}{}\n", mhz, 0.001, logarithm,
                     lower_per_cm, g, format, quanta);
}

constexpr double kMhzPerWavenumberCm = 29979.2458;  // c, exact

/// Lines 1-0 to n-(n-1) of a rigid linear rotor with B = 10 GHz, each g multiplied by `weight`.
std::string linear_rows(int n, int weight = 1) {
  std::string text;
  for (int j = 1; j <= n; ++j) {
    text += row(20000.0 * j, 10000.0 * j * (j - 1) / kMhzPerWavenumberCm, weight * (2 * j + 1), 101,
                fmt::format("{:2}          {:2}          ", j, j - 1));
  }
  return text;
}

TEST_F(LineListSpecies, RefusesAnAThatNoLineHas) {
  const std::string rows = linear_rows(5) + row(120000.0, 10000.0 * 30 / kMhzPerWavenumberCm, 13, 101,
                                                " 6           5          ", 99.0);
  EXPECT_THAT(complaint_about(rows), testing::AllOf(HasSubstr("made.cat:6"), HasSubstr("A would be")));
}

TEST_F(LineListSpecies, RebuildsTheLevelsOfALinearRotor) {
  const Species species = from_list(linear_rows(40));
  ASSERT_EQ(species.levels.size(), 41u);
  ASSERT_EQ(species.transitions.size(), 40u);
  EXPECT_THAT(species.warnings, IsEmpty());
  for (std::size_t j = 0; j < species.levels.size(); ++j) {
    EXPECT_EQ(species.levels[j].label, fmt::format("{}", j));
    EXPECT_EQ(species.levels[j].degeneracy, 2.0 * static_cast<double>(j) + 1.0);
    const double exact_k = 10e9 * static_cast<double>(j * (j + 1)) * constants::kKelvinPerHz;
    EXPECT_NEAR(species.levels[j].energy_k, exact_k,
                0.00006 * constants::kKelvinPerWavenumberCm);  // digits printed
  }
  EXPECT_DOUBLE_EQ(species.transitions[0].einstein_a_per_s, 1e-5);
  EXPECT_EQ(species.transitions[0].frequency_sigma_hz, 1e3);
}

TEST_F(LineListSpecies, GivesTheLowestLevelTheSpinWeightOfItsLines) {
  const Species species = from_list(linear_rows(10, 3));
  EXPECT_EQ(species.levels[0].degeneracy, 3.0);
  EXPECT_EQ(species.levels[5].degeneracy, 33.0);
}

TEST_F(LineListSpecies, GivesAFromIntensityAndQ300) {
  // Two lists of the same rotor: one prints A, the other the intensity that goes with it.
  const Species from_a = from_list(linear_rows(60));
  const double q = from_a.partition->at(300.0).q;
  std::string rows;
  for (int j = 1; j <= 60; ++j) {
    const double mhz = 20000.0 * j;
    const double lower = 10000.0 * j * (j - 1) / kMhzPerWavenumberCm;
    const double x = constants::kKelvinPerWavenumberCm / 300.0;
    const double populations = std::exp(-lower * x) - std::exp(-(lower + mhz / kMhzPerWavenumberCm) * x);
    // I = A g/Q (...) / (8 pi nu^2/c^2), which is 2.79639459e-16 nu^2 with nu in MHz and I in nm2 MHz.
    const double intensity = 1e-5 * (2 * j + 1) / q * populations / (2.79639459e-16 * mhz * mhz);
    rows += row(mhz, lower, 2 * j + 1, 101, fmt::format("{:2}          {:2}          ", j, j - 1),
                std::log10(intensity));
  }
  const std::string block = "  intensity: integrated_300k\n";
  const Species stated =
      from_list(rows, fmt::format("partition: {{q_300: {:.6f}, from: made up}}\n", q), block);
  EXPECT_THAT(stated.warnings, IsEmpty());
  for (const Transition& line : stated.transitions) {
    EXPECT_NEAR(line.einstein_a_per_s / 1e-5, 1.0, 0.00005 * 2.302585 + 1e-6);  // digits of log10 I
  }
  // Without a stated Q the sum stands in, and the species says so.
  const Species unstated = from_list(rows, "partition: from_levels\n", block);
  EXPECT_NEAR(unstated.transitions[7].einstein_a_per_s / stated.transitions[7].einstein_a_per_s, 1.0, 1e-6);
  ASSERT_EQ(unstated.warnings.size(), 1u);
  EXPECT_THAT(unstated.warnings[0], HasSubstr("Q(300 K)"));
}

// ---- +K and -K

/// Two lines of a symmetric top, B = 10 GHz, K = 0 once and K = 1 as the pair that it is.
std::string symmetric_rows(const std::string& k_of_second_upper, const std::string& k_of_second_lower) {
  const double k1 = 5.0;  // (A - B) in 1/cm
  const double first = 20000.0 / kMhzPerWavenumberCm;
  return row(20000.0, 0.0, 3, 202, " 1 0         0 0        ") +
         row(40000.0, first, 5, 202, " 2 0         1 0        ") +
         row(40000.1, first + k1, 5, 202, " 2 1         1 1        ") +
         row(40000.1, first + k1, 5, 202,
             " 2" + k_of_second_upper + "         1" + k_of_second_lower + "        ");
}

TEST_F(LineListSpecies, PlusAndMinusKAreOneLevelOfTwiceTheWeight) {
  for (const auto& [upper, lower] :
       std::map<std::string, std::string>{{" 1", " 1"}, {"-1", "-1"}, {"-1 ", "-1"}}) {
    if (upper.size() != 2) continue;
    const Species species = from_list(symmetric_rows(upper, lower));
    ASSERT_EQ(species.transitions.size(), 3u);
    const Transition& pair = species.transitions[2];
    EXPECT_EQ(transition_label(species, pair), "2(1)-1(1)");
    EXPECT_EQ(species.levels[pair.upper].degeneracy, 10.0);  // 2 (2J+1)
    EXPECT_EQ(species.levels[pair.lower].degeneracy, 6.0);
    EXPECT_DOUBLE_EQ(pair.einstein_a_per_s, 1e-5);  // as each row has it: A does not double
    EXPECT_EQ(species.levels[species.transitions[1].upper].degeneracy, 5.0);  // K = 0 stays
    ASSERT_EQ(species.warnings.size(), 1u);
    EXPECT_THAT(species.warnings[0], HasSubstr("1 pairs of rows"));
  }
}

TEST_F(LineListSpecies, ASplitPairOfKStaysTwoLines) {
  std::string rows = symmetric_rows("-1", "-1");
  const std::string last = rows.substr(rows.size() - 80);
  rows.resize(rows.size() - 80);
  const Species species = from_list(rows + "   40003.5000" + last.substr(13));
  ASSERT_EQ(species.transitions.size(), 4u);
  EXPECT_EQ(transition_label(species, species.transitions[3]), "2(-1)-1(-1)");
  EXPECT_EQ(species.levels[species.transitions[3].upper].degeneracy, 5.0);
}

TEST_F(LineListSpecies, RowsDoubledWithoutKNeedAWordOfTheFile) {
  const std::string rows = linear_rows(3) + linear_rows(1);
  EXPECT_THAT(complaint_about(rows), HasSubstr("made.cat:4: the row repeats line 1"));
  const Species once =
      from_list(rows, "partition: from_levels\n", "  intensity: log10_a\n  doubled_rows: once\n");
  EXPECT_EQ(once.levels[1].degeneracy, 3.0);
  EXPECT_EQ(once.transitions.size(), 3u);
}

TEST_F(LineListSpecies, ThreeOfAKindAreRefused) {
  EXPECT_THAT(complaint_about(linear_rows(1) + linear_rows(1) + linear_rows(1),
                              "  intensity: log10_a\n  doubled_rows: sum\n"),
              HasSubstr("made.cat:3: the row stands in the list for the third time (first in line 1)"));
}

// ---- degeneracies

TEST_F(LineListSpecies, FindsHalfIntegerMomentaByTheirDegeneracies) {
  // J = 1-0 with a nucleus of spin 1/2, F printed rounded up, the format's half-integer bit unset as in some
  // lists.
  const Species species = from_list(row(20000.0, 0.0, 4, 102, " 1 2         0 1        ") +
                                    row(20000.5, 0.0, 2, 102, " 1 1         0 1        "));
  ASSERT_EQ(species.levels.size(), 3u);
  EXPECT_EQ(species.levels[0].degeneracy, 2.0);
  EXPECT_EQ(species.levels[0].label, "0,1/2");
  EXPECT_EQ(transition_label(species, species.transitions[0]), "1,3/2-0,1/2");
}

TEST_F(LineListSpecies, TakesDegeneraciesFromTheFileWhereTheListHidesThem) {
  // g of neither quantum number: an invented format whose levels carry a weight of their own.
  const std::string rows = row(20000.0, 0.0, 7, 902, " 1 5         0 2        ");
  const std::string names = "  intensity: log10_a\n  quantum_numbers: [a, b]\n";
  EXPECT_THAT(complaint_about(rows, names), HasSubstr("the level '0,2' is the upper one of no row"));
  EXPECT_THAT(complaint_about(rows, names), HasSubstr("degeneracies: {\"0,2\": 1}"));
  const Species species =
      from_list(rows, "partition: from_levels\n", names + "  degeneracies: {\"0,2\": 4}\n");
  EXPECT_EQ(species.levels[0].degeneracy, 4.0);
  EXPECT_THAT(complaint_about(rows, names + "  degeneracies: {\"9,9\": 4}\n"),
              HasSubstr("there is no level '9,9'"));
}

// ---- lists that contradict themselves

TEST_F(LineListSpecies, RefusesListsThatContradictThemselves) {
  const std::string first = row(20000.0, 0.0, 3, 101, " 1           0          ");
  EXPECT_THAT(complaint_about(first + row(40000.0, 3.0, 5, 101, " 2           1          ")),
              HasSubstr("made.cat:2: the level '1' lies at 3.0000 cm-1 here, but at 0.6671 cm-1 in line 1"));
  EXPECT_THAT(complaint_about(first + row(20000.001, 0.0, 9, 101, " 1           0          ")),
              HasSubstr("made.cat:2: the upper level '1' has the degeneracy 9 here, but 3"));
  EXPECT_THAT(complaint_about(first + row(20000.0, 0.0, 3, 303, " 1 0 1       0 0 0      ")),
              HasSubstr("made.cat:2: the quantum-number format is 303, but 101"));
  EXPECT_THAT(complaint_about(row(20000.0, 0.0, 3, 973, " 1 0 1       0 0 0      ")),
              HasSubstr("made.cat:1: what the 3 quantum numbers of format 973 are is not known"));
  EXPECT_THAT(complaint_about(first, "  intensity: log10_a\n  quantum_numbers: [J, K]\n"),
              HasSubstr("made.cat:1: the rows have 1 quantum numbers, the species file names 2"));
  EXPECT_THAT(complaint_about("nonsense"), HasSubstr("made.cat:1:8"));
  EXPECT_THAT(complaint_about(first, "  intensity: integrated\n"), HasSubstr("M.yaml:5:14"));
  EXPECT_THAT(complaint_about(first, "  intensity: log10_a\n  doubled_rows: twice\n"),
              HasSubstr("plus_and_minus_k, sum or once"));
  EXPECT_THAT(complaint_about(first, "  intensity: integrated_300k\n"),
              HasSubstr("neither a table nor the levels give Q at 300 K"));
}

TEST_F(LineListSpecies, SaysThatTheFileIsMissing) {
  try {
    (void)parse_species(
        "name: M\nkind: line_list\nline_list: {file: none.cat, intensity: log10_a, from: x}\n",
        (folder / "M.yaml").string());
    FAIL() << "a list that is not there was read";
  } catch (const InputError& error) {
    EXPECT_THAT(error.what(), HasSubstr("none.cat: there is no such file"));
  }
}

TEST_F(LineListSpecies, SaysWhatIsWrongInATableFile) {
  std::ofstream(folder / "q.txt") << "# T Q\n10 3.1\n20 6.5 0.81\n30\n";
  try {
    (void)from_list(linear_rows(5), "partition: {file: q.txt, temperature_unit: K, from: made up}\n");
    FAIL() << "a broken table was read";
  } catch (const InputError& error) {
    EXPECT_THAT(error.what(), HasSubstr("q.txt:4: the row is '30'; expected a temperature and Q"));
  }
}

// ---- published lists as species

class PublishedListSpecies : public testing::Test {
 protected:
  static Species from(const std::string& list, const std::string& rest) {
    const std::string file = test::reference_file("line_lists/" + list).string();
    return parse_species("name: P\nkind: line_list\nline_list: {file: \"" + file +
                             "\", intensity: integrated_300k, from: CDMS documentation}\n" + rest,
                         "P.yaml");
  }
  void SetUp() override {
    if (test::reference_file("line_lists").empty()) GTEST_SKIP() << "no reference files here";
  }
  static std::string table(const std::string& name) {
    return "partition: {file: \"" + test::reference_file("partition/" + name).string() +
           "\", temperature_unit: K, from: CDMS documentation}\n";
  }
};

TEST_F(PublishedListSpecies, CoGivesTheAOfItsDipole) {
  // The entry's Q(300 K) = 108.8651 and dipole stand in its .int file.
  const Species co = from("co_tag028503_v2008.cat", "partition: {q_300: 108.8651, from: its .int file}\n");
  EXPECT_THAT(co.warnings, IsEmpty());
  const Species rotor = read_species_file(std::string(TROTLINE_SOURCE_DIR) + "/configs/species/CO.yaml");
  for (std::size_t i = 0; i < 8; ++i) {
    EXPECT_NEAR(co.transitions[i].einstein_a_per_s / rotor.transitions[i].einstein_a_per_s, 1.0, 2e-4) << i;
    EXPECT_NEAR(co.levels[i + 1].energy_k, rotor.levels[i + 1].energy_k, 1e-4) << i;
  }
  // To the last line of the rotor's: log10 I has four digits.
  for (std::size_t i = 8; i < 60; ++i) {
    EXPECT_NEAR(co.transitions[i].einstein_a_per_s / rotor.transitions[i].einstein_a_per_s, 1.0, 5e-4) << i;
  }
}

TEST_F(PublishedListSpecies, CompleteListsGiveTheirOwnTableOfQ) {
  for (const auto& [list, name] :
       std::map<std::string, std::string>{{"co_tag028503_v2008.cat", "co_tag028503.qtable.txt"},
                                          {"h2s_tag034002_v2008.cat", "h2s_tag034002.qtable.txt"}}) {
    const Species species = from(list, table(name));
    EXPECT_THAT(species.warnings, IsEmpty()) << list;
    EXPECT_THAT(species.partition->description(), HasSubstr("sum over"))
        << list;  // agrees at 1000 temperatures
  }
}

TEST_F(PublishedListSpecies, OrthoAndParaWeightsOfH2sComeFromTheList) {
  const Species h2s = from("h2s_tag034002_v2008.cat", "partition: {q_300: 514.447, from: its .int file}\n");
  EXPECT_THAT(h2s.warnings, IsEmpty());
  const auto weight = [&](const std::string& label, int j) {
    for (const Level& level : h2s.levels) {
      if (level.label == label) return level.degeneracy / (2 * j + 1);
    }
    return 0.0;
  };
  EXPECT_EQ(weight("0(0,0)", 0), 1.0);  // para; the upper level of no line
  EXPECT_EQ(weight("1(0,1)", 1), 3.0);  // ortho: Ka + Kc odd
  EXPECT_EQ(weight("1(1,1)", 1), 1.0);
  EXPECT_EQ(weight("4(2,3)", 4), 3.0);
}

TEST_F(PublishedListSpecies, Ch3cnPairsOfKAreSummed) {
  // Q(300 K) = 14683.6324 of the entry includes vibration, and the levels of the list do not: that is
  // reported.
  const Species ch3cn =
      from("ch3cn_tag041505_v2008.cat", "partition: {q_300: 14683.6324, from: its .int file}\n");
  EXPECT_EQ(ch3cn.transitions.size(), 3357u - 1629u);
  ASSERT_EQ(ch3cn.warnings.size(), 2u);
  EXPECT_THAT(ch3cn.warnings[0], HasSubstr("1629 pairs of rows"));
  EXPECT_THAT(ch3cn.warnings[1], HasSubstr("vibration is counted"));
  for (const Level& level : ch3cn.levels) {
    const int j = std::stoi(level.label);
    const int k = std::stoi(level.label.substr(level.label.find('(') + 1));
    // Weights 2 for K = 0; 4 for both components of K = 3, 6 ...; 2 for both of the others.
    const double weight = k == 0 || k % 3 != 0 ? 2.0 : 4.0;
    EXPECT_EQ(level.degeneracy, weight * (2 * j + 1)) << level.label;
  }
  // Both directories, below the temperatures where vibration counts: log10 Q = 1.8068, 2.2157, 2.6523.
  EXPECT_NEAR(std::log10(ch3cn.partition->at(9.375).q), 1.8068, 0.0001);
  EXPECT_NEAR(std::log10(ch3cn.partition->at(18.75).q), 2.2157, 0.0001);
  EXPECT_NEAR(std::log10(ch3cn.partition->at(37.5).q), 2.6523, 0.0001);
}

TEST_F(PublishedListSpecies, VibrationAccountsForQOfCh3cn) {
  // JPL entry 41001: log10 Q(150) = 3.5806, Q(225) = 3.9055, Q(300) = 4.1668. The lowest mode, nu8 = 365 cm-1
  // twofold (Shimanouchi 1972), makes most of it; 917 (2), 920, 1041 (2) cm-1 follow.
  const Species ch3cn =
      from("ch3cn_tag041505_v2008.cat",
           "partition: {q_300: 14683.6324, from: its .int file}\n"
           "vibration: {modes: [{energy: 365 cm-1, degeneracy: 2}, {energy: 917 cm-1}, "
           "{energy: 920 cm-1}, {energy: 1041 cm-1, degeneracy: 2}], from: Shimanouchi 1972}\n");
  EXPECT_NEAR(ch3cn.partition->at(150.0).q / std::pow(10.0, 3.5806), 1.0, 0.01);
  EXPECT_NEAR(ch3cn.partition->at(225.0).q / std::pow(10.0, 3.9055), 1.0, 0.02);
}

TEST_F(PublishedListSpecies, AListWithoutItsLowestLevelKeepsItsZero) {
  const Species bend = from("oc33s_tag061999_v2008.cat", table("oc33s_tag061999.qtable.txt"));
  EXPECT_NEAR(bend.levels.front().energy_k, 0.4020 * constants::kKelvinPerWavenumberCm, 1e-3);
  EXPECT_THAT(bend.warnings.at(0), HasSubstr("0.4020 cm-1"));
}

}  // namespace
}  // namespace trotline
