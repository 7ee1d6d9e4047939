#include <map>

#include <trotline/physics/constants.hpp>
#include <trotline/rotor/asymmetric.hpp>

#include "rotor/molecules.hpp"
#include "rotor/published_list.hpp"

namespace trotline {
namespace {

struct Line {
  const char* upper;
  const char* lower;
  double frequency_mhz;
};

void expect_frequencies(const AsymmetricConstants& c, const std::vector<Line>& lines, double bound_mhz) {
  const RotorModel model = model_of(c, {}, 12);
  const auto index = by_label(model);
  for (const Line& line : lines) {
    const double difference_hz =
        model.levels[index.at(line.upper)].energy_hz - model.levels[index.at(line.lower)].energy_hz;
    EXPECT_NEAR(difference_hz / kMega, line.frequency_mhz, bound_mhz) << line.upper << "-" << line.lower;
  }
}

TEST(AsymmetricRotor, FrequenciesOfFormaldehydeAgreeWithMeasuredOnes) {
  // Rest frequencies in use at telescopes, from memory. Bound: left-out sextic terms, 0.1 MHz at Ka = 3.
  expect_frequencies(formaldehyde(),
                     {{"1(1,0)", "1(1,1)", 4829.6596},
                      {"2(1,1)", "2(1,2)", 14488.4801},
                      {"3(1,2)", "3(1,3)", 28974.805},
                      {"1(0,1)", "0(0,0)", 72837.948},
                      {"2(1,2)", "1(1,1)", 140839.502},
                      {"2(0,2)", "1(0,1)", 145602.949},
                      {"2(1,1)", "1(1,0)", 150498.334},
                      {"3(1,3)", "2(1,2)", 211211.468},
                      {"3(0,3)", "2(0,2)", 218222.192},
                      {"3(2,2)", "2(2,1)", 218475.632},
                      {"3(2,1)", "2(2,0)", 218760.066},
                      {"3(1,2)", "2(1,1)", 225697.775},
                      {"4(1,4)", "3(1,3)", 281526.929},
                      {"4(0,4)", "3(0,3)", 290623.405},
                      {"4(1,3)", "3(1,2)", 300836.635},
                      {"5(1,5)", "4(1,4)", 351768.645},
                      {"4(3,2)", "3(3,1)", 291380.488},
                      {"4(3,1)", "3(3,0)", 291384.264}},
                     0.1);
}

TEST(AsymmetricRotor, FrequenciesOfSulphurDioxideAgreeWithMeasuredOnes) {
  // As above, from memory. All are b-type lines, some with large changes of energy in Ka. Bound 0.1 MHz,
  // sextic terms.
  expect_frequencies(sulphur_dioxide(),
                     {{"1(1,1)", "0(0,0)", 69575.929},
                      {"3(1,3)", "2(0,2)", 104029.418},
                      {"10(1,9)", "10(0,10)", 104239.295},
                      {"8(1,7)", "8(0,8)", 83688.093},
                      {"2(2,0)", "3(1,3)", 100878.105},
                      {"4(2,2)", "4(1,3)", 146605.519},
                      {"5(2,4)", "4(1,3)", 241615.797},
                      {"4(2,2)", "3(1,3)", 235151.720},
                      {"11(1,11)", "10(0,10)", 221965.220}},
                     0.1);
}

TEST(AsymmetricRotor, FrequenciesOfIsocyanicAcidWithKa0AgreeWithMeasuredOnes) {
  // HNCO, A reduction: constants and frequencies from memory; only those are used that Ka = 0 lines test.
  AsymmetricConstants c{.a_hz = 918417.80 * kMega, .b_hz = 11071.0089 * kMega, .c_hz = 10910.5763 * kMega};
  c.diagonal.d_j_hz = 3.4904 * kKilo;
  c.off_diagonal = AReduction{.delta_j_hz = 0.0727 * kKilo};
  expect_frequencies(c,
                     {{"1(0,1)", "0(0,0)", 21981.4706},  // hyperfine components spread over 0.3 MHz
                      {"4(0,4)", "3(0,3)", 87925.238},
                      {"5(0,5)", "4(0,4)", 109905.753},
                      {"10(0,10)", "9(0,9)", 219798.320}},
                     0.2);
}

TEST(AsymmetricRotor, EnergiesOfWaterAgreeWithPublishedListToTheOcticTermsLeftOut) {
  const auto list = read_list("c018003_H2O_sample.cat");
  if (list.empty()) GTEST_SKIP() << "the published list is not at hand";
  const RotorModel model = model_of(water(), {}, 7);
  const auto index = by_label(model);
  const double hz_per_cm = 100.0 * constants::kLightMPerS;
  int compared = 0;
  for (const ListedLine& line : list) {
    const double lower_hz = line.lower_energy_cm * hz_per_cm;
    for (const auto& [label, listed_hz] :
         {std::pair(line.lower, lower_hz), std::pair(line.upper, lower_hz + line.frequency_mhz * kMega)}) {
      const auto found = index.find(label);
      if (found == index.end() || model.levels[found->second].quanta.k > 3) continue;
      // L_K is about 0.02 MHz (from memory): 0.02 * 3^8 MHz is 1.5e-5 of the energy of 3(3,0). Water is too
      // floppy for a reduced Hamiltonian of sixth order: at 8(8,0) the same terms make 0.4 %.
      EXPECT_NEAR(model.levels[found->second].energy_hz, listed_hz, 1.5e-5 * listed_hz) << label;
      ++compared;
    }
  }
  EXPECT_GE(compared, 15);
}

TEST(AsymmetricRotor, LineStrengthsOfHydrogenSulphideAgreeWithPublishedListWithin1Percent) {
  const auto list = read_list("h2s_tag034002_v2008.cat");
  if (list.empty()) GTEST_SKIP() << "the published list is not at hand";
  // Rigid constants [MHz] from memory; S hardly depends on them. Dipole and Q(300 K) are the list's own.
  const AsymmetricConstants c{
      .a_hz = 310583.57 * kMega, .b_hz = 270367.68 * kMega, .c_hz = 141820.03 * kMega};
  const double mu_c_m = 0.974 * constants::kDebyeCM;
  const RotorModel model = model_of(c, {.b_c_m = mu_c_m}, 4);
  std::map<std::string, const RotorTransition*> lines;
  for (const RotorTransition& line : model.transitions) {
    const auto label = [&](std::uint32_t i) { return label_of(model.levels[i].quanta); };
    lines[label(line.upper) + "-" + label(line.lower)] = &line;
  }
  int compared = 0;
  for (const ListedLine& listed : list) {
    const auto found = lines.find(listed.upper + "-" + listed.lower);
    if (found == lines.end()) continue;
    const double s = found->second->line_strength_mu2_c2m2 / (mu_c_m * mu_c_m);
    const int upper_j = model.levels[found->second->upper].quanta.j;
    const double listed_s = listed_line_strength(listed, 514.447, upper_j) / (mu_c_m * mu_c_m);
    if (s < 1.0) continue;  // distortion, which is left out here, counts for the weak lines
    EXPECT_NEAR(s, listed_s, 0.01 * listed_s) << found->first;
    ++compared;
  }
  EXPECT_GE(compared, 15);
}

TEST(AsymmetricRotor, LineStrengthsThatSymmetryFixesAgreeWithPublishedListToItsDigits) {
  const auto list = read_list("h2s_tag034002_v2008.cat");
  if (list.empty()) GTEST_SKIP() << "the published list is not at hand";
  // These levels stand alone in their blocks, so S depends on no constant (Townes & Schawlow, appendix V).
  const std::map<std::string, double> fixed = {{"1(1,1)-0(0,0)", 1.0},
                                               {"1(1,0)-1(0,1)", 1.5},
                                               {"2(1,2)-1(0,1)", 1.5},
                                               {"2(2,1)-1(1,0)", 1.5},
                                               {"2(2,1)-2(1,2)", 5.0 / 6.0}};
  const AsymmetricConstants any{.a_hz = 3e9, .b_hz = 2e9, .c_hz = 1e9};
  const RotorModel model = model_of(any, kAllThree, 2);
  const auto index = by_label(model);
  const double mu2 = std::pow(0.974 * constants::kDebyeCM, 2);
  std::size_t compared = 0;
  for (const ListedLine& listed : list) {
    const auto found = fixed.find(listed.upper + "-" + listed.lower);
    if (found == fixed.end()) continue;
    const std::size_t upper = index.at(listed.upper);
    const std::size_t lower = index.at(listed.lower);
    for (const RotorTransition& line : model.transitions) {
      if (line.upper == upper && line.lower == lower) {
        EXPECT_NEAR(line.line_strength_mu2_c2m2, found->second, 1e-13);
      }
    }
    // Four decimals of lg I are 1.2e-4; the constant in use and Q add 1e-4.
    EXPECT_NEAR(listed_line_strength(listed, 514.447, model.levels[upper].quanta.j) / mu2, found->second,
                3e-4 * found->second);
    ++compared;
  }
  EXPECT_EQ(compared, fixed.size());
}

}  // namespace
}  // namespace trotline
