#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <numbers>

#include <trotline/survey/run.hpp>

#include "invented_survey.hpp"

namespace trotline {
namespace {

using namespace testing_survey;
using ::testing::ElementsAre;
using ::testing::HasSubstr;
using ::testing::Pair;
using testing_support::TemporaryFolder;

const Species kRotor = rotor();
constexpr double kTemperatureK = 25.0;
constexpr double kColumn = 3e13;
constexpr double kFwhm = 1.5;
constexpr double kVlsr = 5.0;

/// A thin Gaussian line J - (J-1) of RX with noise of 2 mK, 400 channels of 0.25 km/s, as text.
std::string spectrum_text(std::size_t j, unsigned seed) {
  const Transition& t = kRotor.transitions.at(j - 1);
  const Level& upper = kRotor.levels[t.upper];
  const LineConstants line{t.frequency_hz, upper.energy_k, upper.degeneracy, t.einstein_a_per_s};
  const double population = kColumn / kRotor.partition->at(kTemperatureK).q * upper.degeneracy *
                            std::exp(-upper.energy_k / kTemperatureK);
  const double w = population * intensity_per_upper_column_k_km_s_cm2(line);
  const double peak = w / kFwhm * std::sqrt(4.0 * std::numbers::ln2 / std::numbers::pi);
  std::mt19937_64 random(seed);
  std::normal_distribution<double> noise(0.0, 0.002);
  std::string text = fmt::format("# rest_frequency: {:.6f} GHz\nv_lsr [km/s],intensity [K]\n", t.frequency_hz / 1e9);
  for (int i = 0; i < 400; ++i) {
    const double v = kVlsr + 0.25 * (i - 200);
    const double x = (v - kVlsr) / kFwhm;
    text += fmt::format("{:.4f},{:.6g}\n", v, peak * std::exp(-4.0 * std::numbers::ln2 * x * x) + noise(random));
  }
  return text;
}

class SurveySpectra : public ::testing::Test {
 protected:
  /// Four files of one source, and one of another that has the lowest line only.
  void make_files() const {
    for (unsigned j = 1; j <= 4; ++j) folder.file(fmt::format("reef/{}.csv", j), spectrum_text(j, j));
    folder.file("single/Shoal.csv", spectrum_text(1, 9));
  }
  [[nodiscard]] std::string description(const std::string& more = "") const {
    return folder.file("survey.yaml",
                       "spectra:\n  - {files: reef/*.csv, source: Reef}\n  - single/*.csv\nspecies: RX\n"
                       "defaults: {vlsr: 5 km/s, window: 5 km/s, background: 0 K}\n" + more);
  }
  [[nodiscard]] std::filesystem::path out() const { return folder.path() / "out"; }

  TemporaryFolder folder;
};

TEST_F(SurveySpectra, AreMeasuredAndFitted) {
  make_files();
  run(description(), out());
  Ledger ledger = Ledger::open(out());
  const JobCounts counts = ledger.counts();
  EXPECT_EQ(counts.done, 1);
  EXPECT_EQ(counts.weak, 1);  // one line only
  const auto jobs = content(out());
  ASSERT_EQ(jobs.size(), 2U);
  EXPECT_THAT(jobs[0], HasSubstr("Reef|RX|done"));
  EXPECT_THAT(jobs[1], HasSubstr("Shoal|RX|weak"));
  const Result result = compute_job(planned(description(), nullptr), 0).result.value();
  EXPECT_EQ(result.lines.size(), 4U);
  // Within four of the errors that it states itself.
  EXPECT_NEAR(result.temperature_k.value, kTemperatureK, 4.0 * result.temperature_k.error);
  EXPECT_NEAR(result.log10_column_density_cm2.value, std::log10(kColumn), 4.0 * result.log10_column_density_cm2.error);
  EXPECT_LT(result.temperature_k.error, 0.2 * kTemperatureK);
}

TEST_F(SurveySpectra, AreMeasuredAgainOnlyWhenTheyOrTheirOptionsChange) {
  make_files();
  run(description(), out());
  const auto reasons = [&](const std::string& path) {
    Ledger ledger = Ledger::open(out());
    return reasons_of(planned(path, &ledger));
  };
  EXPECT_THAT(reasons(description()), ElementsAre(Pair("kept", 2)));
  folder.file("reef/3.csv", spectrum_text(3, 77));
  EXPECT_THAT(reasons(description()), ElementsAre(Pair("its spectra have changed", 1), Pair("kept", 1)));
  make_files();
  const std::string wider = description("exceptions: [{sources: Shoal, window: 6 km/s}]\n");
  EXPECT_THAT(reasons(wider), ElementsAre(Pair("kept", 1), Pair("options have changed: measure window", 1)));
}

TEST_F(SurveySpectra, AFileThatIsNoSpectrumCostsItsOwnSourceOnly) {
  make_files();
  folder.file("single/Bad.csv", "no spectrum\n");
  const SurveyOutcome outcome = run(description(), out());
  EXPECT_EQ(outcome.progress.counts.failed, 1);
  EXPECT_EQ(outcome.progress.counts.done, 1);
}

TEST_F(SurveySpectra, WrongOptionsAreToldWithTheRest) {
  const auto errors = [&](const std::string& text) {
    std::string all;
    for (const InputError& error : parse_survey_description(text, "survey.yaml").errors) all += std::string(error.what()) + "\n";
    return all;
  };
  const std::string told = errors(
      "spectra:\n  - {files: a.fits, vslr: 5 km/s}\n  - {files: b.fits, window: 5 K}\nspecies: CO\ndefaults: {search: wide}\n");
  EXPECT_THAT(told, HasSubstr("survey.yaml:2:"));
  EXPECT_THAT(told, HasSubstr("did you mean 'vlsr'"));
  EXPECT_THAT(told, HasSubstr("survey.yaml:3:"));
  EXPECT_THAT(told, HasSubstr("survey.yaml:5:"));
  // Without spectra there is nothing to measure.
  EXPECT_THAT(errors("tables: a.csv\nspecies: CO\ndefaults: {vlsr: 5 km/s}\n"), HasSubstr("there is no option 'vlsr'"));
}

}  // namespace
}  // namespace trotline
