#pragma once

#include <map>
#include <stdexcept>
#include <string>
#include <utility>
#include <vector>

#include <trotline/report/figure.hpp>

namespace trotline {

/// The command line is wrong.
class UsageError : public std::runtime_error {
 public:
  using std::runtime_error::runtime_error;
};

/// What a verb understands.
struct CommandSyntax {
  std::string verb;        ///< for messages
  std::string positional;  ///< name of the one positional argument; empty: none
  bool positional_required = false;
  std::vector<std::string> values;  ///< options that take a value, without "--"
  std::vector<std::string> flags;   ///< options that take none
  bool positional_repeats = false;  ///< any number of positional arguments
};

/// A command line taken apart.
struct ParsedCommand {
  std::string positional;                ///< the first one
  std::vector<std::string> positionals;  ///< all of them, in the order given
  std::vector<std::pair<std::string, std::string>> values;  ///< in the order given
  std::map<std::string, bool> flags;

  /// The value of an option, or an empty text.
  [[nodiscard]] std::string value(const std::string& name) const;
};

/// @throws UsageError  an unknown option (with the nearest one), a missing value or argument, an option given
///         twice
[[nodiscard]] ParsedCommand parse_command(const CommandSyntax& syntax,
                                          const std::vector<std::string>& arguments);

/// Formats of figures from "svg,pdf" or "none". @throws UsageError naming the one that is not known
[[nodiscard]] std::vector<FigureFormat> figure_formats(const std::string& text);

}  // namespace trotline
