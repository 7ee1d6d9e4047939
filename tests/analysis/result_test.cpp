#include <gtest/gtest.h>

#include <cmath>
#include <set>

#include <trotline/analysis/result.hpp>

namespace trotline {
namespace {

TEST(Result, NamesEveryStatusApart) {
  std::set<std::string> names;
  for (const Status status : {Status::done, Status::one_line, Status::not_thermal, Status::only_limits,
                              Status::unbounded, Status::not_converged}) {
    names.insert(name_of(status));
  }
  EXPECT_EQ(names.size(), 6U);
  EXPECT_FALSE(names.contains("unknown"));
}

TEST(Result, NamesTheOutcomesAsTheOutputContractDoes) {
  EXPECT_STREQ(name_of(Outcome::pass), "pass");
  EXPECT_STREQ(name_of(Outcome::fail), "fail");
  EXPECT_STREQ(name_of(Outcome::not_testable), "not testable");
}

TEST(Result, StartsWithNothingKnown) {
  const Result result;
  EXPECT_EQ(result.status, Status::not_converged);
  EXPECT_TRUE(std::isnan(result.temperature_k.value));
  EXPECT_TRUE(std::isnan(result.column_density_cm2.high95));
}

}  // namespace
}  // namespace trotline
