#include <gtest/gtest.h>

#include <trotline/report/typeset.hpp>

namespace trotline {
namespace {

// The texts expected follow the usual way to write these species in the trade.
TEST(Typeset, LowersCounts) {
  EXPECT_EQ(typeset_formula("CH3CN"), "CH₃CN");
  EXPECT_EQ(typeset_formula("c-C3H2"), "c-C₃H₂");
  EXPECT_EQ(typeset_formula("HC11N"), "HC₁₁N");
  EXPECT_EQ(typeset_formula("(CH3)2CO"), "(CH₃)₂CO");
  EXPECT_EQ(typeset_formula("C60"), "C₆₀");
  EXPECT_EQ(typeset_formula("SiO"), "SiO");
}

TEST(Typeset, RaisesMassNumbers) {
  EXPECT_EQ(typeset_formula("13CO"), "¹³CO");
  EXPECT_EQ(typeset_formula("C18O"), "C¹⁸O");
  EXPECT_EQ(typeset_formula("H13CO+"), "H¹³CO⁺");
  EXPECT_EQ(typeset_formula("13C18O"), "¹³C¹⁸O");
  EXPECT_EQ(typeset_formula("29SiO"), "²⁹SiO");
  EXPECT_EQ(typeset_formula("C34S"), "C³⁴S");
  EXPECT_EQ(typeset_formula("CH3C15N"), "CH₃C¹⁵N");
  EXPECT_EQ(typeset_formula("c-13CC2H2"), "c-¹³CC₂H₂");
}

TEST(Typeset, RaisesTheChargeAtTheEndOnly) {
  EXPECT_EQ(typeset_formula("HCO+"), "HCO⁺");
  EXPECT_EQ(typeset_formula("N2H+"), "N₂H⁺");
  EXPECT_EQ(typeset_formula("C6H-"), "C₆H⁻");
  EXPECT_EQ(typeset_formula("o-H2CO"), "o-H₂CO");
}

TEST(Typeset, LeavesWhatIsNoFormula) {
  EXPECT_EQ(typeset_formula("CH3CN, v8=1"), "CH₃CN, v8=1");
  EXPECT_EQ(typeset_formula(""), "");
  EXPECT_EQ(typeset_formula("+"), "+");
  EXPECT_EQ(typeset_formula("molecule 12"), "molecule 12");
  EXPECT_EQ(typeset_formula("Å3"), "Å3");
}

TEST(Typeset, SetsDashesBetweenStatesAndMinusSignsBeforeNumbers) {
  EXPECT_EQ(typeset_transition("1-0"), "1–0");
  EXPECT_EQ(typeset_transition("12(3)-11(3)"), "12(3)–11(3)");
  EXPECT_EQ(typeset_transition("2(-1)-1(1) E"), "2(−1)–1(1) E");
  EXPECT_EQ(typeset_transition("3(0,3)-2(0,2)"), "3(0,3)–2(0,2)");
  EXPECT_EQ(typeset_transition("N=1-0, J=3/2-1/2"), "N=1–0, J=3/2–1/2");
  EXPECT_EQ(typeset_transition("a - b"), "a - b");
  EXPECT_EQ(typeset_transition("線-1"), "線−1");
  EXPECT_EQ(typeset_transition("-"), "-");
}

}  // namespace
}  // namespace trotline
