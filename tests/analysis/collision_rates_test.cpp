#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <trotline/base/errors.hpp>

#include "../../src/analysis/collision_rates.hpp"
#include "analysis/simulated_table.hpp"
#include "support/temporary_folder.hpp"

namespace trotline {
namespace {

using namespace simulated_table;
using ::testing::HasSubstr;

const char* const kRates = R"(species: RX
partner: H2
from: invented
temperatures: [10 K, 40 K]
rate_unit: cm3/s
rates:
  - {upper: "1", lower: "0", values: [1e-11, 4e-11]}
  - {upper: "2", lower: "1", values: [2e-11, 2e-11]}
  - {upper: "2", lower: "0", values: [1e-11, 1e-11]}
)";

std::string with(const std::string& from, const std::string& to) {
  std::string text = kRates;
  return text.replace(text.find(from), from.size(), to);
}

std::string refusal(const std::string& text) {
  try {
    (void)parse_collision_rates(text, "rates.yaml", rotor());
  } catch (const InputError& error) {
    return error.what();
  }
  return "accepted";
}

TEST(CollisionRates, CriticalDensityIsAOverTheSumOfRatesOutOfTheLevel) {
  const Species species = rotor();
  const CollisionRates rates = parse_collision_rates(kRates, "rates.yaml", species);
  const auto density = [&](std::size_t i, double t) {
    return critical_density_per_cm3(rates, species.transitions[i], t);
  };
  EXPECT_NEAR(*density(0, 10.0), species.transitions[0].einstein_a_per_s / 1e-11, 1e-3);
  EXPECT_NEAR(*density(0, 20.0), species.transitions[0].einstein_a_per_s / 2e-11, 1e-3);  // straight in ln - ln
  EXPECT_NEAR(*density(1, 33.0), species.transitions[1].einstein_a_per_s / 3e-11, 1e-3);
  EXPECT_FALSE(density(2, 20.0));  // no rate out of the level
  EXPECT_FALSE(density(0, 9.0));   // outside the temperatures
  EXPECT_FALSE(density(0, 41.0));
}

TEST(CollisionRates, RefusesWhatItDoesNotUnderstandWithItsLine) {
  EXPECT_EQ(refusal(kRates), "accepted");
  EXPECT_EQ(refusal(with("cm3/s", "m3/s")), "accepted");
  EXPECT_THAT(refusal(with("\"1\", lower", "\"99\", lower")), ::testing::AllOf(HasSubstr("rates.yaml:7"), HasSubstr("no level '99'")));
  EXPECT_THAT(refusal(with("lower: \"0\"", "lower: \"2\"")), HasSubstr("does not lie above"));
  EXPECT_THAT(refusal(with("4e-11", "-4e-11")), HasSubstr("no rate"));
  EXPECT_THAT(refusal(with("4e-11", "nan")), HasSubstr("no rate"));
  EXPECT_THAT(refusal(with("[1e-11, 4e-11]", "[1e-11]")), HasSubstr("holds 1 rates"));
  EXPECT_THAT(refusal(with("[10 K, 40 K]", "[40 K, 10 K]")), HasSubstr("do not rise"));
  EXPECT_THAT(refusal(with("[10 K, 40 K]", "[10, 40]")), HasSubstr("no unit"));
  EXPECT_THAT(refusal(with("species: RX", "species: CO")), HasSubstr("rates of CO"));
  EXPECT_THAT(refusal(with("partner", "partners")), HasSubstr("did you mean 'partner'?"));
  EXPECT_THAT(refusal(with("cm3/s", "cm2/s")), HasSubstr("rate coefficient"));
  EXPECT_THAT(refusal("[1, 2"), HasSubstr("YAML"));
  EXPECT_THAT(refusal("7"), HasSubstr("no mapping"));
}

TEST(CollisionRates, ADensityBelowTheCriticalOneQualifiesTheVerdict) {
  const testing_support::TemporaryFolder folder;
  const Species species = rotor();
  const IntensityTable table = table_of(species, {{30.0, 1e12}}, 5);
  RunOptions options = by("likelihood");
  options.collisions = folder.file("rates.yaml", kRates);
  options.density_per_cm3 = 1e6;
  const Result dense = analyse(species, table, options);
  EXPECT_EQ(dense.verdict, "one temperature describes the lines");
  EXPECT_GT(dense.lines[0].critical_density_cm3, 100.0);
  EXPECT_TRUE(std::isnan(dense.lines[4].critical_density_cm3));
  options.density_per_cm3 = 100.0;
  EXPECT_THAT(analyse(species, table, options).verdict, HasSubstr("need not be that of the gas"));
}

}  // namespace
}  // namespace trotline
