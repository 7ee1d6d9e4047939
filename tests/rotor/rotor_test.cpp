#include <trotline/base/errors.hpp>
#include <trotline/rotor/rotor.hpp>

namespace trotline {
namespace {

/// Three levels in the wrong order, two lines, one of them upside down.
RotorModel draft() {
  RotorModel model;
  model.levels = {{.quanta = {.j = 2}, .energy_hz = 6e9, .rotational_degeneracy = 5.0},
                  {.quanta = {.j = 0}, .energy_hz = 0.0, .rotational_degeneracy = 1.0},
                  {.quanta = {.j = 1}, .energy_hz = 2e9, .rotational_degeneracy = 3.0}};
  model.transitions = {{.upper = 0, .lower = 2, .line_strength_mu2_c2m2 = 2e-60},
                       {.upper = 1, .lower = 2, .line_strength_mu2_c2m2 = 1e-60}};
  return model;
}

TEST(Rotor, LabelsFollowTheKindOfRotor) {
  EXPECT_EQ(label_of({.j = 2}), "2");
  EXPECT_EQ(label_of({.j = 12, .k = 3}), "12(3)");
  EXPECT_EQ(label_of({.j = 3, .k = 1, .kc = 2}), "3(1,2)");
  EXPECT_EQ(label_of({.j = 3, .n = 2}), "2(3)");
  EXPECT_EQ(label_of({.j = 1, .k = 1, .inversion = -1}), "1(1)a");
}

TEST(Rotor, AFinishedModelIsSortedAndItsLinesPointDownward) {
  const RotorModel model = finished_model(draft(), *make_spin_rule({}), {});
  ASSERT_EQ(model.levels.size(), 3U);
  for (int j = 0; j < 3; ++j) EXPECT_EQ(model.levels[static_cast<std::size_t>(j)].quanta.j, j);
  ASSERT_EQ(model.transitions.size(), 2U);
  EXPECT_EQ(model.transitions[0].upper, 1U);
  EXPECT_EQ(model.transitions[0].lower, 0U);
  EXPECT_EQ(model.transitions[0].frequency_hz, 2e9);
  EXPECT_EQ(model.transitions[1].frequency_hz, 4e9);
  EXPECT_GT(model.transitions[1].einstein_a_per_s, 0.0);
}

TEST(Rotor, LevelsOfWeightZeroVanishWithTheirLines) {
  const RotorModel model = finished_model(draft(), *make_spin_rule({.rule = "dinfh", .spins = {0.0}}), {});
  EXPECT_EQ(model.levels.size(), 2U);
  EXPECT_TRUE(model.transitions.empty());
}

TEST(Rotor, LimitsOfEnergyAndFrequencyApply) {
  const auto none = make_spin_rule({});
  const RotorModel cool = finished_model(draft(), *none, {.highest_energy_hz = 3e9});
  EXPECT_EQ(cool.levels.size(), 2U);
  EXPECT_EQ(cool.transitions.size(), 1U);
  EXPECT_EQ(cool.complete_to_hz, 3e9);
  const RotorModel narrow =
      finished_model(draft(), *none, {.lowest_frequency_hz = 3e9, .highest_frequency_hz = 4e9});
  ASSERT_EQ(narrow.transitions.size(), 1U);
  EXPECT_EQ(narrow.transitions[0].frequency_hz, 4e9);
}

TEST(Rotor, OptionsOutOfTheirDomainAreRefused) {
  const double nan = std::nan("");
  EXPECT_THROW(require_valid({.highest_j = -1}), DomainError);
  EXPECT_THROW(require_valid({.highest_j = kHighestJ + 1}), DomainError);
  EXPECT_THROW(require_valid({.highest_energy_hz = nan}), DomainError);
  EXPECT_THROW(require_valid({.lowest_frequency_hz = nan}), DomainError);
  EXPECT_THROW(require_valid({.lowest_frequency_hz = 2.0, .highest_frequency_hz = 1.0}), DomainError);
  EXPECT_THROW(require_valid({.least_line_strength = -1.0}), DomainError);
  EXPECT_NO_THROW(require_valid({}));
}

}  // namespace
}  // namespace trotline
