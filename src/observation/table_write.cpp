#include <array>

#include <trotline/base/text.hpp>
#include <trotline/observation/intensity_table.hpp>
#include <trotline/physics/quantity.hpp>

#include "out_columns.hpp"

namespace trotline {
namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();

/// A unit in which a column may be written, and how many units of the row one of it is.
struct OutUnit {
  std::string name;
  double factor;
};

std::string quoted_where_needed(const std::string& text) {
  const bool plain = text.find_first_of(",\"\r\n\t#") == std::string::npos && trimmed(text) == text;
  if (plain) return text;
  std::string quoted = "\"";
  for (const char c : text) quoted += c == '"' ? std::string("\"\"") : std::string(1, c);
  return quoted + '"';
}

/// A scalar in YAML's double quotes, on one line.
std::string yaml_quoted(const std::string& text) {
  std::string quoted = "\"";
  for (const char c : printable(text)) quoted += c == '"' || c == '\\' ? std::string{'\\', c} : std::string(1, c);
  return quoted + '"';
}

/// The shortest number of units that reads back to exactly `value`; nothing where rounding leaves none.
std::optional<std::string> exact_in(double value, double factor) {
  constexpr int kNeighbours = 4;
  double unit_value = value / factor;
  for (int i = 0; i < kNeighbours; ++i) unit_value = std::nextafter(unit_value, -kInfinity);
  std::optional<std::string> shortest;
  for (int i = 0; i <= 2 * kNeighbours; ++i, unit_value = std::nextafter(unit_value, kInfinity)) {
    if (unit_value * factor != value) continue;
    std::string text = fmt::format("{}", unit_value);
    if (!shortest || text.size() < shortest->size()) shortest = std::move(text);
  }
  return shortest;
}

std::optional<std::vector<std::string>> written_in(const std::vector<std::optional<double>>& values,
                                                   double factor) {
  std::vector<std::string> cells;
  for (const auto& value : values) {
    const auto exact = value ? exact_in(*value, factor) : std::nullopt;
    if (value && !exact) return std::nullopt;
    cells.push_back(exact.value_or(""));
  }
  return cells;
}

template <class Get>
std::string line_of(const std::vector<OutColumn>& columns, const Get& get) {
  std::string text;
  for (std::size_t i = 0; i < columns.size(); ++i) text += (i == 0 ? "" : ",") + get(columns[i]);
  return text + "\n";
}

class Writer {
 public:
  explicit Writer(const std::vector<IntensityRow>& rows) : rows_(rows) {}

  /// @param units  the first in which every value reads back to the same bits is taken; the last has factor 1
  template <class Get>
  void numbers(const char* name, const std::vector<OutUnit>& units, const Get& get) {
    std::vector<std::optional<double>> values;
    for (const IntensityRow& row : rows_) values.push_back(get(row));
    if (std::none_of(values.begin(), values.end(), [](const auto& v) { return v.has_value(); })) return;
    for (const auto& value : values) {
      if (value && !std::isfinite(*value)) throw DomainError(name, *value, "finite");
    }
    for (const OutUnit& unit : units) {
      auto cells = written_in(values, unit.factor);
      if (!cells) continue;
      columns_.push_back({name, "float64", unit.name, std::move(*cells)});
      return;
    }
  }

  template <class Get>
  void texts(const char* name, const char* datatype, const Get& get) {
    OutColumn column{name, datatype, {}, {}};
    bool any = false;
    for (const IntensityRow& row : rows_) {
      const std::optional<std::string> text = get(row);
      any = any || (text && !text->empty());
      column.cells.push_back(text.value_or(""));
    }
    if (any) columns_.push_back(std::move(column));
  }

  [[nodiscard]] std::vector<OutColumn> take() { return std::move(columns_); }

