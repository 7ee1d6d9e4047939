#include <fmt/format.h>
#include <unistd.h>

#include <algorithm>
#include <chrono>
#include <map>
#include <set>
#include <thread>

#include <trotline/analysis/measure_description.hpp>
#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/base/text.hpp>
#include <trotline/report/line_panels.hpp>
#include <trotline/report/measurement_report.hpp>
#include <trotline/report/model_file.hpp>

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
  CommandSyntax syntax{
      "measure",        "SPECTRUM", true, {"species", "out", "jobs", "panels", "figures", "model"},
      {"json", "help"}, true};
  for (const MeasureOption& option : measure_option_table())
    syntax.values.push_back(with('-', option.key, '_'));
  return syntax;
}

bool is_of_the_table(const std::string& name) {
  const auto& table = measure_option_table();
  return std::any_of(table.begin(), table.end(),
                     [&](const MeasureOption& option) { return with('-', option.key, '_') == name; });
}

MeasureDescription description_of(const ParsedCommand& command) {
  MeasureDescription description;
  for (const std::string& path : command.positionals) {
    description.inputs.emplace_back();
    description.inputs.back().path = path;
  }
  description.species = command.value("species");
  if (description.species.empty())
    throw UsageError("no species is given; add --species, as in '--species CO'");
  for (const auto& [name, value] : command.values) {
    if (!is_of_the_table(name)) continue;
    try {
      set_measure_option(description, with('_', name, '-'), value);
    } catch (const InputError& error) {
      throw UsageError("--" + name + std::string(error.what()).substr(name.size()));
    }
  }
  if (!description.vlsr_km_s)
    throw UsageError("the source's velocity is not given; add --vlsr, as in '--vlsr \"5.2 km/s\"'");
  description.options.keep_panels = !command.value("panels").empty();
  return description;
}

/// What --panels and --model ask to be drawn.
class Drawing {
 public:
  explicit Drawing(const ParsedCommand& command) : folder_(command.value("panels")) {
    for (const std::string name : {"model", "figures"}) {
      if (folder_.empty() && !command.value(name).empty())
        throw UsageError(fmt::format("--{} needs --panels, the folder for the drawing", name));
    }
    if (const std::string formats = command.value("figures"); !formats.empty())
      options_.formats = figure_formats(formats);
    const SpeciesLibrary library(SpeciesLibrary::standard_folders());
    for (const std::string& path : items_of(command.value("model")))
      sources_.push_back(read_model_file(path, library));
  }

  void draw(SpeciesMeasurement& measurement, const MeasureDescription& description,
            const Console& console) const {
    if (folder_.empty()) return;
    if (count_line_panels(measurement) == 0) {
      console.err << "trotline: there is no line to draw\n";
      return;
    }
    if (!sources_.empty()) predict(measurement, description);
    OutputFolder folder(folder_);
    (void)write_line_panels(measurement, folder.staging(), options_);
    const auto names = folder.commit();
    console.err << fmt::format("trotline: wrote {} to {}\n", listed(names), printable(folder_));
    const std::size_t most = kMostPanelPages * kPanelsOnAPage;
    if (const std::size_t panels = count_line_panels(measurement); panels > most)
      console.err << fmt::format("trotline: drew the first {} of {} lines\n", most, panels);
  }

 private:
  static std::vector<std::string> items_of(const std::string& text) {
    std::vector<std::string> items;
    for (std::size_t start = 0; start < text.size();) {
      const std::size_t comma = std::min(text.find(',', start), text.size());
      if (const auto item = trimmed(std::string_view(text).substr(start, comma - start)); !item.empty())
        items.emplace_back(item);
      start = comma + 1;
    }
    return items;
  }

  void predict(SpeciesMeasurement& measurement, const MeasureDescription& description) const {
    const PredictedProfile given{*description.vlsr_km_s, description.options.fwhm_km_s.value_or(0.0)};
    const PredictedProfile profile = profile_of(measurement, given);
    if (profile.fwhm_km_s == 0.0)
      throw InputError({"no line was fitted, so that the width of the model's lines is not known",
                        "--line-width, as in '--line-width \"2 km/s\"'"});
    add_predictions(sources_, profile, measurement);
  }

