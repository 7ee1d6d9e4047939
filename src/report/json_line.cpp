#include <fmt/format.h>

#include <trotline/base/errors.hpp>
#include <trotline/report/json.hpp>
#include <trotline/report/json_line.hpp>

#include "json_document.hpp"

namespace trotline {
namespace {

// Reading the keys that json.cpp writes, in its order. JsonLine.ReadsEveryKeyBack finds one that is
// forgotten.

void get(const Json& json, const char* key, double& number) {
  if (const auto found = json.find(key); found != json.end()) {
    number = found->is_null() ? kNotKnown : found->get<double>();
  }
}

template <class Value>
void get(const Json& json, const char* key, Value& value) {
  if (const auto found = json.find(key); found != json.end()) found->get_to(value);
}

void get(const Json& json, const char* key, Estimate& estimate) {
  const auto found = json.find(key);
  if (found == json.end()) return;
  get(*found, "value", estimate.value);
  get(*found, "error", estimate.error);
  get(*found, "low68", estimate.low68);
  get(*found, "high68", estimate.high68);
  get(*found, "low95", estimate.low95);
  get(*found, "high95", estimate.high95);
}

LineResult line_of(const Json& json) {
  LineResult line;
  get(json, "transition", line.transition);
  get(json, "frequency_mhz", line.frequency_mhz);
  get(json, "upper_energy_k", line.upper_energy_k);
  get(json, "upper_degeneracy", line.upper_degeneracy);
  get(json, "einstein_a_s1", line.einstein_a_s1);
  get(json, "intensity_k_km_s", line.intensity_k_km_s);
  get(json, "intensity_error_k_km_s", line.intensity_error_k_km_s);
  get(json, "calibration_error", line.calibration_error);
  get(json, "calibration_group", line.calibration_group);
  get(json, "limit", line.limit);
  get(json, "blend", line.blend);
  get(json, "ln_nu_gu", line.ln_nu_gu);
  get(json, "ln_nu_gu_error", line.ln_nu_gu_error);
  get(json, "optical_depth", line.optical_depth);
  get(json, "filling", line.filling);
  get(json, "beam_fwhm_arcsec", line.beam_fwhm_arcsec);
  get(json, "fwhm_km_s", line.fwhm_km_s);
  get(json, "model_intensity_k_km_s", line.model_intensity_k_km_s);
  get(json, "residual_sigma", line.residual_sigma);
  get(json, "calibration_factor", line.calibration_factor);
  get(json, "critical_density_cm3", line.critical_density_cm3);
  get(json, "used", line.used);
  get(json, "why_unused", line.why_unused);
  get(json, "table_line", line.table_line);
  get(json, "note", line.note);
  return line;
}

Check check_of(const Json& json) {
  Check check;
  get(json, "name", check.name);
  get(json, "figure", check.figure);
  get(json, "meaning", check.meaning);
  std::string outcome;
  get(json, "outcome", outcome);
  for (const Outcome one : {Outcome::pass, Outcome::fail, Outcome::not_testable}) {
    if (outcome == name_of(one)) check.outcome = one;
  }
  return check;
}

ColumnAtTemperature column_of(const Json& json) {
  ColumnAtTemperature column;
  get(json, "temperature_k", column.temperature_k);
  get(json, "column_density_cm2", column.column_density_cm2);
  get(json, "error_cm2", column.error_cm2);
  get(json, "upper_limit", column.upper_limit);
  return column;
}

Component component_of(const Json& json) {
  Component part;
  get(json, "name", part.name);
  get(json, "temperature_k", part.temperature_k);
  get(json, "log10_column_density_cm2", part.log10_column_density_cm2);
  get(json, "column_density_cm2", part.column_density_cm2);
  get(json, "source_size_arcsec", part.source_size_arcsec);
  return part;
}

FittedParameter parameter_of(const Json& json) {
  FittedParameter parameter;
  get(json, "name", parameter.name);
  get(json, "value", parameter.value);
  get(json, "error", parameter.error);
  return parameter;
}

Alternative alternative_of(const Json& json) {
  Alternative other;
  get(json, "temperature_k", other.temperature_k);
  get(json, "log10_column_density_cm2", other.log10_column_density_cm2);
  get(json, "source_size_arcsec", other.source_size_arcsec);
  get(json, "delta_chi2", other.delta_chi2);
  return other;
}

LeftOut left_out_of(const Json& json) {
  LeftOut row;
  get(json, "transition", row.transition);
  get(json, "standardised_residual", row.standardised_residual);
  get(json, "temperature_k", row.temperature_k);
  get(json, "temperature_error_k", row.temperature_error_k);
  get(json, "log10_column_density_cm2", row.log10_column_density_cm2);
  return row;
}

SubsetTemperature subset_of(const Json& json) {
  SubsetTemperature row;
  get(json, "division", row.division);
  get(json, "subset", row.subset);
  get(json, "lines", row.lines);
  get(json, "temperature_k", row.temperature_k);
  get(json, "temperature_error_k", row.temperature_error_k);
  return row;
}

ModelEntry model_of(const Json& json) {
  ModelEntry model;
  get(json, "name", model.name);
  get(json, "free_count", model.free_count);
  get(json, "minus_2_ln_likelihood", model.minus_2_ln_likelihood);
  get(json, "delta_aicc", model.delta_aicc);
  get(json, "delta_bic", model.delta_bic);
  get(json, "likelihood_ratio", model.likelihood_ratio);
  get(json, "p_value", model.p_value);
  get(json, "on_boundary", model.on_boundary);
  get(json, "note", model.note);
  return model;
}

DiagramCurvePoint point_of(const Json& json) {
  DiagramCurvePoint point;
  get(json, "energy_k", point.energy_k);
  get(json, "ln_nu_gu", point.ln_nu_gu);
  get(json, "low68", point.low68);
  get(json, "high68", point.high68);
  return point;
}

template <class Item>
void get_list(const Json& json, const char* key, std::vector<Item>& items, Item (*item_of)(const Json&)) {
  const auto found = json.find(key);
  if (found == json.end()) return;
  items.reserve(found->size());
  for (const Json& item : found->get_ref<const Json::array_t&>()) items.push_back(item_of(item));
}

DiagramCurve curve_of(const Json& json) {
  DiagramCurve curve;
  get(json, "name", curve.name);
  get_list(json, "points", curve.points, point_of);
  return curve;
}

void get_status(const Json& json, Status& status) {
  std::string name;
  get(json, "status", name);
  for (const Status one : kEveryStatus) {
    if (name == name_of(one)) status = one;
  }
}

void get_answer(const Json& json, Result& result) {
  get_status(json, result.status);
  get(json, "message", result.message);
  get(json, "temperature_fixed", result.temperature_fixed);
  get(json, "temperature_k", result.temperature_k);
  get(json, "log10_column_density_cm2", result.log10_column_density_cm2);
  get(json, "column_density_cm2", result.column_density_cm2);
  get(json, "correlation_lnN_T", result.correlation_ln_n_t);
  get(json, "chi2", result.chi2);
  get(json, "dof", result.dof);
  get(json, "p_value", result.p_value);
}

void get_basis(const Json& json, Result& result) {
  if (const auto q = json.find("partition_function"); q != json.end()) {
    get(*q, "value", result.partition_function);
    get(*q, "source", result.partition_function_source);
  }
  get(json, "source_size_arcsec", result.source_size_arcsec);
  get(json, "background_k", result.background_k);
  get(json, "assumptions", result.assumptions);
  if (const auto line = json.find("diagram_line"); line != json.end()) {
    get(*line, "intercept", result.diagram_line.intercept);
    get(*line, "slope_per_k", result.diagram_line.slope_per_k);
    get(*line, "intercept_variance", result.diagram_line.intercept_variance);
    get(*line, "slope_variance", result.diagram_line.slope_variance);
    get(*line, "covariance", result.diagram_line.covariance);
  }
}

void get_provenance(const Json& json, Provenance& provenance) {
  const auto found = json.find("provenance");
  if (found == json.end()) return;
  get(*found, "version", provenance.version);
  get(*found, "table_file", provenance.table_file);
  get(*found, "table_fingerprint", provenance.table_fingerprint);
  get(*found, "species_file", provenance.species_file);
  get(*found, "species_fingerprint", provenance.species_fingerprint);
  get(*found, "data_sources", provenance.data_sources);
  get(*found, "constants", provenance.constants);
  if (const auto options = found->find("options"); options != found->end()) {
    for (const auto& [key, value] : options->items())
      provenance.options.emplace_back(key, value.get<std::string>());
  }
}

/// Numbers, or null for what is not finite.
void get_numbers(const Json& json, const char* key, std::vector<double>& numbers) {
  const auto found = json.find(key);
  if (found == json.end()) return;
  for (const Json& cell : found->get_ref<const Json::array_t&>()) {
    numbers.push_back(cell.is_null() ? kNotKnown : cell.get<double>());
  }
}

/// Covariances are numbers or null.
void get_covariance(const Json& json, std::vector<std::vector<double>>& covariance) {
  const auto found = json.find("parameter_covariance");
  if (found == json.end()) return;
  for (const Json& row : found->get_ref<const Json::array_t&>()) {
    covariance.emplace_back();
    for (const Json& cell : row.get_ref<const Json::array_t&>()) {
      covariance.back().push_back(cell.is_null() ? kNotKnown : cell.get<double>());
    }
  }
}

void get_posterior(const Json& json, PosteriorSummary& posterior) {
  const auto found = json.find("posterior");
  if (found == json.end()) return;
  get(*found, "method", posterior.method);
  get(*found, "refusal", posterior.refusal);
  get(*found, "seed", posterior.seed);
  get(*found, "walkers", posterior.walkers);
  get(*found, "ensembles", posterior.ensembles);
  get(*found, "steps", posterior.steps);
  get(*found, "acceptance", posterior.acceptance);
  get_numbers(*found, "autocorrelation_steps", posterior.autocorrelation_steps);
  get_numbers(*found, "effective_size", posterior.effective_size);
  get_numbers(*found, "split_r_hat", posterior.split_r_hat);
}

void get_details(const Json& json, Result& result) {
  get_list(json, "diagram_curves", result.diagram_curves, curve_of);
  get(json, "source_size_fit_arcsec", result.source_size_fit_arcsec);
  get_list(json, "components", result.components, component_of);
  get_list(json, "parameters", result.parameters, parameter_of);
  get_covariance(json, result.parameter_covariance);
  get_list(json, "alternatives", result.alternatives, alternative_of);
  get_posterior(json, result.posterior);
  get_list(json, "leave_one_out", result.leave_one_out, left_out_of);
  get_list(json, "subset_temperatures", result.subset_temperatures, subset_of);
  get_list(json, "models", result.models, model_of);
  get(json, "model_choice", result.model_choice);
}

Result result_of(const Json& json) {
  Result result;
  get(json, "source", result.source);
  get(json, "species", result.species);
  get(json, "formula", result.formula);
  get(json, "method", result.method);
  get_answer(json, result);
  get_basis(json, result);
  get_details(json, result);
  get_list(json, "columns_at_temperatures", result.columns_at_temperatures, column_of);
  get_list(json, "lines", result.lines, line_of);
  get_list(json, "checks", result.checks, check_of);
  get(json, "verdict", result.verdict);
  get(json, "warnings", result.warnings);
  get_provenance(json, result.provenance);
  return result;
}

}  // namespace

std::string result_json_line(const Result& result) {
  return result_document(result).dump(-1, ' ', false, Json::error_handler_t::replace);
}

Result parse_result_json(std::string_view text) {
  const auto refuse = [](const std::string& found) {
    throw InputError({found, fmt::format("a result of the schema {}", kResultSchema)});
  };
  try {
    const Json json = Json::parse(text);
    if (!json.is_object() || json.value("schema", "") != kResultSchema)
      refuse("this is no result of trotline");
    return result_of(json);
  } catch (const Json::exception& error) {
    refuse(fmt::format("this is no result of trotline: {}", error.what()));
  }
  return {};
}

}  // namespace trotline
