#include <trotline/report/display_text.hpp>
#include <trotline/report/json.hpp>

#include "json_document.hpp"

namespace trotline {
namespace {

Json json_of(const Estimate& estimate) {
  return {{"value", estimate.value},   {"error", estimate.error}, {"low68", estimate.low68},
          {"high68", estimate.high68}, {"low95", estimate.low95}, {"high95", estimate.high95}};
}

Json json_of(const LineResult& line) {
  Json json;
  json["transition"] = line.transition;
  json["frequency_mhz"] = line.frequency_mhz;
  json["upper_energy_k"] = line.upper_energy_k;
  json["upper_degeneracy"] = line.upper_degeneracy;
  json["einstein_a_s1"] = line.einstein_a_s1;
  json["intensity_k_km_s"] = line.intensity_k_km_s;
  json["intensity_error_k_km_s"] = line.intensity_error_k_km_s;
  json["calibration_error"] = line.calibration_error;
  json["calibration_group"] = line.calibration_group;
  json["limit"] = line.limit;
  json["blend"] = line.blend;
  json["ln_nu_gu"] = line.ln_nu_gu;
  json["ln_nu_gu_error"] = line.ln_nu_gu_error;
  json["optical_depth"] = line.optical_depth;
  json["filling"] = line.filling;
  json["beam_fwhm_arcsec"] = line.beam_fwhm_arcsec;
  json["fwhm_km_s"] = line.fwhm_km_s;
  json["model_intensity_k_km_s"] = line.model_intensity_k_km_s;
  json["residual_sigma"] = line.residual_sigma;
  json["calibration_factor"] = line.calibration_factor;
  json["critical_density_cm3"] = line.critical_density_cm3;
  json["used"] = line.used;
  json["why_unused"] = line.why_unused;
  json["table_line"] = line.table_line;
  json["note"] = line.note;
  return json;
}

Json json_of(const Check& check) {
  return {{"name", check.name},
          {"figure", check.figure},
          {"outcome", name_of(check.outcome)},
          {"meaning", check.meaning}};
}

Json json_of(const DiagramLine& line) {
  return {{"intercept", line.intercept},
          {"slope_per_k", line.slope_per_k},
          {"intercept_variance", line.intercept_variance},
          {"slope_variance", line.slope_variance},
          {"covariance", line.covariance}};
}

Json json_of(const ColumnAtTemperature& row) {
  return {{"temperature_k", row.temperature_k},
          {"column_density_cm2", row.column_density_cm2},
          {"upper_limit", row.upper_limit},
          {"error_cm2", row.error_cm2}};
}

Json json_of(const Component& part) {
  return {{"name", part.name},
          {"temperature_k", json_of(part.temperature_k)},
          {"log10_column_density_cm2", json_of(part.log10_column_density_cm2)},
          {"column_density_cm2", json_of(part.column_density_cm2)},
          {"source_size_arcsec", part.source_size_arcsec}};
}

Json json_of(const FittedParameter& parameter) {
  return {{"name", parameter.name}, {"value", parameter.value}, {"error", parameter.error}};
}

Json json_of(const Alternative& other) {
  return {{"temperature_k", other.temperature_k},
          {"log10_column_density_cm2", other.log10_column_density_cm2},
          {"source_size_arcsec", other.source_size_arcsec},
          {"delta_chi2", other.delta_chi2}};
}

Json json_of(const LeftOut& row) {
  return {{"transition", row.transition},
          {"standardised_residual", row.standardised_residual},
          {"temperature_k", row.temperature_k},
          {"temperature_error_k", row.temperature_error_k},
          {"log10_column_density_cm2", row.log10_column_density_cm2}};
}

Json json_of(const SubsetTemperature& row) {
  return {{"division", row.division},
          {"subset", row.subset},
          {"lines", row.lines},
          {"temperature_k", row.temperature_k},
          {"temperature_error_k", row.temperature_error_k}};
}

Json json_of(const ModelEntry& model) {
  return {{"name", model.name},
          {"free_count", model.free_count},
          {"minus_2_ln_likelihood", model.minus_2_ln_likelihood},
          {"delta_aicc", model.delta_aicc},
          {"delta_bic", model.delta_bic},
          {"likelihood_ratio", model.likelihood_ratio},
          {"p_value", model.p_value},
          {"on_boundary", model.on_boundary},
          {"note", model.note}};
}

Json json_of(const DiagramCurvePoint& point) {
  return {{"energy_k", point.energy_k}, {"ln_nu_gu", point.ln_nu_gu}, {"low68", point.low68}, {"high68", point.high68}};
}

Json json_of(const Provenance& provenance) {
  Json options = Json::object();
  for (const auto& [name, value] : provenance.options) options[name] = value;
  return {{"version", provenance.version},
          {"table_file", provenance.table_file},
          {"table_fingerprint", provenance.table_fingerprint},
          {"species_file", provenance.species_file},
          {"species_fingerprint", provenance.species_fingerprint},
          {"data_sources", provenance.data_sources},
          {"constants", provenance.constants},
          {"options", options}};
}

Json json_of(const PosteriorSummary& posterior) {
  return {{"method", posterior.method},
          {"refusal", posterior.refusal},
          {"seed", posterior.seed},
          {"walkers", posterior.walkers},
          {"ensembles", posterior.ensembles},
          {"steps", posterior.steps},
          {"acceptance", posterior.acceptance},
          {"autocorrelation_steps", posterior.autocorrelation_steps},
          {"effective_size", posterior.effective_size},
          {"split_r_hat", posterior.split_r_hat}};
}

Json json_of(const DiagramCurve& curve);  // its points are a list too

template <class Item>
Json list_of(const std::vector<Item>& items) {
  Json list = Json::array();
  for (const Item& item : items) list.push_back(json_of(item));
  return list;
}

Json json_of(const DiagramCurve& curve) { return {{"name", curve.name}, {"points", list_of(curve.points)}}; }

void add_answer(Json& json, const Result& result) {
  json["status"] = name_of(result.status);
  json["message"] = result.message;
  json["converged"] = result.status == Status::done;
  json["temperature_fixed"] = result.temperature_fixed;
  json["temperature_k"] = json_of(result.temperature_k);
  json["log10_column_density_cm2"] = json_of(result.log10_column_density_cm2);
  json["column_density_cm2"] = json_of(result.column_density_cm2);
  json["correlation_lnN_T"] = result.correlation_ln_n_t;
  json["chi2"] = result.chi2;
  json["dof"] = result.dof;
  json["p_value"] = result.p_value;
}

void add_basis(Json& json, const Result& result) {
  json["partition_function"] = {{"value", result.partition_function},
                                {"source", result.partition_function_source}};
  json["source_size_arcsec"] = result.source_size_arcsec;
  json["background_k"] = result.background_k;
  json["assumptions"] = result.assumptions;
  json["diagram_line"] = json_of(result.diagram_line);
  json["diagram_curves"] = list_of(result.diagram_curves);
}

/// What only some answers have; the lists are empty elsewhere.
void add_details(Json& json, const Result& result) {
  json["source_size_fit_arcsec"] = json_of(result.source_size_fit_arcsec);
  json["components"] = list_of(result.components);
  json["parameters"] = list_of(result.parameters);
  json["parameter_covariance"] = result.parameter_covariance;
  json["alternatives"] = list_of(result.alternatives);
  json["posterior"] = json_of(result.posterior);
}

void add_judgement(Json& json, const Result& result) {
  json["checks"] = list_of(result.checks);
  json["verdict"] = result.verdict;
  json["leave_one_out"] = list_of(result.leave_one_out);
  json["subset_temperatures"] = list_of(result.subset_temperatures);
  json["models"] = list_of(result.models);
  json["model_choice"] = result.model_choice;
}

}  // namespace

Json result_document(const Result& result) {
  Json json;
  json["schema"] = kResultSchema;
  json["source"] = result.source;
  json["species"] = result.species;
  json["formula"] = result.formula;
  json["method"] = result.method;
  add_answer(json, result);
  add_basis(json, result);
  add_details(json, result);
  json["columns_at_temperatures"] = list_of(result.columns_at_temperatures);
  json["lines"] = list_of(result.lines);
  add_judgement(json, result);
  json["warnings"] = result.warnings;
  json["provenance"] = json_of(result.provenance);
  return json;
}

std::string result_json(const Result& result) {
  return quiet_json(result_document(result).dump(2, ' ', false, Json::error_handler_t::replace)) + "\n";
}

}  // namespace trotline
