#include <trotline/report/json_line.hpp>

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <trotline/base/errors.hpp>
#include <trotline/report/json.hpp>

#include "invented_results.hpp"

namespace trotline {
namespace {

using namespace testing_room;

/// The result with every field given, so that one which is not read back shows.
Result full_result() {
  Result result = invented_result({.lines = 6, .limits = 1, .unused = 1});
  result.temperature_fixed = true;
  result.source_size_arcsec = 8.5;
  result.columns_at_temperatures = {{10.0, 1e13, 1e12}, {kNotKnown, 2e13, 1e300, true}};
  for (LineResult& line : result.lines) {
    line.calibration_error = 0.1;
    line.calibration_group = "band 3";
    line.blend = "a";
    line.note = "wing";
  }
  return result;
}

TEST(JsonLine, ReadsEveryKeyBack) {
  for (const Result& result : {full_result(), invented_result(), one_line_result(), not_thermal_result(), only_limits_result()}) {
    const std::string json = result_json(result);
    EXPECT_EQ(result_json(parse_result_json(json)), json);
    EXPECT_EQ(result_json(parse_result_json(result_json_line(result))), json);
  }
}

TEST(JsonLine, ReadsEveryStatusBack) {
  for (int i = 0; i <= static_cast<int>(Status::not_converged); ++i) {
    Result result = full_result();
    result.status = static_cast<Status>(i);
    EXPECT_EQ(parse_result_json(result_json(result)).status, result.status) << name_of(result.status);
  }
}

TEST(JsonLine, HostileTextComesBackAsItWasWritten) {
  for (const std::string& text : hostile_texts()) {
    const std::string json = result_json_line(with_hostile_text(full_result(), text));
    EXPECT_EQ(json.find('\n'), std::string::npos);
    EXPECT_EQ(result_json_line(parse_result_json(json)), json);
  }
}

TEST(JsonLine, RefusesWhatIsNoResult) {
  const std::string whole = result_json_line(full_result());
  for (const std::string& text : {std::string(), std::string("[]"), std::string("{}"), std::string("{\"schema\": 3}"),
                                  whole.substr(0, whole.size() / 2),
                                  std::string("{\"schema\": \"trotline-result-1\", \"lines\": 3}"),
                                  std::string("{\"schema\": \"trotline-result-1\", \"chi2\": \"x\"}")}) {
    EXPECT_THROW((void)parse_result_json(text), InputError) << text;
  }
}

}  // namespace
}  // namespace trotline
