#include <fmt/format.h>

#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/report/species_report.hpp>
#include <trotline/species/library.hpp>

#include "command_line.hpp"
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

SpeciesQuery query_of(const ParsedCommand& command) {
  SpeciesQuery query;
  query.levels = command.flags.at("levels");
  for (const auto& [name, value] : command.values) {
    if (name == "partition") query.partition_temperatures_k = temperatures(value);
    if (name != "lines") continue;
    query.lines = true;
    try {
      query.frequency_hz = parse_quantity_range(value, Dimension::frequency);
    } catch (const InputError& error) {
      throw UsageError(fmt::format("--lines: {}", error.what()));
    }
  }
  return query;
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

}  // namespace

ExitCode run_species(const std::vector<std::string>& arguments, const Console& console) {
  const CommandSyntax syntax{"species", "NAME", false, {"lines", "partition"}, {"levels", "json", "help"}};
  const ParsedCommand command = parse_command(syntax, arguments);
  const SpeciesQuery query = query_of(command);
  const SpeciesLibrary library(SpeciesLibrary::standard_folders());
  const bool json = command.flags.at("json");
  if (command.positional.empty()) {
    if (command.flags.at("levels") || !command.values.empty()) {
      throw UsageError("--levels, --lines and --partition need the name of a species");
    }
    return list_species(library, console, json);
  }
  const Species species = library.find(command.positional);
  console.out << (json ? species_json(species, query) : species_text(species, query));
  return ExitCode::done;
}

}  // namespace trotline
