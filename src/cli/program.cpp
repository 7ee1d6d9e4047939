#include <fmt/format.h>

#include <exception>
#include <functional>
#include <utility>

#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/base/version.hpp>
#include <trotline/cli/program.hpp>

#include "command_line.hpp"
#include "verbs.hpp"

namespace trotline {
namespace {

struct Verb {
  std::string name;
  std::function<ExitCode(const std::vector<std::string>&, const Console&)> run;
};

const std::vector<Verb>& verbs() {
  static const std::vector<Verb> kVerbs = {{"fit", run_fit},
                                           {"measure", run_measure},
                                           {"survey", run_survey_command},
                                           {"predict", run_predict},
                                           {"species", run_species}};
  return kVerbs;
}

ExitCode dispatch(const std::vector<std::string>& arguments, const Console& console) {
  if (arguments.empty()) {
    console.err << help_text("");
    return ExitCode::wrong_command_line;
  }
  const std::string& first = arguments.front();
  if (first == "--help" || first == "-h" || first == "help") {
    console.out << help_text("");
    return ExitCode::done;
  }
  if (first == "--version") {
    console.out << fmt::format("trotline {}\n", version());
    return ExitCode::done;
  }
  const std::vector<std::string> rest(arguments.begin() + 1, arguments.end());
  std::vector<std::string> names;
  for (const Verb& verb : verbs()) {
    names.push_back(verb.name);
    if (verb.name != first) continue;
    for (const std::string& argument : rest) {
      if (argument == "--help" || argument == "-h") {
        console.out << help_text(first);
        return ExitCode::done;
      }
    }
    return verb.run(rest, console);
  }
  const std::string guess = did_you_mean(first, names);
  throw UsageError(fmt::format("there is no verb '{}'; the verbs are {}{}; see 'trotline --help'",
                               printable(first), listed(names), guess.empty() ? "" : "; " + guess));
}

ExitCode say(const Console& console, const std::string& message, ExitCode code) {
  constexpr std::size_t kMostBytes = 2000;  // a value of an option may be of any length
  const bool is_long = message.size() > kMostBytes;
  console.err << "trotline: " << printable(message.substr(0, kMostBytes)) << (is_long ? " ..." : "") << '\n';
  return code;
}

}  // namespace

ExitCode run_program(const std::vector<std::string>& arguments, const Console& console) {
  try {
    const ExitCode code = dispatch(arguments, console);
    console.out.flush();
    if (!console.out) return say(console, "standard output cannot be written to", ExitCode::fault);
    return code;
  } catch (const UsageError& error) {
    return say(console, error.what(), ExitCode::wrong_command_line);
  } catch (const InputError& error) {
    return say(console, error.what(), ExitCode::bad_input);
  } catch (const SystemError& error) {
    return say(console, error.what(), ExitCode::fault);
  } catch (const std::exception& error) {
    return say(console, fmt::format("a fault of the program, please report it: {}", error.what()),
               ExitCode::fault);
  }
}

}  // namespace trotline
