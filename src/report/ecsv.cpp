#include <fmt/format.h>

#include <cmath>
#include <functional>
#include <vector>

#include <trotline/report/display_text.hpp>
#include <trotline/report/ecsv.hpp>

#include "json_document.hpp"

namespace trotline {
namespace {

/// A number with the fewest digits that read back, with the point that YAML 1.1 wants before an exponent.
std::string number_text(double number) {
  std::string text = fmt::format("{}", number);
  const std::size_t power = text.find('e');
  if (power != std::string::npos && text.find('.') == std::string::npos) text.insert(power, ".0");
  return text;
}

std::string cell_of(double number) { return std::isfinite(number) ? number_text(number) : ""; }
std::string cell_of(bool flag) { return flag ? "True" : "False"; }
std::string cell_of(std::size_t count) { return fmt::format("{}", count); }

std::string cell_of(const std::string& raw) {
  const std::string text = display_text(raw);
  std::string quoted = "\"";
  for (const char c : text) quoted += c == '"' ? std::string("\"\"") : std::string(1, c);
  quoted += '"';
  const bool bare = text.find_first_of(" ,\"#") == std::string::npos;
  return bare ? text : quoted;
}

struct Column {
  const char* name;
  const char* datatype;
  const char* unit;
  const char* description;
  std::function<std::string(const LineResult&)> cell;
};

template <class Member>
Column column(const char* name, const char* datatype, const char* unit, const char* description,
              Member member) {
  return {name, datatype, unit, description,
          [member](const LineResult& line) { return cell_of(line.*member); }};
}

/// The columns of an intensity table.
std::vector<Column> observed_columns() {
  using L = LineResult;
  return {
      column("transition", "string", "", "label of the transition", &L::transition),
      column("frequency", "float64", "MHz", "rest frequency", &L::frequency_mhz),
      column("intensity", "float64", "K km s-1",
             "integrated intensity, main-beam scale; the limit where limit is True", &L::intensity_k_km_s),
      column("intensity_error", "float64", "K km s-1", "standard error without calibration",
             &L::intensity_error_k_km_s),
      column("limit", "bool", "", "True: the intensity is an upper limit", &L::limit),
      column("beam_fwhm", "float64", "arcsec", "beam FWHM", &L::beam_fwhm_arcsec),
      column("fwhm", "float64", "km s-1", "line width FWHM", &L::fwhm_km_s),
      column("calibration_group", "string", "", "lines of one group share their calibration error",
             &L::calibration_group),
      column("calibration_error", "float64", "", "fraction of the intensity", &L::calibration_error),
      column("blend", "string", "", "lines with the same mark are one measurement", &L::blend),
      column("note", "string", "", "note from the input table", &L::note),
  };
}

std::vector<Column> derived_columns() {
  using L = LineResult;
  return {
      column("upper_energy", "float64", "K", "energy of the upper level over k, from the lowest level",
             &L::upper_energy_k),
      column("upper_degeneracy", "float64", "", "statistical weight of the upper level",
             &L::upper_degeneracy),
      column("einstein_a", "float64", "s-1", "Einstein coefficient of spontaneous emission",
             &L::einstein_a_s1),
      column("ln_nu_gu", "float64", "", "ln(N_u/g_u), N_u in 1/cm2", &L::ln_nu_gu),
      column("ln_nu_gu_error", "float64", "", "standard error, noise and calibration together",
             &L::ln_nu_gu_error),
      column("optical_depth", "float64", "", "opacity at the line's centre", &L::optical_depth),
      column("filling", "float64", "", "beam filling factor", &L::filling),
      column("model_intensity", "float64", "K km s-1", "integrated intensity of the model",
             &L::model_intensity_k_km_s),
      column("residual", "float64", "", "(observed - model) / error; for a limit (limit - model) / error",
             &L::residual_sigma),
      column("calibration_factor", "float64", "", "shared factor that the fit puts on the model of this line",
             &L::calibration_factor),
      column("critical_density", "float64", "cm-3", "A over the sum of the collision rates, where rates are given",
             &L::critical_density_cm3),
      column("used", "bool", "", "False: the line had no part in the fit", &L::used),
      column("why_unused", "string", "", "reason, where used is False", &L::why_unused),
      column("table_line", "int64", "", "line of the input table, from 1; 0: not known", &L::table_line),
  };
}

std::vector<Column> all_columns() {
  std::vector<Column> columns = observed_columns();
  for (Column& derived : derived_columns()) columns.push_back(std::move(derived));
  return columns;
}

/// A text in double quotes: JSON's quoting is YAML's, once controls and noncharacters are gone.
std::string yaml_text(const std::string& raw) {
  return Json(display_text(raw)).dump(-1, ' ', false, Json::error_handler_t::replace);
}

std::string yaml_scalar(const Json& json) {
  if (json.is_string()) return yaml_text(json.get<std::string>());
  if (json.is_number_float())
    return std::isfinite(json.get<double>()) ? number_text(json.get<double>()) : "null";
  return json.dump();
}

/// Appends a mapping or list in YAML's block style, every line as a comment of the table.
void append_yaml(std::string& text, const Json& json, std::size_t indent) {
  const std::string start = "# " + std::string(indent, ' ');
  for (const auto& [key, value] : json.items()) {
    text += start + (json.is_object() ? yaml_text(key) + ":" : "-");
    if (value.is_primitive()) {
      text += " " + yaml_scalar(value) + "\n";
    } else if (value.empty()) {
      text += value.is_object() ? " {}\n" : " []\n";
    } else {
      text += "\n";
      append_yaml(text, value, indent + 2);
    }
  }
}

std::string header_of(const std::vector<Column>& columns) {
  std::string text = "# %ECSV 1.0\n# ---\n# delimiter: ','\n# datatype:\n";
  for (const Column& column : columns) {
    const std::string unit = *column.unit != '\0' ? fmt::format("unit: {}, ", column.unit) : "";
    text += fmt::format("# - {{name: {}, {}datatype: {}, description: \"{}\"}}\n", column.name, unit,
                        column.datatype, column.description);
  }
  return text;
}

/// The result under `meta`, without its lines.
std::string meta_of(const Result& result) {
  Json meta = result_document(result);
  meta.erase("lines");
  std::string text = "# meta:\n";
  append_yaml(text, meta, 2);
  return text;
}

}  // namespace

std::string samples_ecsv(const Result& result) {
  std::string text = "# %ECSV 1.0\n# ---\n# delimiter: ','\n# datatype:\n";
  std::string names;
  for (const FittedParameter& parameter : result.parameters) {
    text += fmt::format("# - {{name: {}, datatype: float64, description: \"draw from the posterior\"}}\n", parameter.name);
    names += (names.empty() ? "" : ",") + parameter.name;
  }
  text += meta_of(result) + names + "\n";
  const std::size_t draws = result.posterior.draws.empty() ? 0 : result.posterior.draws.front().size();
  for (std::size_t i = 0; i < draws; ++i) {
    for (std::size_t k = 0; k < result.posterior.draws.size(); ++k) {
      text += (k > 0 ? "," : "") + cell_of(result.posterior.draws[k][i]);
    }
    text += "\n";
  }
  return text;
}

std::string lines_ecsv(const Result& result) {
  const std::vector<Column> columns = all_columns();
  std::string text = header_of(columns) + meta_of(result);
  for (std::size_t i = 0; i < columns.size(); ++i) text += (i > 0 ? "," : "") + std::string(columns[i].name);
  text += "\n";
  for (const LineResult& line : result.lines) {
    for (std::size_t i = 0; i < columns.size(); ++i) text += (i > 0 ? "," : "") + columns[i].cell(line);
    text += "\n";
  }
  return text;
}

}  // namespace trotline
