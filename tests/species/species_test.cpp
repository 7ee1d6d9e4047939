#include <trotline/species/species.hpp>

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>

#include <trotline/base/errors.hpp>

namespace trotline {
namespace {

using testing::ElementsAre;
using testing::IsEmpty;

Species ladder() {
  Species species;
  species.levels = {{"0(0)", 0.0, 1.0, ""},
                    {"1(0)", 5.0, 3.0, ""},
                    {"2(0)", 15.0, 5.0, ""},
                    {"2(-1)", 20.0, 5.0, ""},
                    {"1(-1)", 10.0, 3.0, ""}};
  species.transitions = {{1, 0, 100e9, 0.0, 1e-5}, {3, 4, 199e9, 0.0, 1e-4}, {2, 1, 200e9, 0.0, 1e-4}};
  return species;
}

TEST(TransitionLabel, JoinsTheLabelsOfTheLevels) {
  const Species species = ladder();
  EXPECT_EQ(transition_label(species, species.transitions[2]), "2(0)-1(0)");
  EXPECT_EQ(transition_label(species, species.transitions[1]), "2(-1)-1(-1)");
}

TEST(NormalisedLabel, TakesEverySpellingOfOneTransition) {
  for (const char* spelling :
       {"12(3)-11(3)", " 12(3) - 11(3) ", "12(3)\u201311(3)", "12(3)\u221211(3)", "12(3)->11(3)",
        "12(3) \u2192 11(3)", "12(3) <- 11(3)", "12(3) --> 11(3)", "J=12(3)-11(3)", "J = 12(3) - J = 11(3)",
        "12_{3}-11_{3}", "12_3-11_3", "J=12_{3}\u219011_{3}", "12(3)\u00A0\u2014\u200911(3)"}) {
    EXPECT_EQ(normalised_label(spelling), "12(3)-11(3)") << spelling;
  }
}

TEST(NormalisedLabel, KeepsWhatTellsTransitionsApart) {
  EXPECT_EQ(normalised_label("3_{1,2} - 2_{1,1}"), "3(1,2)-2(1,1)");
  EXPECT_EQ(normalised_label("3_1,2-2_1,1"), "3(1,2)-2(1,1)");
  EXPECT_EQ(normalised_label("4_-2-3_-2"), "4(-2)-3(-2)");
  EXPECT_EQ(normalised_label("1,3/2-0,1/2"), "1,3/2-0,1/2");
  EXPECT_EQ(normalised_label("EJ=2"), "EJ=2");
  EXPECT_EQ(normalised_label("2_{1"), "2(){1");  // an open brace is no subscript; it fits nothing
  EXPECT_EQ(normalised_label(""), "");
}

TEST(NormalisedLabel, IsItsOwnNormalForm) {
  for (const char* text : {"J=JJ==1", "1_{_2}", "-->->", "J=J=J=2-1", "__3", "\u2014\u2014", "\xff_{"}) {
    const std::string once = normalised_label(text);
    EXPECT_EQ(normalised_label(once), once) << text;
  }
}

TEST(TransitionsLabelled, FindsALineInAnySpelling) {
  const Species species = ladder();
  EXPECT_THAT(transitions_labelled(species, "J = 2_0 \u2192 1_0"), ElementsAre(2u));
  EXPECT_THAT(transitions_labelled(species, "2(-1)-1(-1)"), ElementsAre(1u));
  EXPECT_THAT(transitions_labelled(species, "1(0)-2(0)"), IsEmpty());
  EXPECT_THAT(transitions_labelled(species, ""), IsEmpty());
}

TEST(TransitionsNear, TakesBothEndsOfTheTolerance) {
  const Species species = ladder();
  EXPECT_THAT(transitions_near(species, 199.5e9, 0.5e9), ElementsAre(1u, 2u));
  EXPECT_THAT(transitions_near(species, 199.5e9, 0.4e9), IsEmpty());
  EXPECT_THAT(transitions_near(species, 100e9, 0.0), ElementsAre(0u));
  EXPECT_THROW((void)transitions_near(species, NAN, 1.0), DomainError);
  EXPECT_THROW((void)transitions_near(species, 1e9, -1.0), DomainError);
}

TEST(SpeciesKind, HasAName) {
  EXPECT_EQ(name_of(SpeciesKind::linear), "linear");
  EXPECT_EQ(name_of(SpeciesKind::line_list), "line_list");
  EXPECT_EQ(name_of(SpeciesKind::structure), "structure");
}

}  // namespace
}  // namespace trotline