  std::string folder_;
  LinePanelOptions options_;
  std::vector<PredictedSource> sources_;
};

int threads_of(const ParsedCommand& command) {
  const std::string text = command.value("jobs");
  if (text.empty()) return static_cast<int>(std::max(1U, std::thread::hardware_concurrency()));
  const auto number = parse_whole_number(text);
  if (!number || *number < 1 || *number > 1024) {
    throw UsageError(
        fmt::format("--jobs: '{}' is no number of threads; expected 1 to 1024", printable(text)));
  }
  return static_cast<int>(*number);
}

/// Says on a terminal how far a long measurement is; nothing in its first second.
class Progress {
 public:
  explicit Progress(const Console& console) : console_(console), terminal_(isatty(STDERR_FILENO) != 0) {}

  void show(std::size_t done, std::size_t of) {
    const auto now = Clock::now();
    if (!terminal_ || now - begin_ < std::chrono::seconds(1) || now - last_ < std::chrono::milliseconds(100))
      return;
    last_ = now;
    shown_ = true;
    console_.err << fmt::format("\r\x1b[Kmeasured {} of {} spectra", done, of) << std::flush;
  }

  void end() {
    if (shown_) console_.err << "\r\x1b[K" << std::flush;
    shown_ = false;
  }

 private:
  using Clock = std::chrono::steady_clock;
  const Console& console_;
  bool terminal_;
  bool shown_ = false;
  Clock::time_point begin_ = Clock::now();
  Clock::time_point last_ = begin_;
};

void check_name(const std::string& path) {
  if (!path.empty() && !path.ends_with(".fits") && !path.ends_with(".ecsv")) {
    throw UsageError(fmt::format("--out: '{}' ends in neither .ecsv nor .fits", printable(path)));
  }
}

/// The table may not take the place of a spectrum or a species file.
void keep_inputs(const MeasureDescription& description, const ParsedCommand& command) {
  if (command.value("out").empty()) return;
  std::vector<std::string> inputs = {description.species, command.value("model")};
  for (const SpectrumInput& input : description.inputs) inputs.push_back(input.path);
  require_no_input_among({command.value("out")}, inputs);
}

void write_table(const IntensityTable& table, const std::string& path, const Console& console) {
  write_file(path, path.ends_with(".fits") ? to_fits(table) : to_ecsv(table));
  console.err << fmt::format("trotline: wrote {} to {}\n",
                             table.rows.size() == 1 ? "1 line" : fmt::format("{} lines", table.rows.size()),
                             printable(path));
}

SpeciesMeasurement measured(const MeasureDescription& description, int threads, const Console& console) {
  Progress progress(console);
  MeasurementRun run;
  run.threads = threads;
  run.progress = [&](std::size_t done, std::size_t of) { progress.show(done, of); };
  SpeciesMeasurement result = measure(description, SpeciesLibrary(SpeciesLibrary::standard_folders()), run);
  progress.end();
  return result;
}

}  // namespace

ExitCode run_measure(const std::vector<std::string>& arguments, const Console& console) {
  const ParsedCommand command = parse_command(syntax(), arguments);
  if (console.owns_process) clean_up_when_stopped();
  const MeasureDescription description = description_of(command);
  check_name(command.value("out"));
  keep_inputs(description, command);
  const Drawing drawing(command);
  SpeciesMeasurement result = measured(description, threads_of(command), console);
  const bool any = !result.table.rows.empty();
  drawing.draw(result, description, console);
  if (any && !command.value("out").empty()) write_table(result.table, command.value("out"), console);
  if (command.flags.at("json")) {
    console.out << measurement_json(result);
  } else {
    console.out << measurement_text(
        result, {static_cast<std::size_t>(console.width), console.colour, console.unicode});
  }
  if (any) return ExitCode::done;
  console.err << "trotline: no line could be measured, so there is no table\n";
  return ExitCode::no_answer;
}

}  // namespace trotline
