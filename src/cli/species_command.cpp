#include <fmt/format.h>

#include <algorithm>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/base/text.hpp>
#include <trotline/report/species_figures.hpp>
#include <trotline/report/species_report.hpp>
#include <trotline/report/text_tables.hpp>
#include <trotline/species/library.hpp>
#include <trotline/species/species_check.hpp>

#include "command_line.hpp"
#include "interrupts.hpp"
#include "verbs.hpp"

namespace trotline {
namespace {

std::vector<double> temperatures(const std::string& text) {
  std::vector<double> values;
  for (std::size_t start = 0; start <= text.size();) {
    const std::size_t comma = std::min(text.find(',', start), text.size());
    std::string_view item = trimmed(std::string_view(text).substr(start, comma - start));
    if (item.ends_with("K")) item = trimmed(item.substr(0, item.size() - 1));
    const auto value = parse_number(item);
    if (!value || !(*value > 0.0) || *value > 1e6) {
      throw UsageError(fmt::format("--partition: '{}' is no temperature; expected kelvin, as in '9.375,150'",
                                   printable(item)));
    }
    values.push_back(*value);
    start = comma + 1;
  }
  return values;
}

/// A quantity of the command line; `option` names it in messages.
double quantity(const std::string& option, const std::string& text, Dimension dimension) {
  try {
    return parse_quantity(text, dimension);
  } catch (const InputError& error) {
    throw UsageError(fmt::format("--{}: {}", option, error.what()));
  }
}

QuantityRange frequency_range(const std::string& text) {
  try {
    return parse_quantity_range(text, Dimension::frequency);
  } catch (const InputError& error) {
    throw UsageError(fmt::format("--lines: {}", error.what()));
  }
}

/// `--at` asks for intensities; `--column` and `--stronger-than` say more of them.
std::optional<LineStrengthQuery> strength_of(const ParsedCommand& command) {
  LineStrengthQuery strength;
  for (const auto& [name, value] : command.values) {
    if (name == "at") strength.temperature_k = quantity(name, value, Dimension::temperature);
    if (name == "column")
      strength.column_density_per_cm2 = quantity(name, value, Dimension::column_density) * 1e-4;
    if (name == "stronger-than") {
      strength.least_intensity_k_km_s = quantity(name, value, Dimension::integrated_intensity) * 1e-3;
    }
  }
  const bool asked = !command.value("at").empty();
  if (!asked && (!command.value("column").empty() || !command.value("stronger-than").empty())) {
    throw UsageError("--column and --stronger-than need a temperature; add --at, as in '--at \"50 K\"'");
  }
  if (!asked) return std::nullopt;
  if (!(strength.temperature_k > 0.0)) throw UsageError("--at: the temperature is not above 0 K");
  if (!(strength.column_density_per_cm2 > 0.0))
    throw UsageError("--column: the column density is not above 0");
  return strength;
}

SpeciesQuery query_of(const ParsedCommand& command) {
  SpeciesQuery query;
  query.levels = command.flags.at("levels");
  query.strength = strength_of(command);
  query.lines = query.strength.has_value();
  for (const auto& [name, value] : command.values) {
    if (name == "partition") query.partition_temperatures_k = temperatures(value);
    if (name != "lines") continue;
    query.lines = true;
    if (lower_case(trimmed(value)) != "all") query.frequency_hz = frequency_range(value);
  }
  return query;
}

/// Tables and figures of what was asked for.
void write_parts(const Species& species, const SpeciesQuery& query, const ParsedCommand& command,
                 const Console& console) {
  if (!query.levels && !query.lines && query.partition_temperatures_k.empty()) {
    throw UsageError("--out has nothing to write: ask for --levels, --lines or --partition");
  }
  const std::string& folder = command.value("out");
  const auto formats =
      figure_formats(command.value("figures").empty() ? "svg,pdf,png" : command.value("figures"));
  OutputFolder output(folder);
  for (const SpeciesTable& table : species_tables(species, query)) {
    const auto writer = ecsv_writer(output.staging() / (table.name + ".ecsv"), table.columns,
                                    {{"species", species.name}, {"file", species.file}});
    for (const auto& row : table.rows) writer->add(row);
    writer->finish();
  }
  if (!formats.empty() && query.levels) write_level_diagram(species, query, output.staging(), formats);
  if (!formats.empty() && query.strength) write_stick_spectrum(species, query, output.staging(), formats);
  const auto names = output.commit();
  console.err << fmt::format("trotline: wrote {} to {}\n", listed(names, names.size()), printable(folder));
}

ExitCode list_species(const SpeciesLibrary& library, const Console& console, bool json) {
  std::string text;
  const auto names = library.names();
  for (std::size_t i = 0; i < names.size(); ++i) {
    text += json ? fmt::format("{}\"{}\"", i ? ", " : "", names[i]) : names[i] + "\n";
  }
  console.out << (json ? "{\"species\": [" + text + "]}\n" : text);
  return ExitCode::done;
}

CommandSyntax syntax() {
  return {"species",
          "NAME",
          false,
          {"lines", "partition", "at", "column", "stronger-than", "compare", "out", "figures"},
          {"levels", "check", "json", "help"}};
}

/// `--check` and `--compare` are questions of their own. @return exit code 3 for a file that is wrong
ExitCode review(const Species& species, const SpeciesLibrary& library, const ParsedCommand& command,
                const Console& console) {
  const bool json = command.flags.at("json");
  if (!command.value("compare").empty()) {
    const Species other = library.find(command.value("compare"));
    console.out << (json ? comparison_json(species, other) : comparison_text(species, other));
    return ExitCode::done;
  }
  const auto checks = check_species(species);
  console.out << (json ? check_json(species, checks) : check_text(species, checks));
  const bool wrong = std::any_of(checks.begin(), checks.end(),
                                 [](const SpeciesCheck& check) { return check.verdict == Verdict::wrong; });
  return wrong ? ExitCode::bad_input : ExitCode::done;
}

/// Options that do not go together. @throws UsageError
void check_together(const ParsedCommand& command) {
  const bool review = command.flags.at("check") || !command.value("compare").empty();
  if (command.flags.at("check") && !command.value("compare").empty()) {
    throw UsageError("--check and --compare are two questions; ask one at a time");
  }
  for (const char* part : {"lines", "partition", "at", "column", "stronger-than", "out", "figures"}) {
    if (review && !command.value(part).empty()) {
      throw UsageError(fmt::format("--{} does not go with --check or --compare", part));
    }
  }
  if (review && command.flags.at("levels")) {
    throw UsageError("--levels does not go with --check or --compare");
  }
  if (!command.value("figures").empty() && command.value("out").empty()) {
    throw UsageError("--figures needs a folder to draw into: add --out FOLDER");
  }
}

}  // namespace

ExitCode run_species(const std::vector<std::string>& arguments, const Console& console) {
  const ParsedCommand command = parse_command(syntax(), arguments);
  check_together(command);
  const SpeciesQuery query = query_of(command);
  const SpeciesLibrary library(SpeciesLibrary::standard_folders());
  const bool json = command.flags.at("json");
  if (command.positional.empty()) {
    if (command.flags.at("levels") || command.flags.at("check") || !command.values.empty()) {
      throw UsageError(
          "without the name of a species only --json is understood; name one, as in 'trotline species CO'");
    }
    return list_species(library, console, json);
  }
  if (console.owns_process) clean_up_when_stopped();
  const Species species = library.find(command.positional);
  if (command.flags.at("check") || !command.value("compare").empty())
    return review(species, library, command, console);
  const std::string text = json ? species_json(species, query) : species_text(species, query);
  if (!command.value("out").empty()) write_parts(species, query, command, console);
  console.out << text;
  return ExitCode::done;
}

}  // namespace trotline
