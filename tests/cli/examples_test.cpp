// The examples of the man pages are run as they stand there.

#include <bit>
#include <cstdint>
#include <random>

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

/// A FITS image of one spectrum that covers CO 1-0 and 2-1 of an invented source at 5.2 km/s, noise included.
std::string wide_spectrum() {
  constexpr double kFirstHz = 115.0e9;
  constexpr double kStepHz = 0.25e6;
  constexpr int kChannels = 463000;
  constexpr double kLightKmS = 299792.458;
  std::string bytes;
  const auto card = [&](const std::string& keyword, const std::string& value) {
    bytes += fmt::format("{:<80}", fmt::format("{:<8}= {:>20}", keyword, value));
  };
  card("SIMPLE", "T");
  card("BITPIX", "-32");
  card("NAXIS", "1");
  card("NAXIS1", std::to_string(kChannels));
  card("CTYPE1", "'FREQ    '");
  card("CUNIT1", "'Hz      '");
  card("CRVAL1", fmt::format("{:.1f}", kFirstHz));
  card("CDELT1", fmt::format("{:.1f}", kStepHz));
  card("CRPIX1", "1.0");
  card("SPECSYS", "'LSRK    '");
  card("BUNIT", "'K       '");
  bytes += fmt::format("{:<80}", "END");
  bytes.resize((bytes.size() + 2879) / 2880 * 2880, ' ');
  std::mt19937 random(1);
  std::normal_distribution<double> normal(0.0, 0.02);
  for (int i = 0; i < kChannels; ++i) {
    double value = normal(random);
    // Winnewisser et al. 1997, J. Mol. Spectrosc. 184, 468; brightness and width are invented.
    for (const auto& [rest_hz, peak] : {std::pair{115271.2018e6, 1.6}, std::pair{230538.0e6, 3.4}}) {
      const double v = kLightKmS * (1.0 - (kFirstHz + i * kStepHz) / rest_hz) - 5.2;
      value += std::abs(v) < 20.0 ? peak * std::exp(-v * v / 2.0) : 0.0;
    }
    const auto bits = std::bit_cast<std::uint32_t>(static_cast<float>(value));
    for (int shift = 24; shift >= 0; shift -= 8) bytes += static_cast<char>(bits >> shift);
  }
  bytes.resize((bytes.size() + 2879) / 2880 * 2880, '\0');
  return bytes;
}

class ManPages : public ProgramTest {};

TEST_F(ManPages, ExamplesRunAndPrintWhatTheyShow) {
  (void)folder_.file("lines.csv",
                     "transition,intensity [K km/s],intensity_error [K km/s],beam_fwhm [arcsec]\n"
                     "1-0,4.21,0.08,28\n2-1,8.93,0.25,14\n3-2,7.02,0.41,9\n");
  for (const char* name : {"my_molecule.yaml", "my_h2co.yaml"}) {
    std::filesystem::copy_file(std::string(TROTLINE_SOURCE_DIR) + "/configs/species/H2CO.yaml", folder_.path() / name);
  }
  (void)folder_.file("co.fits", wide_spectrum());
  const auto before = std::filesystem::current_path();
  std::filesystem::current_path(folder_.path());
  int shown = 0;
  for (const std::string page : {"trotline-fit", "trotline-measure", "trotline-species"}) {
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
