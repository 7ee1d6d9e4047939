#include <gtest/gtest.h>

#include <trotline/base/errors.hpp>

namespace trotline {
namespace {

TEST(Errors, PlaceLeavesOutWhatIsUnknown) {
  EXPECT_EQ(to_string(Place{"a.csv", 3, 7}), "a.csv:3:7");
  EXPECT_EQ(to_string(Place{"a.csv", 3, 0}), "a.csv:3");
  EXPECT_EQ(to_string(Place{"a.csv", 0, 7}), "a.csv");
  EXPECT_EQ(to_string(Place{"", 3, 0}), "line 3");
  EXPECT_EQ(to_string(Place{}), "");
}

TEST(Errors, InputErrorTellsWhereWhatAndWhatInstead) {
  const InputError error(Place{"a.csv", 3}, {"found this", "that", "do so"});
  EXPECT_STREQ(error.what(), "a.csv:3: found this; expected that; do so");
  EXPECT_EQ(error.place().line, 3U);
  EXPECT_EQ(error.complaint().expected, "that");
  EXPECT_STREQ(InputError({"found this"}).what(), "found this");
}

TEST(Errors, DomainErrorNamesArgumentValueAndRange) {
  EXPECT_STREQ(DomainError("beam_rad", -0.5, "above 0").what(),
               "beam_rad = -0.5: outside its domain, above 0");
}

TEST(Errors, EveryKindIsAnError) {
  EXPECT_THROW(throw InputError({"x"}), Error);
  EXPECT_THROW(throw DomainError("x", 1.0, "y"), Error);
  EXPECT_THROW(throw SystemError("x"), Error);
}

}  // namespace
}  // namespace trotline