 private:
  const std::vector<IntensityRow>& rows_;
  std::vector<OutColumn> columns_;
};

OutUnit unit_of(const char* name, Dimension dimension) { return {name, unit_scale(name, dimension)}; }

std::optional<double> if_known(double value) {
  return std::isnan(value) ? std::nullopt : std::optional(value);
}

bool any_row(const IntensityTable& table, IntensityScale scale) {
  return std::any_of(table.rows.begin(), table.rows.end(),
                     [&](const auto& row) { return row.scale == scale; });
}

OutUnit intensity_unit(const IntensityTable& table) {
  const bool flux = any_row(table, IntensityScale::flux_per_beam);
  if (flux && (any_row(table, IntensityScale::main_beam) || any_row(table, IntensityScale::antenna))) {
    throw InputError(Place{table.file}, {"the table mixes K km/s and Jy/beam km/s", "one unit for all rows",
                                         "write two tables"});
  }
  return {flux ? "Jy km / (beam s)" : "K km / s", 1.0};
}

std::optional<std::string> name_of_scale(IntensityScale scale) {
  return scale == IntensityScale::antenna ? "TA*" : "Tmb";
}

}  // namespace

std::vector<OutColumn> out_columns(const IntensityTable& table) {
  Writer writer(table.rows);
  const OutUnit kelvin_or_flux = intensity_unit(table);
  using Row = IntensityRow;
  writer.texts("transition", "string", [](const Row& row) { return row.transition; });
  writer.numbers("frequency",
                 {unit_of("GHz", Dimension::frequency), unit_of("MHz", Dimension::frequency), {"Hz", 1.0}},
                 [](const Row& row) { return row.frequency_hz; });
  writer.numbers("intensity", {kelvin_or_flux}, [](const Row& row) { return std::optional(row.intensity); });
  writer.numbers("intensity_error", {kelvin_or_flux},
                 [](const Row& row) { return if_known(row.intensity_sigma); });
  if (std::any_of(table.rows.begin(), table.rows.end(), [](const Row& row) { return row.is_limit; })) {
    writer.texts("limit", "bool",
                 [](const Row& row) { return std::optional<std::string>(row.is_limit ? "True" : "False"); });
  }
  if (any_row(table, IntensityScale::antenna)) {
    writer.texts("scale", "string", [](const Row& row) { return name_of_scale(row.scale); });
  }
  writer.texts("source", "string", [](const Row& row) { return row.source; });
  writer.texts("species", "string", [](const Row& row) { return row.species; });
  writer.numbers("beam_fwhm", {unit_of("arcsec", Dimension::angle), {"rad", 1.0}},
                 [](const Row& row) { return row.beam_fwhm_rad; });
  writer.numbers("fwhm", {{"km / s", 1.0}}, [](const Row& row) { return row.fwhm_km_s; });
  writer.texts("calibration_group", "string", [](const Row& row) { return row.calibration_group; });
  writer.numbers("calibration_error", {{"", 1.0}}, [](const Row& row) { return row.calibration_error; });
  writer.numbers("forward_efficiency", {{"", 1.0}}, [](const Row& row) { return row.forward_efficiency; });
  writer.numbers("main_beam_efficiency", {{"", 1.0}},
                 [](const Row& row) { return row.main_beam_efficiency; });
  writer.texts("blend", "string", [](const Row& row) { return row.blend; });
  writer.texts("note", "string", [](const Row& row) { return row.note; });
  return writer.take();
}

std::string to_ecsv(const IntensityTable& table) {
  const std::vector<OutColumn> columns = out_columns(table);
  std::string text = "# %ECSV 1.0\n# ---\n# delimiter: ','\n# datatype:\n";
  for (const OutColumn& column : columns) {
    const std::string unit = column.unit.empty() ? "" : fmt::format(", unit: {}", column.unit);
    text += fmt::format("# - {{name: {}{}, datatype: {}}}\n", column.name, unit, column.datatype);
  }
  if (!table.provenance.empty()) text += "# meta:\n";
  for (const auto& [name, value] : table.provenance)
    text += fmt::format("#   {}: {}\n", name, yaml_quoted(value));
  text += line_of(columns, [](const OutColumn& column) { return column.name; });
  for (std::size_t i = 0; i < table.rows.size(); ++i) {
    text += line_of(columns, [i](const OutColumn& column) { return quoted_where_needed(column.cells[i]); });
  }
  return text;
}

}  // namespace trotline
