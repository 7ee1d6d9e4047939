#include <fmt/format.h>

#include <algorithm>

#include <trotline/analysis/analyse.hpp>
#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/base/text.hpp>
#include <trotline/report/json.hpp>
#include <trotline/report/terminal.hpp>
#include <trotline/report/write_outputs.hpp>

#include "command_line.hpp"
#include "interrupts.hpp"
#include "verbs.hpp"

namespace trotline {
namespace {

std::string with(char to, std::string text, char from) {
  std::replace(text.begin(), text.end(), from, to);
  return text;
}

CommandSyntax syntax() {
  CommandSyntax syntax{"fit", "LINES", true, {"species", "out", "figures"}, {"json", "help"}};
  for (const RunOption& option : run_option_table()) syntax.values.push_back(with('-', option.key, '_'));
  return syntax;
}

bool is_description(const std::string& path) { return path.ends_with(".yaml") || path.ends_with(".yml"); }

void set_from_command_line(RunOptions& options, const std::string& name, const std::string& value) {
  try {
    find_run_option(with('_', name, '-'))->set(options, value);
  } catch (const InputError& error) {
    throw UsageError(fmt::format("--{}: {}", name, error.what()));
  }
}

/// The description of the file or of the table named, with the options of the command line laid over it.
RunDescription description_of(const ParsedCommand& command) {
  RunDescription run;
  if (is_description(command.positional)) {
    run = read_run_description(command.positional);
  } else {
    run.table = command.positional;
  }
  for (const auto& [name, value] : command.values) {
    if (name == "out" || name == "figures") continue;
    if (name == "species") {
      run.species = value;
      if (run.measure) run.measure->species = value;
      continue;
    }
    set_from_command_line(run.options, name, value);
  }
  if (run.species.empty()) throw UsageError("no species is given; add --species, as in '--species CO'");
  return run;
}

OutputOptions output_options(const ParsedCommand& command) {
  OutputOptions options;
  for (const auto& [name, value] : command.values) {
    if (name == "figures") options.formats = figure_formats(value);
  }
  return options;
}

/// No file that the run reads may be one that it writes.
void keep_inputs(const RunDescription& run, const ParsedCommand& command) {
  const std::filesystem::path folder = command.value("out");
  if (folder.empty()) return;
  std::vector<std::filesystem::path> outputs = {folder / "measured.ecsv"};
  for (const std::string& name : output_family()) outputs.push_back(folder / name);
  std::vector<std::string> inputs = {command.positional, run.table, run.species, run.options.collisions};
  if (run.measure) {
    for (const SpectrumInput& spectrum : run.measure->inputs) inputs.push_back(spectrum.path);
  }
  require_no_input_among(outputs, inputs);
}

/// A result, and the lines that were measured for it where the description says so.
struct Fitted {
  Result result;
  std::string measured_ecsv;
};

Fitted fit(const RunDescription& run) {
  const SpeciesLibrary library(SpeciesLibrary::standard_folders());
  if (!run.measure) return {analyse(run, library), {}};
  const SpeciesMeasurement measured = measure(*run.measure, library);
  return {analyse(run, library, measured), to_ecsv(measured.table)};
}

void write_folder(const Fitted& fitted, const std::string& folder, const OutputOptions& options,
                  const Console& console) {
  OutputFolder output(folder);
  try {
    if (!fitted.measured_ecsv.empty()) output.write("measured.ecsv", fitted.measured_ecsv);
    write_outputs(fitted.result, output, options);
  } catch (const SystemError& error) {
    if (options.formats.empty()) throw;
    throw SystemError(
        fmt::format("{}; with '--figures none' everything but the figures is written", error.what()));
  }
  const auto names = output.commit(output_family());
  console.err << fmt::format("trotline: wrote {} to {}\n", listed(names, names.size()), folder);
}

}  // namespace

ExitCode run_fit(const std::vector<std::string>& arguments, const Console& console) {
  const ParsedCommand command = parse_command(syntax(), arguments);
  if (console.owns_process) clean_up_when_stopped();
  const OutputOptions outputs = output_options(command);
  const RunDescription run = description_of(command);
  keep_inputs(run, command);
  const Fitted fitted = fit(run);
  const Result& result = fitted.result;
  if (!command.value("out").empty()) write_folder(fitted, command.value("out"), outputs, console);
  if (command.flags.at("json")) {
    console.out << result_json(result);
  } else {
    console.out << terminal_report(
        result, {static_cast<std::size_t>(console.width), console.colour, console.unicode});
  }
  return result.status == Status::done ? ExitCode::done : ExitCode::no_answer;
}

}  // namespace trotline
