// The species of the library against published lists and directories.

#include <gtest/gtest.h>
#include <yaml-cpp/yaml.h>

#include <cmath>
#include <map>

#include <trotline/physics/constants.hpp>
#include <trotline/species/library.hpp>
#include <trotline/species/line_list_intensity.hpp>
#include <trotline/species/species_file.hpp>

namespace trotline {
namespace {

Species from_library(const std::string& name) {
  return read_species_file(std::string(TROTLINE_SOURCE_DIR) + "/configs/species/" + name + ".yaml");
}

YAML::Node reference(const std::string& name) {
  return YAML::LoadFile(std::string(TROTLINE_SOURCE_DIR) + "/tests/reference/" + name);
}

/// Rounding of log10 to four digits, as a relative error.
constexpr double kFourDigits = 0.00005 * 2.302585;

// ---- CO, line by line

struct CoLine {
  int upper_j;
  double frequency_mhz;
  double lower_energy_per_cm;
  double degeneracy;
  double a;          ///< from the list that prints log10 A
  double intensity;  ///< from the list that prints log10 I(300 K)
};

std::vector<CoLine> co_lines() {
  std::vector<CoLine> lines;
  for (const auto& n : reference("co_lines.yaml")["lines"]) {
    lines.push_back({n["upper_j"].as<int>(), n["frequency_mhz"].as<double>(),
                     n["lower_energy_per_cm"].as<double>(), n["degeneracy"].as<double>(),
                     std::pow(10.0, n["log10_a"].as<double>()),
                     std::pow(10.0, n["log10_intensity"].as<double>())});
  }
  return lines;
}

class PublishedCo : public testing::Test {
 protected:
  [[nodiscard]] const Transition& line(int upper_j) const {
    return species.transitions.at(static_cast<std::size_t>(upper_j - 1));
  }
  const Species species = from_library("CO");
  const std::vector<CoLine> published = co_lines();
};

TEST_F(PublishedCo, FrequenciesAgreeWithin1e6) {
  ASSERT_EQ(published.size(), 8u);
  for (const CoLine& p : published) {
    EXPECT_NEAR(line(p.upper_j).frequency_hz / (p.frequency_mhz * 1e6), 1.0, 1e-8) << p.upper_j;
  }
}

TEST_F(PublishedCo, UpperEnergiesAndDegeneraciesAgree) {
  for (const CoLine& p : published) {
    const Level& upper = species.levels.at(line(p.upper_j).upper);
    const double energy_k = p.lower_energy_per_cm * constants::kKelvinPerWavenumberCm +
                            p.frequency_mhz * 1e6 * constants::kKelvinPerHz;
    EXPECT_NEAR(upper.energy_k, energy_k,
                0.00005 * constants::kKelvinPerWavenumberCm + 1e-6);  // digits printed
    EXPECT_EQ(upper.degeneracy, p.degeneracy);
    EXPECT_EQ(upper.label, fmt::format("{}", p.upper_j));
  }
}

TEST_F(PublishedCo, EinsteinAAgreesWithin1e3) {
  for (const CoLine& p : published) {
    // log10 of I, of Q and of A were each rounded to four digits on the way to the printed A.
    EXPECT_NEAR(line(p.upper_j).einstein_a_per_s / p.a, 1.0, 3 * kFourDigits) << p.upper_j;
  }
}

TEST_F(PublishedCo, EinsteinAFromIntensityAndQ300AgreesWithThatFromTheDipole) {
  const double q_300 = std::pow(10.0, reference("co_lines.yaml")["log10_q_300"].as<double>());
  for (const CoLine& p : published) {
    const double a = einstein_a_from_intensity_per_s(
        {p.intensity, p.frequency_mhz * 1e6, p.lower_energy_per_cm * constants::kKelvinPerWavenumberCm,
         p.degeneracy, q_300, 300.0});
    EXPECT_NEAR(a / line(p.upper_j).einstein_a_per_s, 1.0, 1e-3) << p.upper_j;
    EXPECT_NEAR(a / line(p.upper_j).einstein_a_per_s, 1.0, 2 * kFourDigits + 1e-4) << p.upper_j;  // I, Q; mu
  }
}

TEST_F(PublishedCo, AConstantDipoleIsTooStrongBy002PercentAt10And13PercentAt87) {
  // What the species file holds, without mu2 and mu4.
  const Species constant = parse_species(
      "name: CO\nkind: linear\n"
      "constants: {B: 57635.96804 MHz, D: 183.505284 kHz, H: 0.172302164 Hz, L: -2.55574076e-7 Hz, from: as "
      "in the library}\n"
      "dipole: {mu0: 0.1101135 D, from: as in the library}\n"
      "holds: {largest_j: 10}\n",
      "constant.yaml");
  const auto excess = [&](std::size_t i) {
    return constant.transitions[i].einstein_a_per_s / published[i].a - 1.0;
  };
  EXPECT_NEAR(excess(0), 0.0002, 3 * kFourDigits);
  EXPECT_NEAR(excess(7), 0.0133, 3 * kFourDigits);  // (1 + 64 x 1.133238e-5 / 0.1101135)^2 - 1 = 1.32 %
}

// ---- partition functions

TEST(PublishedPartitionFunctions, CoAgreesWithin01PercentFrom9To500K) {
  // Against the entry with vibrational states, which is what Q of a species means here, and against v = 0
  // alone.
  const Species co = from_library("CO");
  const auto rotation = partition_function_from_levels(co.levels);
  for (const auto& node : reference("partition_directories.yaml")) {
    if (node["species"].as<std::string>() != "CO") continue;
    const bool vibration = node["tag"].as<int>() == 28512;
    for (const auto& value : node["log10_q"]) {
      const auto t = value.first.as<double>();
      if (t < 9.0 || t > 500.0) continue;
      const double ours = vibration ? co.partition->at(t).q : rotation->at(t).q;
      EXPECT_NEAR(std::pow(10.0, value.second.as<double>()) / ours, 1.0, 1e-3) << t;
    }
  }
}

TEST(PublishedPartitionFunctions, VibrationExplainsWhatDirectoriesOfTheGroundStateLeaveOut) {
  // Trap: lists marked v = 0 may or may not include vibration in Q. These do not, and say so in their names.
  for (const auto& [name, factor_at_300_k] : std::map<std::string, double>{{"HC3N", 3.11}, {"OCS", 1.207}}) {
    const Species species = from_library(name);
    const double ratio =
        species.partition->at(300.0).q / partition_function_from_levels(species.levels)->at(300.0).q;
    EXPECT_NEAR(ratio, factor_at_300_k, 0.01) << name;
    EXPECT_NEAR(species.partition->at(30.0).q / partition_function_from_levels(species.levels)->at(30.0).q,
                1.0, 1e-3);
  }
}

// ---- measured lines of the others

TEST(PublishedFrequencies, OfMeasuredLinesAreMet) {
  for (const auto& group : reference("rest_frequencies.yaml")) {
    const Species species = from_library(group["species"].as<std::string>());
    for (const auto& entry : group["lines"]) {
      const auto j = entry.first.as<std::size_t>();
      const double mhz = species.transitions.at(j - 1).frequency_hz * 1e-6;
      EXPECT_NEAR(mhz, entry.second.as<double>(), group["residual_mhz"].as<double>())
          << species.name << ' ' << j;
    }
  }
}

struct KnownA {
  const char* species;
  const char* transition;
  double einstein_a_per_s;
};

TEST(PublishedEinsteinA, OfEightSpeciesAgreesWithin1Percent) {
  // Values of the published lists [1/s], from memory; C18O and 13CO differ by the dipole (see their files).
  for (const KnownA& known : std::vector<KnownA>{{"CS", "2-1", 1.679e-5},
                                                 {"SiO", "2-1", 2.927e-5},
                                                 {"HC3N", "10-9", 5.812e-5},
                                                 {"OCS", "19-18", 3.58e-5},
                                                 {"HCO+", "1-0", 4.187e-5},
                                                 {"13CO", "1-0", 6.294e-8},
                                                 {"C18O", "1-0", 6.266e-8},
                                                 {"CO", "3-2", 2.497e-6}}) {
    const Species species = from_library(known.species);
    const auto found = transitions_labelled(species, known.transition);
    ASSERT_EQ(found.size(), 1u) << known.species;
    EXPECT_NEAR(species.transitions[found[0]].einstein_a_per_s / known.einstein_a_per_s, 1.0, 0.01)
        << known.species;
  }
}

}  // namespace
}  // namespace trotline
