#include <fmt/format.h>
#include <signal.h>
#include <unistd.h>

#include <algorithm>
#include <atomic>
#include <filesystem>
#include <sstream>

#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/species/library.hpp>
#include <trotline/survey/description.hpp>
#include <trotline/survey/gather.hpp>
#include <trotline/survey/ledger.hpp>
#include <trotline/survey/plan.hpp>
#include <trotline/survey/run.hpp>
#include <trotline/survey/summary.hpp>

#include "command_line.hpp"
#include "survey_progress.hpp"
#include "verbs.hpp"

namespace trotline {
namespace {

std::atomic<int> asked_to_stop = 0;

extern "C" void note_signal(int number) { asked_to_stop = number; }

/// While it lives, the first Ctrl-C or SIGTERM only asks to stop; a second one ends the program at once.
class SignalWatch {
 public:
  SignalWatch() {
    asked_to_stop = 0;
    struct sigaction action {};
    action.sa_handler = note_signal;
    action.sa_flags = static_cast<int>(SA_RESETHAND);
    sigaction(SIGINT, &action, &before_interrupt_);
    sigaction(SIGTERM, &action, &before_terminate_);
  }
  SignalWatch(const SignalWatch&) = delete;
  SignalWatch& operator=(const SignalWatch&) = delete;
  ~SignalWatch() {
    sigaction(SIGINT, &before_interrupt_, nullptr);
    sigaction(SIGTERM, &before_terminate_, nullptr);
  }

 private:
  struct sigaction before_interrupt_ {};
  struct sigaction before_terminate_ {};
};

std::vector<std::string> items_of(const std::string& text) {
  std::vector<std::string> items;
  std::stringstream stream(text);
  for (std::string item; std::getline(stream, item, ',');) {
    if (!trimmed(item).empty()) items.emplace_back(trimmed(item));
  }
  return items;
}

int threads_of(const ParsedCommand& command) {
  const std::string text = command.value("jobs");
  if (text.empty()) return 0;
  const auto number = parse_whole_number(text);
  if (!number || *number < 1 || *number > 1024) {
    throw UsageError(
        fmt::format("--jobs: '{}' is no number of threads; expected 1 to 1024", printable(text)));
  }
  return static_cast<int>(*number);
}

/// What --export asks for, in place of the outputs of the description.
SurveyOutputs exports_of(const std::string& text) {
  SurveyOutputs outputs{{}, false, false, {}};
  std::vector<std::string> known = kTableFormats;
  known.insert(known.end(), {"figures", "page"});
  known.insert(known.end(), kFolderContents.begin(), kFolderContents.end());
  for (const std::string& item : items_of(text)) {
    const auto is_in = [&](const std::vector<std::string>& list) {
      return std::find(list.begin(), list.end(), item) != list.end();
    };
    if (is_in(kTableFormats))
      outputs.tables.push_back(item);
    else if (is_in(kFolderContents))
      outputs.folders.push_back(item);
    else if (item == "figures")
      outputs.figures = true;
    else if (item == "page")
      outputs.page = true;
    else {
      const std::string guess = did_you_mean(item, known);
      throw UsageError(fmt::format("--export: there is no '{}'; expected some of {}{}", printable(item),
                                   listed(known, known.size()), guess.empty() ? "" : "; " + guess));
    }
  }
  return outputs;
}

void say(const Console& console, const std::string& text) {
  console.err << "trotline: " << printable(text) << '\n';
}

/// Says all errors, one a line; true when there are any.
bool say_errors(const Console& console, const std::vector<InputError>& errors) {
  constexpr std::size_t kMost = 200;
  for (std::size_t i = 0; i < std::min(errors.size(), kMost); ++i) say(console, errors[i].what());
  if (errors.size() > kMost) say(console, fmt::format("and {} more", errors.size() - kMost));
  return !errors.empty();
}

class ProgressBar {
 public:
  explicit ProgressBar(const Console& console) : console_(console), terminal_(isatty(STDERR_FILENO) != 0) {}

  void show(const SurveyProgress& progress) const {
    if (!terminal_ || progress.to_compute == 0) return;
    console_.err << "\r\x1b[K" << progress_line(progress, console_.width - 1, console_.unicode) << std::flush;
  }

  void end() const {
    if (terminal_) console_.err << "\r\x1b[K" << std::flush;
  }

