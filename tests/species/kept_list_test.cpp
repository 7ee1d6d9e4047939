// Long line lists reopen as they were, and only while nothing has changed.

#include <fmt/format.h>
#include <gtest/gtest.h>

#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <numbers>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/species/species_file.hpp>

#include "support/temporary_folder.hpp"

namespace trotline {
namespace {

namespace fs = std::filesystem;

class KeptList : public testing::Test {
 protected:
  void SetUp() override {
    ::setenv("TROTLINE_CACHE", (folder.path() / "kept").c_str(), 1);
    write_list(27000);
  }
  void TearDown() override { ::unsetenv("TROTLINE_CACHE"); }

  /// A rigid rotor's K ladders: E = B J(J+1) + (A - B) K^2 with B = 1 GHz, A = 60 GHz.
  void write_list(int rows) const {
    constexpr double kPerGhz = 1.0 / 29.9792458;  // c, exact
    std::string text;
    for (int i = 0; i < rows; ++i) {
      const int j = 1 + i / 90;
      const int k = std::min(i % 90, j - 1);
      if (k != i % 90) continue;
      const double lower_per_cm = (1.0 * j * (j - 1) + 59.0 * k * k) * kPerGhz;
      const double log10_boltzmann = -lower_per_cm / 208.51 / std::numbers::ln10;  // kT/hc at 300 K
      fmt::format_to(std::back_inserter(text),
                     "{:13.4f}{:8.4f}{:8.4f} 3{:10.4f}{}  99001 202{}{:2}        {}{:2}        \n",
                     2000.0 * j, 0.001, -5.0 + log10_boltzmann, lower_per_cm, degeneracy(2 * j + 1),
                     number(j), k, number(j - 1), k);
    }
    folder.file("made.cat", text);
  }

  /// As the format writes degeneracies above 999 and quantum numbers above 99.
  static std::string degeneracy(int g) {
    return g < 1000 ? fmt::format("{:3}", g)
                    : fmt::format("{}{:02}", static_cast<char>('A' + (g - 1000) / 100), g % 100);
  }
  static std::string number(int n) {
    return n < 100 ? fmt::format("{:2}", n)
                   : fmt::format("{}{}", static_cast<char>('A' + (n - 100) / 10), n % 10);
  }

  [[nodiscard]] Species open(const std::string& more = "q_300: 4000") const {
    const std::string file =
        folder.file("M.yaml",
                    "name: M\nkind: line_list\nline_list:\n  file: made.cat\n  intensity: integrated_300k\n"
                    "  quantum_numbers: [J, K]\n  from: made up\npartition:\n  " +
                        more + "\n  from: made up\n");
    return read_species_file(file);
  }

  [[nodiscard]] fs::path kept_file() const {
    for (const auto& entry : fs::directory_iterator(folder.path() / "kept")) return entry.path();
    throw std::runtime_error("nothing was kept");
  }

  testing_support::TemporaryFolder folder;
};

void expect_same(const Species& a, const Species& b) {
  ASSERT_EQ(a.levels.size(), b.levels.size());
  for (std::size_t i = 0; i < a.levels.size(); ++i) {
    ASSERT_EQ(a.levels[i].label, b.levels[i].label);
    ASSERT_EQ(a.levels[i].energy_k, b.levels[i].energy_k);
    ASSERT_EQ(a.levels[i].degeneracy, b.levels[i].degeneracy);
  }
  ASSERT_EQ(a.transitions.size(), b.transitions.size());
  for (std::size_t i = 0; i < a.transitions.size(); ++i) {
    ASSERT_EQ(a.transitions[i].upper, b.transitions[i].upper);
    ASSERT_EQ(a.transitions[i].lower, b.transitions[i].lower);
    ASSERT_EQ(a.transitions[i].frequency_hz, b.transitions[i].frequency_hz);
    ASSERT_EQ(a.transitions[i].frequency_sigma_hz, b.transitions[i].frequency_sigma_hz);
    ASSERT_EQ(a.transitions[i].einstein_a_per_s, b.transitions[i].einstein_a_per_s);
  }
  EXPECT_EQ(a.warnings, b.warnings);
  EXPECT_EQ(a.partition->at(100.0).q, b.partition->at(100.0).q);
}

TEST_F(KeptList, ReopensAsItWasRead) {
  const Species first = open();
  ASSERT_GT(first.transitions.size(), 20000u);
  const auto written = fs::last_write_time(kept_file());
  const Species second = open();
  expect_same(first, second);
  EXPECT_EQ(fs::last_write_time(kept_file()), written) << "the second reading was no reopening";
}

TEST_F(KeptList, IsReadAnewWhereTheListHasChanged) {
  const std::size_t before = open().transitions.size();
  write_list(26990);
  EXPECT_EQ(open().transitions.size(), before - 10);
}

TEST_F(KeptList, IsReadAnewWhereTheSpeciesFileHasChanged) {
  const Species first = open();
  const Species other = open("q_300: 8000");
  EXPECT_NEAR(other.transitions[7].einstein_a_per_s / first.transitions[7].einstein_a_per_s, 2.0, 1e-12);
}

/// The table of Q lies in a file of its own, which the species file's fingerprint does not know.
TEST_F(KeptList, IsReadAnewWhereTheTableOfQHasChanged) {
  const auto table = [&](double factor) {
    std::string text;
    for (const double t : {10.0, 20.0, 40.0, 80.0, 150.0, 300.0, 500.0}) {
      text += fmt::format("{} {}\n", t, factor * std::pow(t, 1.5));
    }
    folder.file("q.txt", text);
  };
  table(1.0);
  const Species first = open("file: q.txt\n  temperature_unit: K");
  table(2.0);
  const Species other = open("file: q.txt\n  temperature_unit: K");
  EXPECT_NEAR(other.transitions[7].einstein_a_per_s / first.transitions[7].einstein_a_per_s, 2.0, 1e-9);
}

TEST_F(KeptList, IsReadAnewWhereItsBytesAreDamaged) {
  const Species first = open();
  const std::string good = read_file(kept_file().string());
  for (const std::size_t place : {std::size_t{3}, std::size_t{20}, good.size() / 2, good.size() - 3}) {
    std::string bad = good;
    bad[place] = static_cast<char>(bad[place] ^ 0x20);
    std::ofstream(kept_file(), std::ios::binary) << bad;
    expect_same(first, open());
    EXPECT_TRUE(read_file(kept_file().string()) == good) << "byte " << place;
  }
  for (const std::size_t length : {std::size_t{0}, std::size_t{10}, std::size_t{64}, good.size() - 8}) {
    std::ofstream(kept_file(), std::ios::binary) << good.substr(0, length);
    expect_same(first, open());
  }
}

/// Rows that cannot be sorted, and A that no line has: both end with the row's own line.
TEST_F(KeptList, RefusesRowsThatAreNoNumbers) {
  folder.file("q.txt", "10 1\n20 2\nnan 3\n40 4\n50 5\n");
  try {
    (void)open("file: q.txt\n  temperature_unit: K");
    FAIL() << "accepted";
  } catch (const InputError& error) {
    EXPECT_EQ(error.place().line, 3u) << error.what();
  }
}

TEST_F(KeptList, MayBeImpossibleToKeep) {
  ::setenv("TROTLINE_CACHE", "/proc/no-such-folder", 1);
  expect_same(open(), open());
}

}  // namespace
}  // namespace trotline
