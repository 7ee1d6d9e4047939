#include "command_line.hpp"

#include <CLI/CLI.hpp>
#include <fmt/format.h>

#include <map>

#include <trotline/base/text.hpp>

namespace trotline {
namespace {

std::string name_only(const std::string& argument) {
  std::string name = argument.substr(std::min(argument.find_first_not_of('-'), argument.size()));
  return name.substr(0, name.find('='));
}

[[noreturn]] void refuse_extra(const CommandSyntax& syntax, const std::string& argument) {
  if (!argument.starts_with("-")) {
    const std::string kept = syntax.positional.empty() ? "no argument" : "one " + syntax.positional;
    throw UsageError(fmt::format("'{}' is one argument too many; 'trotline {}' takes {}", printable(argument),
                                 syntax.verb, kept));
  }
  std::vector<std::string> names = syntax.values;
  names.insert(names.end(), syntax.flags.begin(), syntax.flags.end());
  const auto nearest = nearest_name(name_only(argument), names);
  throw UsageError(fmt::format("there is no option '{}'{}; 'trotline {} --help' lists them",
                               printable(argument),
                               nearest ? fmt::format("; did you mean '--{}'?", *nearest) : "", syntax.verb));
}

}  // namespace

std::string ParsedCommand::value(const std::string& name) const {
  for (const auto& [key, text] : values) {
    if (key == name) return text;
  }
  return {};
}

ParsedCommand parse_command(const CommandSyntax& syntax, const std::vector<std::string>& arguments) {
  CLI::App app;
  app.set_help_flag("");
  app.allow_extras();
  ParsedCommand command;
  std::map<std::string, std::string> given;
  std::map<std::string, CLI::Option*> options;
  for (const std::string& name : syntax.values) options[name] = app.add_option("--" + name, given[name]);
  for (const std::string& name : syntax.flags) app.add_flag("--" + name, command.flags[name]);
  if (!syntax.positional.empty() && syntax.positional_repeats) {
    app.add_option(syntax.positional, command.positionals);
  } else if (!syntax.positional.empty()) {
    app.add_option(syntax.positional, command.positional);
  }

  std::vector<std::string> reversed(arguments.rbegin(), arguments.rend());
  try {
    app.parse(reversed);
  } catch (const CLI::ParseError& error) {
    throw UsageError(fmt::format("{}; see 'trotline {} --help'", printable(error.what()), syntax.verb));
  }
  if (syntax.positional_repeats && !command.positionals.empty()) {
    command.positional = command.positionals.front();
  } else if (!command.positional.empty()) {
    command.positionals = {command.positional};
  }
  if (!app.remaining().empty()) refuse_extra(syntax, app.remaining().front());
  if (syntax.positional_required && command.positional.empty() && !command.flags["help"]) {
    throw UsageError(fmt::format("'trotline {}' needs an argument: {}; see 'trotline {} --help'", syntax.verb,
                                 syntax.positional, syntax.verb));
  }
  for (const std::string& name : syntax.values) {
    if (options[name]->count() > 1) throw UsageError(fmt::format("option '--{}' is given twice", name));
    if (options[name]->count() == 0) continue;
    if (trimmed(given[name]).empty())
      throw UsageError(fmt::format("option '--{}' is given an empty value", name));
    command.values.emplace_back(name, given[name]);
  }
  return command;
}

std::vector<FigureFormat> figure_formats(const std::string& text) {
  if (text == "none") return {};
  std::vector<FigureFormat> formats;
  for (std::size_t start = 0; start <= text.size();) {
    const std::size_t comma = std::min(text.find(',', start), text.size());
    const std::string word = lower_case(trimmed(std::string_view(text).substr(start, comma - start)));
    const std::map<std::string, FigureFormat> known = {
        {"svg", FigureFormat::svg}, {"pdf", FigureFormat::pdf}, {"png", FigureFormat::png}};
    if (!known.contains(word)) {
      throw UsageError(
          fmt::format("--figures: there is no figure format '{}'; expected a list of svg, pdf, png, or none",
                      printable(word)));
    }
    formats.push_back(known.at(word));
    start = comma + 1;
  }
  return formats;
}

}  // namespace trotline
