// The examples of the man pages are run as they stand there.

#include "program_fixture.hpp"

namespace trotline {
namespace {

/// Words as a shell splits them, single quotes respected: all that the examples need.
std::vector<std::string> shell_words(const std::string& line) {
  std::vector<std::string> words;
  std::string word;
  bool quoted = false;
  bool started = false;
  for (const char c : line) {
    if (c == '\'') {
      quoted = !quoted;
      started = true;
    } else if (c == ' ' && !quoted) {
      if (started) words.push_back(word);
      word.clear();
      started = false;
    } else {
      word += c;
      started = true;
    }
  }
  if (started) words.push_back(word);
  return words;
}

struct Example {
  std::string command;
  std::string output;  ///< empty where the page shows none
};

/// `.Dl trotline ...` lines; a literal block that starts with "$ trotline ..." shows its output too.
std::vector<Example> examples_of(const std::string& page) {
  std::ifstream file(std::string(TROTLINE_SOURCE_DIR) + "/docs/man/" + page + ".1");
  std::vector<Example> examples;
  bool literal = false;
  for (std::string line; std::getline(file, line);) {
    if (line.starts_with(".Dl trotline ")) examples.push_back({line.substr(4), ""});
    if (line.starts_with(".Bd -literal")) literal = true;
    if (line == ".Ed") literal = false;
    if (literal && line.starts_with("$ trotline ")) {
      examples.push_back({line.substr(2), ""});
    } else if (literal && !line.starts_with(".") && !examples.empty() && file.good()) {
      examples.back().output += line + "\n";
    }
  }
  return examples;
}

class ManPages : public ProgramTest {};

TEST_F(ManPages, ExamplesRunAndPrintWhatTheyShow) {
  (void)folder_.file("lines.csv",
                     "transition,intensity [K km/s],intensity_error [K km/s],beam_fwhm [arcsec]\n"
                     "1-0,4.21,0.08,28\n2-1,8.93,0.25,14\n3-2,7.02,0.41,9\n");
  for (const char* name : {"my_molecule.yaml", "my_h2co.yaml"}) {
    std::filesystem::copy_file(std::string(TROTLINE_SOURCE_DIR) + "/configs/species/H2CO.yaml", folder_.path() / name);
  }
  const auto before = std::filesystem::current_path();
  std::filesystem::current_path(folder_.path());
  int shown = 0;
  for (const std::string page : {"trotline-fit", "trotline-species"}) {
    const auto examples = examples_of(page);
    EXPECT_GE(examples.size(), 3U) << page;
    for (const Example& example : examples) {
      std::vector<std::string> words = shell_words(example.command);
      words.erase(words.begin());
      const Outcome outcome = run(words);
      EXPECT_EQ(outcome.code, ExitCode::done) << example.command << "\n" << outcome.err;
      if (example.output.empty()) continue;
      EXPECT_EQ(outcome.out, example.output) << example.command;
      ++shown;
    }
  }
  std::filesystem::current_path(before);
  EXPECT_GE(shown, 1);
}

}  // namespace
}  // namespace trotline
