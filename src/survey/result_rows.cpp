#include "result_rows.hpp"

#include <algorithm>
#include <cmath>
#include <functional>

#include <trotline/base/text.hpp>
#include <trotline/report/display_text.hpp>

namespace trotline {
namespace {

struct Definition {
  TableColumn column;
  std::function<Cell(const GatheredJob&)> cell;
};

using FromResult = std::function<Cell(const Result&)>;

Definition from_result(TableColumn column, FromResult cell) {
  return {std::move(column), [cell = std::move(cell)](const GatheredJob& gathered) {
            return gathered.result ? cell(*gathered.result) : Cell{};
          }};
}

Definition number(const char* name, const char* unit, const char* description,
                  std::function<double(const Result&)> value) {
  return from_result({name, CellType::number, unit, description, 1},
                     [value = std::move(value)](const Result& result) { return Cell{value(result)}; });
}

std::int64_t lines_in_use(const Result& result) {
  return std::count_if(result.lines.begin(), result.lines.end(),
                       [](const LineResult& line) { return line.used && !line.limit; });
}

double largest_opacity(const Result& result) {
  double largest = kNotKnown;
  for (const LineResult& line : result.lines) {
    if (!(line.optical_depth <= largest)) largest = line.optical_depth;
  }
  return largest;
}

void add_estimate(std::vector<Definition>& definitions, const std::string& name, const char* unit,
                  const char* what, Estimate Result::*member) {
  const std::pair<const char*, const char*> words[] = {{"", ""},
                                                       {"_error", ", standard error"},
                                                       {"_low68", ", lower end of the 68 % interval"},
                                                       {"_high68", ", upper end of the 68 % interval"},
                                                       {"_low95", ", lower end of the 95 % interval"},
                                                       {"_high95", ", upper end of the 95 % interval"}};
  double Estimate::*const parts[] = {&Estimate::value,  &Estimate::error, &Estimate::low68,
                                     &Estimate::high68, &Estimate::low95, &Estimate::high95};
  for (std::size_t i = 0; i < std::size(parts); ++i) {
    double Estimate::*const part = parts[i];
    definitions.push_back(number((name + words[i].first).c_str(), unit,
                                 (std::string(what) + words[i].second).c_str(),
                                 [member, part](const Result& result) { return result.*member.*part; }));
  }
}

void add_identity(std::vector<Definition>& definitions, const TextWidths& widths) {
  definitions.push_back({{"source", CellType::text, "", "name of the source", widths.source},
                         [](const GatheredJob& g) { return Cell{g.job.source}; }});
  definitions.push_back({{"species", CellType::text, "", "name of the species", widths.species},
                         [](const GatheredJob& g) { return Cell{g.job.species}; }});
  definitions.push_back({{"status", CellType::text, "",
                          "done: T and N; weak: the data cannot answer; failed: the input is wrong", 6},
                         [](const GatheredJob& g) { return Cell{std::string(name_of(g.job.status))}; }});
  definitions.push_back(from_result({"answer", CellType::text, "", "how the analysis ended", 13},
                                    [](const Result& r) { return Cell{std::string(name_of(r.status))}; }));
}

void add_fit(std::vector<Definition>& definitions) {
  definitions.push_back(number("correlation", "", "correlation of ln N and T",
                               [](const Result& r) { return r.correlation_ln_n_t; }));
  definitions.push_back(number("chi2", "", "chi-squared of the fit", [](const Result& r) { return r.chi2; }));
  definitions.push_back(from_result({"dof", CellType::whole, "", "degrees of freedom", 1},
                                    [](const Result& r) { return Cell{std::int64_t{r.dof}}; }));
  definitions.push_back(number("p_value", "", "chance of a chi-squared as large or larger",
                               [](const Result& r) { return r.p_value; }));
  definitions.push_back(
      from_result({"lines", CellType::whole, "", "lines of the table", 1},
                  [](const Result& r) { return Cell{static_cast<std::int64_t>(r.lines.size())}; }));
  definitions.push_back(from_result({"lines_fitted", CellType::whole, "", "lines that the fit used", 1},
                                    [](const Result& r) { return Cell{lines_in_use(r)}; }));
  definitions.push_back(number("largest_opacity", "", "largest opacity at line centre", largest_opacity));
  definitions.push_back(number("partition_function", "", "Q at the temperature",
                               [](const Result& r) { return r.partition_function; }));
  definitions.push_back(number("source_size", "arcsec", "source size; not given: the source fills every beam",
                               [](const Result& r) { return r.source_size_arcsec; }));
  definitions.push_back(
      number("background", "K", "background temperature", [](const Result& r) { return r.background_k; }));
}

void add_words(std::vector<Definition>& definitions, const TextWidths& widths) {
  definitions.push_back(from_result(
      {"temperature_fixed", CellType::flag, "", "true: the temperature was stated, not fitted", 1},
      [](const Result& r) { return Cell{r.temperature_fixed}; }));
  definitions.push_back(
      from_result({"method", CellType::text, "", "how the numbers were found", widths.method},
                  [](const Result& r) { return Cell{r.method}; }));
  definitions.push_back(from_result(
      {"verdict", CellType::text, "", "whether one temperature describes the lines", widths.verdict},
      [](const Result& r) { return Cell{r.verdict}; }));
  definitions.push_back(
      from_result({"warnings", CellType::whole, "", "number of warnings in the result", 1},
                  [](const Result& r) { return Cell{static_cast<std::int64_t>(r.warnings.size())}; }));
  definitions.push_back(
      {{"message", CellType::text, "", "what went wrong, or what can be said", widths.message},
       [](const GatheredJob& g) { return Cell{g.job.message}; }});
  definitions.push_back(
      {{"table_file", CellType::text, "", "table that the lines come from", widths.table_file},
       [](const GatheredJob& g) { return Cell{g.job.table_file}; }});
}

std::vector<Definition> definitions(const TextWidths& widths) {
  std::vector<Definition> all;
  add_identity(all, widths);
  add_estimate(all, "temperature", "K", "rotation temperature", &Result::temperature_k);
  add_estimate(all, "log10_column_density", "", "log10 of the column density in cm-2",
               &Result::log10_column_density_cm2);
  add_estimate(all, "column_density", "cm-2", "column density of the species", &Result::column_density_cm2);
  add_fit(all);
  add_words(all, widths);
  return all;
}

}  // namespace

std::string table_text(const std::string& text) {
  const std::string shown = display_text(text);
  return std::string(trimmed(shown));
}

std::vector<TableColumn> result_columns(const TextWidths& widths) {
  std::vector<TableColumn> columns;
  for (const Definition& definition : definitions(widths)) columns.push_back(definition.column);
  return columns;
}

std::vector<Cell> result_cells(const GatheredJob& gathered) {
  static const std::vector<Definition> all = definitions({});
  std::vector<Cell> cells;
  cells.reserve(all.size());
  for (const Definition& definition : all) {
    cells.push_back(definition.cell(gathered));
    if (auto* text = std::get_if<std::string>(&cells.back())) *text = table_text(*text);
  }
  return cells;
}

}  // namespace trotline
