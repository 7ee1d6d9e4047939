#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <nlohmann/json.hpp>

#include <bit>
#include <cstdint>

#include <trotline/base/files.hpp>
#include <trotline/base/text.hpp>
#include <trotline/report/json.hpp>

#include "report/invented_results.hpp"
#include "report/schema_check.hpp"

namespace trotline {
namespace {

using namespace testing_room;
using nlohmann::json;
using testing::IsEmpty;

SchemaCheck schema_of_results() {
  return SchemaCheck(json::parse(read_file(TROTLINE_SOURCE_DIR "/docs/result.schema.json")));
}

std::vector<Result> results_of_every_kind() {
  return {invented_result({.limits = 2, .unused = 1}), one_line_result(), not_thermal_result(),
          only_limits_result(), Result{}};
}

TEST(ResultJson, FulfilsItsSchemaForEveryStatus) {
  SchemaCheck schema = schema_of_results();
  for (Result result : results_of_every_kind()) {
    EXPECT_THAT(schema.complaints(json::parse(result_json(result))), IsEmpty());
  }
}

TEST(ResultJson, SchemaCheckRefusesMissingKeysAndWrongTypes) {
  SchemaCheck schema = schema_of_results();
  const json good = json::parse(result_json(invented_result()));
  for (const char* pointer : {"/temperature_k/low68", "/lines/0/used", "/provenance/options", "/schema"}) {
    json broken = good;
    broken.at(json::json_pointer(pointer).parent_pointer()).erase(json::json_pointer(pointer).back());
    EXPECT_EQ(schema.complaints(broken).size(), 1U) << pointer;
  }
  for (const char* pointer :
       {"/chi2", "/lines/1/frequency_mhz", "/checks/0/outcome", "/schema", "/warnings"}) {
    json broken = good;
    broken.at(json::json_pointer(pointer)) = "nonsense";
    EXPECT_EQ(schema.complaints(broken).size(), 1U) << pointer;
  }
}

// The keys that the output contract names, in its order; written out here so that none can be renamed.
TEST(ResultJson, HasTheKeysOfTheContract) {
  const json document = json::parse(result_json(invented_result()));
  for (const char* key : {"schema",
                          "source",
                          "species",
                          "method",
                          "converged",
                          "temperature_k",
                          "log10_column_density_cm2",
                          "column_density_cm2",
                          "correlation_lnN_T",
                          "chi2",
                          "dof",
                          "p_value",
                          "partition_function",
                          "source_size_arcsec",
                          "background_k",
                          "lines",
                          "checks",
                          "verdict",
                          "warnings",
                          "provenance"}) {
    EXPECT_TRUE(document.contains(key)) << key;
  }
  for (const char* key : {"value", "error", "low68", "high68", "low95", "high95"}) {
    EXPECT_TRUE(document["temperature_k"].contains(key)) << key;
  }
  for (const char* key :
       {"transition", "frequency_mhz", "upper_energy_k", "upper_degeneracy", "einstein_a_s1",
        "intensity_k_km_s", "intensity_error_k_km_s", "limit", "blend", "ln_nu_gu", "ln_nu_gu_error",
        "optical_depth", "filling", "model_intensity_k_km_s", "residual_sigma", "used"}) {
    EXPECT_TRUE(document["lines"][0].contains(key)) << key;
  }
  for (const char* key : {"version", "species_file", "data_sources", "constants", "options"}) {
    EXPECT_TRUE(document["provenance"].contains(key)) << key;
  }
}

TEST(ResultJson, WritesWhatIsNotKnownAsNull) {
  const json document = json::parse(result_json(Result{}));
  EXPECT_TRUE(document["temperature_k"]["value"].is_null());
  EXPECT_TRUE(document["source_size_arcsec"].is_null());
  EXPECT_FALSE(document["converged"].get<bool>());
  Result result = invented_result();
  result.column_density_cm2.high95 = std::numeric_limits<double>::infinity();
  EXPECT_TRUE(json::parse(result_json(result))["column_density_cm2"]["high95"].is_null());
}

TEST(ResultJson, NumbersReadBackToTheSameBits) {
  std::mt19937_64 random(11);
  Result result = invented_result({.lines = 1});
  for (int draw = 0; draw < 2000; ++draw) {
    const auto number = std::bit_cast<double>(random());
    if (!std::isfinite(number)) continue;
    result.lines[0].einstein_a_s1 = number;
    const double back = json::parse(result_json(result))["lines"][0]["einstein_a_s1"];
    EXPECT_EQ(std::bit_cast<std::uint64_t>(back), std::bit_cast<std::uint64_t>(number));
  }
}

TEST(ResultJson, KeepsEveryTextAndStaysValid) {
  SchemaCheck schema = schema_of_results();
  for (const std::string& text : hostile_texts()) {
    const json document = json::parse(result_json(with_hostile_text(invented_result(), text)));
    EXPECT_THAT(schema.complaints(document), IsEmpty());
    if (!is_utf8(text)) continue;
    EXPECT_EQ(document["source"].get<std::string>(), text);
  }
}

TEST(ResultJson, SameResultGivesTheSameBytes) {
  EXPECT_EQ(result_json(invented_result()), result_json(invented_result()));
}

}  // namespace
}  // namespace trotline
