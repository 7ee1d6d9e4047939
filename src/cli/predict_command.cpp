#include <fmt/format.h>

#include <algorithm>

#include <trotline/analysis/prediction.hpp>
#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/base/text.hpp>
#include <trotline/report/prediction_report.hpp>
#include <trotline/species/library.hpp>

#include "command_line.hpp"
#include "interrupts.hpp"
#include "verbs.hpp"

namespace trotline {
namespace {

std::string dashed(std::string key) {
  std::replace(key.begin(), key.end(), '_', '-');
  return key;
}

CommandSyntax syntax() {
  CommandSyntax syntax{"predict", "SPECIES", true, {"out"}, {"no-figure", "json", "help"}};
  for (const PredictionOption& option : prediction_option_table())
    syntax.values.push_back(dashed(option.key));
  return syntax;
}

PredictionOptions options_of(const ParsedCommand& command) {
  PredictionOptions options;
  for (const auto& [name, value] : command.values) {
    for (const PredictionOption& option : prediction_option_table()) {
      if (dashed(option.key) != name) continue;
      try {
        option.set(options, value);
      } catch (const InputError& error) {
        throw UsageError(fmt::format("--{}: {}", name, error.what()));
      }
    }
  }
  return options;
}

void write_folder(const Prediction& prediction, const std::string& folder, bool with_figure,
                  const Console& console) {
  OutputFolder output(folder);
  output.write("prediction.json", prediction_json(prediction));
  write_prediction_ecsv(prediction, output.staging() / "prediction.ecsv");
  if (with_figure) {
    try {
      draw_prediction(prediction, output.staging());
    } catch (const SystemError& error) {
      throw SystemError(fmt::format("{}; with --no-figure everything else is written", error.what()));
    }
  }
  const auto names = output.commit();
  console.err << fmt::format("trotline: wrote {} to {}\n", listed(names, names.size()), folder);
}

}  // namespace

ExitCode run_predict(const std::vector<std::string>& arguments, const Console& console) {
  const ParsedCommand command = parse_command(syntax(), arguments);
  if (console.owns_process) clean_up_when_stopped();
  const PredictionOptions options = options_of(command);
  const Species species = SpeciesLibrary(SpeciesLibrary::standard_folders()).find(command.positional);
  const std::filesystem::path folder = command.value("out");
  if (!folder.empty())
    require_no_input_among({folder / "prediction.json", folder / "prediction.ecsv"}, {command.positional});
  const Prediction prediction = predict(species, options);
  if (!command.value("out").empty()) {
    write_folder(prediction, command.value("out"), !command.flags.at("no-figure"), console);
  }
  if (command.flags.at("json")) {
    console.out << prediction_json(prediction);
  } else {
    console.out << prediction_text(
        prediction, {static_cast<std::size_t>(console.width), console.colour, console.unicode});
  }
  return prediction.lines.empty() ? ExitCode::no_answer : ExitCode::done;
}

}  // namespace trotline
