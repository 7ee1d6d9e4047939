#include <sys/ioctl.h>
#include <unistd.h>

#include <cstdlib>
#include <iostream>
#include <string>
#include <vector>

#include <trotline/cli/program.hpp>

namespace {

bool is_set(const char* variable) {
  const char* value = std::getenv(variable);
  return value != nullptr && value[0] != '\0';
}

/// Whether the locale of the environment writes UTF-8, by the order in which POSIX consults the variables.
bool locale_is_utf8() {
  for (const char* variable : {"LC_ALL", "LC_CTYPE", "LANG"}) {
    if (!is_set(variable)) continue;
    const std::string value = std::getenv(variable);
    return value.find("UTF-8") != std::string::npos || value.find("utf8") != std::string::npos;
  }
  return false;
}

}  // namespace

int main(int argc, char** argv) {
  const bool terminal = isatty(STDOUT_FILENO) != 0;
  trotline::Console console{std::cout, std::cerr};
  winsize size{};
  if (terminal && ioctl(STDOUT_FILENO, TIOCGWINSZ, &size) == 0 && size.ws_col > 0)
    console.width = size.ws_col;
  console.colour = terminal && !is_set("NO_COLOR");
  console.unicode = !terminal || locale_is_utf8();
  console.owns_process = true;
  const std::vector<std::string> arguments(argv + 1, argv + argc);
  return static_cast<int>(trotline::run_program(arguments, console));
}
