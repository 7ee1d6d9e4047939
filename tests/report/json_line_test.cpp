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
  result.diagram_curves = {{"ortho", {{0.0, 25.0, 24.9, 25.1}, {100.0, 22.0, kNotKnown, 22.5}}}, {"para", {}}};
  result.source_size_fit_arcsec = symmetric_estimate(8.5, 1.0);
  result.components = {{"ortho", result.temperature_k, result.column_density_cm2, result.log10_column_density_cm2, 8.5}};
  result.parameters = {{"ln_temperature_k", 4.1, 0.05}, {"background_k", 2.8, kNotKnown}};
  result.parameter_covariance = {{0.0025, kNotKnown}, {kNotKnown, 0.01}};
  result.alternatives = {{60.0, 14.0, 8.5, 0.0}, {12.0, 17.0, kNotKnown, 3.0}};
  result.posterior = {"ensemble sampler", "too short", 7, 32, 4, 1200, 0.4, {21.0, kNotKnown}, {4000.0, 9.0}, {1.0, 1.2}, {}};
  result.leave_one_out = {{"5(0)-4(0)", 1.5, 61.0, 3.0, 14.1}};
  result.subset_temperatures = {{"band", "90 to 110 GHz", 4, 60.0, 5.0}};
  result.models = {{"two components", 4, 120.0, 3.0, 5.0, 2.0, 0.4, true, "the lines do not hold it"}};
  result.model_choice = "nothing asks for more";
  for (LineResult& line : result.lines) {
    line.calibration_error = 0.1;
    line.calibration_group = "band 3";
    line.blend = "a";
    line.note = "wing";
    line.calibration_factor = 1.07;
    line.critical_density_cm3 = 3e5;
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
  for (const Status status : kEveryStatus) {
    Result result = invented_result();
    result.status = status;
    EXPECT_EQ(parse_result_json(result_json_line(result)).status, status) << name_of(status);
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