 private:
  const Console& console_;
  bool terminal_;
};

SurveyOutcome run_watched(const SurveyPlan& plan, Ledger& ledger, int threads, const Console& console) {
  const SignalWatch watch;
  const ProgressBar bar(console);
  SurveyRunOptions options;
  options.threads = threads;
  options.on_progress = [&](const SurveyProgress& progress) { bar.show(progress); };
  options.stop = [] { return asked_to_stop != 0; };
  SurveyOutcome outcome = run_survey(plan, ledger, options);
  bar.end();
  return outcome;
}

/// Ends the program by the signal that it was asked to end by, so that whoever started it knows.
[[noreturn]] void end_by_signal(const Console& console) {
  console.out.flush();
  signal(asked_to_stop, SIG_DFL);
  raise(asked_to_stop);
  _exit(128 + asked_to_stop);
}

struct Work {
  SurveyDescription survey;
  std::filesystem::path folder;
  int threads = 0;
  std::vector<std::string> again;
  bool json = false;
};

PlannedSurvey plan_of(const Work& work, Ledger* ledger) {
  const SpeciesLibrary library(SpeciesLibrary::standard_folders());
  return plan_survey(work.survey, ledger,
                     {work.again, [&](const std::string& name) { return library.find(name); }});
}

ExitCode dry_run(const Work& work, const Console& console) {
  auto ledger = Ledger::open_to_read(work.folder);
  const PlannedSurvey planned = plan_of(work, ledger ? &*ledger : nullptr);
  if (say_errors(console, planned.errors)) return ExitCode::bad_input;
  console.out << (work.json ? plan_json(planned.plan, ledger ? ledger->last_run() : std::nullopt)
                            : plan_text(planned.plan, ledger ? ledger->last_run() : std::nullopt));
  return ExitCode::done;
}

ExitCode export_only(const Work& work, const std::string& list, const Console& console) {
  const SurveyOutputs outputs = exports_of(list);
  const FolderLock lock(work.folder);
  if (!std::filesystem::exists(work.folder / Ledger::kFileName)) {
    throw InputError(Place{work.folder.string()}, {"holds no ledger", "the folder of a survey that has run"});
  }
  Ledger ledger = Ledger::open(work.folder);
  const Gathered gathered =
      gather(ledger, work.folder,
             {outputs, std::filesystem::path(work.survey.file).filename().string(), work.threads});
  for (const std::string& warning : gathered.warnings) say(console, warning);
  say(console, fmt::format("wrote {} to {}", listed(gathered.files, 20), work.folder.string()));
  return ExitCode::done;
}

ExitCode full_run(const Work& work, const Console& console) {
  const FolderLock lock(work.folder);
  Ledger ledger = Ledger::open(work.folder);
  const PlannedSurvey planned = plan_of(work, &ledger);
  if (say_errors(console, planned.errors)) return ExitCode::bad_input;
  for (const std::string& warning : planned.plan.warnings) say(console, warning);
  const SurveyOutcome outcome = run_watched(planned.plan, ledger, work.threads, console);
  if (outcome.stopped) {
    say(console,
        fmt::format("stopped after {} of {} jobs; they are kept, and the same command goes on from there",
                    outcome.progress.finished, outcome.progress.to_compute));
    end_by_signal(console);
  }
  const Gathered gathered = gather(
      ledger, work.folder,
      {work.survey.outputs, std::filesystem::path(work.survey.file).filename().string(), work.threads});
  for (const std::string& warning : gathered.warnings) say(console, warning);
  const SurveySummary summary{&planned.plan, outcome, gathered, work.folder.string()};
  console.out << (work.json ? summary_json(summary, ledger) : summary_text(summary, ledger));
  return ledger.counts().done > 0 ? ExitCode::done : ExitCode::no_answer;
}

}  // namespace

ExitCode run_survey_command(const std::vector<std::string>& arguments, const Console& console) {
  const CommandSyntax syntax{
      "survey", "SURVEY.yaml", true, {"out", "jobs", "again", "export"}, {"dry-run", "json", "help"}};
  const ParsedCommand command = parse_command(syntax, arguments);
  if (command.value("out").empty()) throw UsageError("no folder is given; add --out, as in '--out results'");
  Work work;
  work.folder = command.value("out");
  work.threads = threads_of(command);
  work.again = items_of(command.value("again"));
  work.json = command.flags.at("json");
  CheckedSurvey checked = read_survey_description(command.positional);
  if (say_errors(console, checked.errors)) return ExitCode::bad_input;
  work.survey = std::move(checked.survey);
  if (command.flags.at("dry-run")) return dry_run(work, console);
  if (!command.value("export").empty()) return export_only(work, command.value("export"), console);
  return full_run(work, console);
}

}  // namespace trotline
