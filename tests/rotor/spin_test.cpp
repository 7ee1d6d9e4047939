#include <trotline/base/errors.hpp>
#include <trotline/rotor/spin.hpp>

namespace trotline {
namespace {

QuantumNumbers asymmetric(int j, int ka, int kc) {
  return {static_cast<std::int16_t>(j), kNoQuantum, static_cast<std::int16_t>(ka),
          static_cast<std::int16_t>(kc), 0};
}

QuantumNumbers symmetric(int j, int k, int inversion = 0) {
  return {static_cast<std::int16_t>(j), kNoQuantum, static_cast<std::int16_t>(k), kNoQuantum,
          static_cast<std::int8_t>(inversion)};
}

QuantumNumbers linear(int j) { return {static_cast<std::int16_t>(j), kNoQuantum, kNoQuantum, kNoQuantum, 0}; }

SpinRequest pairs(const char* rule, char axis, std::vector<double> spins) {
  return {rule, axis, std::move(spins)};
}

// Which levels are ortho: common knowledge of the trade (Gordy & Cook, ch. III; Mangum & Shirley 2015), from
// memory.
TEST(Spin, FormaldehydeIsOrthoForOddKa) {
  const auto rule = make_spin_rule(pairs("c2v", 'a', {0.5}));
  EXPECT_EQ(rule->at(asymmetric(1, 1, 1)).weight, 3);
  EXPECT_EQ(rule->at(asymmetric(1, 1, 1)).isomer, "ortho");
  EXPECT_EQ(rule->at(asymmetric(1, 0, 1)).weight, 1);
  EXPECT_EQ(rule->at(asymmetric(2, 2, 0)).isomer, "para");
}

TEST(Spin, WaterIsOrthoForOddSumOfKaAndKc) {
  const auto rule = make_spin_rule(pairs("c2v", 'b', {0.5}));
  EXPECT_EQ(rule->at(asymmetric(1, 0, 1)).isomer, "ortho");
  EXPECT_EQ(rule->at(asymmetric(1, 1, 0)).weight, 3);
  EXPECT_EQ(rule->at(asymmetric(1, 1, 1)).isomer, "para");
  EXPECT_EQ(rule->at(asymmetric(6, 1, 6)).isomer, "ortho");  // the 22 GHz maser line is ortho
}

TEST(Spin, SulphurDioxideHasOnlyEvenSumsOfKaAndKc) {
  const auto rule = make_spin_rule(pairs("c2v", 'b', {0.0}));
  EXPECT_EQ(rule->at(asymmetric(1, 1, 1)).weight, 1);
  EXPECT_EQ(rule->at(asymmetric(1, 0, 1)).weight, 0);
  EXPECT_EQ(rule->at(asymmetric(1, 1, 1)).isomer, "");
}

TEST(Spin, PairsOfSpinlessNucleiDoNotChangeTheWeightsOfCyclopropenylidene) {
  const auto rule = make_spin_rule(pairs("c2v", 'b', {0.5, 0.0}));
  EXPECT_EQ(rule->at(asymmetric(1, 0, 1)).weight, 3);
  EXPECT_EQ(rule->at(asymmetric(1, 1, 1)).weight, 1);
}

TEST(Spin, TwoDeuteronsGiveSixToThreeWithTheEvenLevelsHeavier) {
  // Bosons of spin 1: 6 symmetric and 3 antisymmetric functions, here without their common factor.
  const auto rule = make_spin_rule(pairs("c2v", 'a', {1.0}));
  EXPECT_EQ(rule->at(asymmetric(1, 0, 1)).weight, 2);
  EXPECT_EQ(rule->at(asymmetric(1, 0, 1)).isomer, "ortho");
  EXPECT_EQ(rule->at(asymmetric(1, 1, 1)).weight, 1);
}

TEST(Spin, AxisCExchangesByKc) {
  const auto rule = make_spin_rule(pairs("c2v", 'c', {0.5}));
  EXPECT_EQ(rule->at(asymmetric(1, 0, 1)).isomer, "ortho");
  EXPECT_EQ(rule->at(asymmetric(1, 1, 0)).isomer, "para");
}

TEST(Spin, AcetyleneIsOrthoForOddJAndTricarbonHasOnlyEvenJ) {
  const auto acetylene = make_spin_rule(pairs("dinfh", 0, {0.5, 0.0}));
  EXPECT_EQ(acetylene->at(linear(1)).isomer, "ortho");
  EXPECT_EQ(acetylene->at(linear(1)).weight, 3);
  EXPECT_EQ(acetylene->at(linear(2)).weight, 1);
  const auto tricarbon = make_spin_rule(pairs("dinfh", 0, {0.0}));
  EXPECT_EQ(tricarbon->at(linear(2)).weight, 1);
  EXPECT_EQ(tricarbon->at(linear(3)).weight, 0);
}

TEST(Spin, MolecularOxygenHasOnlyOddN) {
  SpinRequest request = pairs("dinfh", 0, {0.0});
  request.state_is_antisymmetric = true;
  const auto rule = make_spin_rule(request);
  EXPECT_EQ(rule->at({.j = 0, .n = 1}).weight, 1);
  EXPECT_EQ(rule->at({.j = 1, .n = 0}).weight, 0);
}

TEST(Spin, MethylCyanideHasTwiceTheWeightForKThatThreeDivides) {
  const auto rule = make_spin_rule(pairs("c3v", 0, {0.5}));
  for (const int k : {0, 3, 6, 9}) {
    EXPECT_EQ(rule->at(symmetric(12, k)).weight, 2);
    EXPECT_EQ(rule->at(symmetric(12, k)).isomer, "A");
  }
  for (const int k : {1, 2, 4, 5}) {
    EXPECT_EQ(rule->at(symmetric(12, k)).weight, 1);
    EXPECT_EQ(rule->at(symmetric(12, k)).isomer, "E");
  }
}

TEST(Spin, ThreeDeuteronsGiveElevenToEight) {
  // 27 functions: A1 10, A2 1, E 8 pairs (Townes & Schawlow, section 3-4, from memory).
  const auto rule = make_spin_rule(pairs("c3v", 0, {1.0}));
  EXPECT_EQ(rule->at(symmetric(1, 0)).weight, 11);
  EXPECT_EQ(rule->at(symmetric(1, 1)).weight, 8);
}

TEST(Spin, AmmoniaHasOneInversionLevelForKZero) {
  const auto rule = make_spin_rule({.rule = "d3h"});
  // The 572.5 GHz line is 1(0)s - 0(0)a: those two exist and their partners do not (from memory).
  EXPECT_EQ(rule->at(symmetric(0, 0, -1)).weight, 2);
  EXPECT_EQ(rule->at(symmetric(0, 0, +1)).weight, 0);
  EXPECT_EQ(rule->at(symmetric(1, 0, +1)).weight, 2);
  EXPECT_EQ(rule->at(symmetric(1, 0, -1)).weight, 0);
  EXPECT_EQ(rule->at(symmetric(3, 3, -1)).weight, 2);
  EXPECT_EQ(rule->at(symmetric(3, 3, +1)).isomer, "ortho");
  EXPECT_EQ(rule->at(symmetric(1, 1, +1)).weight, 1);
  EXPECT_EQ(rule->at(symmetric(2, 2, -1)).isomer, "para");
}

TEST(Spin, NoneGivesEveryLevelWeightOne) {
  const auto rule = make_spin_rule({});
  EXPECT_EQ(rule->at(linear(7)).weight, 1);
  EXPECT_EQ(rule->at(asymmetric(7, 3, 5)).isomer, "");
}

TEST(Spin, AnUnknownRuleIsRefusedWithTheNearestName) {
  try {
    (void)make_spin_rule({.rule = "c3w"});
    FAIL() << "no error";
  } catch (const InputError& error) {
    EXPECT_THAT(error.what(), testing::HasSubstr("did you mean 'c3v'?"));
    EXPECT_THAT(error.what(), testing::HasSubstr("c2v, c3v, d3h, dinfh, none"));
  }
}

TEST(Spin, RequestsThatCannotBeMeantAreRefused) {
  EXPECT_THROW((void)make_spin_rule(pairs("c2v", 0, {0.5})), InputError);
  EXPECT_THROW((void)make_spin_rule(pairs("c2v", 'x', {0.5})), InputError);
  EXPECT_THROW((void)make_spin_rule(pairs("c2v", 'a', {})), InputError);
  EXPECT_THROW((void)make_spin_rule(pairs("c2v", 'a', {0.3})), InputError);
  EXPECT_THROW((void)make_spin_rule(pairs("c2v", 'a', {-0.5})), InputError);
  EXPECT_THROW((void)make_spin_rule(pairs("c2v", 'a', {std::nan("")})), InputError);
  EXPECT_THROW((void)make_spin_rule(pairs("c3v", 0, {0.5, 0.5})), InputError);
  EXPECT_THROW((void)make_spin_rule(pairs("d3h", 0, {1.0})), InputError);
}

TEST(Spin, ARuleRefusesLevelsOfAnotherRotor) {
  EXPECT_THROW((void)make_spin_rule(pairs("c2v", 'a', {0.5}))->at(linear(1)), DomainError);
  EXPECT_THROW((void)make_spin_rule(pairs("c3v", 0, {0.5}))->at(asymmetric(1, 1, 0)), DomainError);
  EXPECT_THROW((void)make_spin_rule(pairs("dinfh", 0, {0.5}))->at(symmetric(1, 1)), DomainError);
  EXPECT_THROW((void)make_spin_rule({.rule = "d3h"})->at(symmetric(1, 1)), DomainError);
}

}  // namespace
}  // namespace trotline
