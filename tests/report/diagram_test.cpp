#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <unistd.h>

#include <algorithm>
#include <filesystem>
#include <map>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/report/diagram.hpp>
#include <trotline/report/display_text.hpp>
#include <trotline/report/process.hpp>
#include <trotline/report/typeset.hpp>

#include "report/invented_results.hpp"

namespace trotline {
namespace {

namespace fs = std::filesystem;
using namespace testing_room;
using testing::AllOf;
using testing::Contains;
using testing::HasSubstr;
using testing::Not;
using testing::ThrowsMessage;
using testing::UnorderedElementsAre;

/// A folder of its own for one test, gone at its end.
class Folder {
 public:
  Folder() : path_(fs::temp_directory_path() / ("trotline-diagram-XXXXXX")) {
    std::string name = path_.string();
    if (::mkdtemp(name.data()) == nullptr) throw std::runtime_error("no temporary folder");
    path_ = name;
  }
  ~Folder() { fs::remove_all(path_); }
  Folder(const Folder&) = delete;
  Folder& operator=(const Folder&) = delete;
  [[nodiscard]] const fs::path& path() const { return path_; }
  [[nodiscard]] std::string read(const std::string& name) const { return read_file((path_ / name).string()); }

 private:
  fs::path path_;
};

std::map<std::string, std::string> bytes_of(const fs::path& folder) {
  std::map<std::string, std::string> bytes;
  for (const auto& entry : fs::directory_iterator(folder)) {
    bytes[entry.path().filename().string()] = read_file(entry.path().string());
  }
  return bytes;
}

void replace_all(std::string& text, const std::string& from, const std::string& to) {
  for (std::size_t at = text.find(from); at != std::string::npos; at = text.find(from, at + to.size())) {
    text.replace(at, from.size(), to);
  }
}

/// What stands in the text elements of an SVG, tags taken out and entities read.
std::vector<std::string> texts_of_svg(const std::string& svg) {
  std::vector<std::string> texts;
  for (std::size_t at = svg.find("<text"); at != std::string::npos; at = svg.find("<text", at + 1)) {
    const std::size_t start = svg.find('>', at) + 1;
    std::string text;
    bool in_tag = false;
    for (const char c : svg.substr(start, svg.find("</text>", start) - start)) {
      in_tag = in_tag || c == '<';
      if (!in_tag) text += c;
      in_tag = in_tag && c != '>';
    }
    replace_all(text, "&lt;", "<");
    replace_all(text, "&gt;", ">");
    replace_all(text, "&amp;", "&");
    texts.push_back(text);
  }
  return texts;
}

/// Every tag closed in order and nothing that XML forbids in texts: enough for what a plotting program
/// writes.
std::string complaint_about_xml(const std::string& xml) {
  std::vector<std::string> open;
  for (std::size_t at = xml.find('<'); at != std::string::npos; at = xml.find('<', at + 1)) {
    const std::size_t end = xml.find('>', at);
    if (end == std::string::npos) return "a tag without end";
    const std::string tag = xml.substr(at + 1, end - at - 1);
    if (tag.starts_with("?") || tag.starts_with("!")) continue;
    const std::string name = tag.substr(0, tag.find_first_of(" \t\n/", 1));
    if (tag.starts_with("/")) {
      if (open.empty() || open.back() != tag.substr(1)) return "</" + tag + "> closes another tag";
      open.pop_back();
    } else if (!tag.ends_with("/")) {
      open.push_back(name);
    }
  }
  if (!open.empty()) return "<" + open.back() + "> is not closed";
  return xml.find("]]>") == std::string::npos ? "" : "]]> in a text";
}

/// The same by a real parser, where there is one.
void expect_well_formed(const fs::path& file) {
  EXPECT_EQ(complaint_about_xml(read_file(file.string())), "");
  try {
    const ProcessOutcome outcome = run_process({"xmllint", "--noout", "--nonet", file.string()});
    EXPECT_EQ(outcome.exit_code, 0) << outcome.output;
  } catch (const SystemError&) {
    // not installed; the check above has to do
  }
}

TEST(Diagram, WritesFiguresScriptAndData) {
  const Folder folder;
  EXPECT_THAT(
      write_diagram(invented_result({.limits = 2, .unused = 1}), folder.path()),
      UnorderedElementsAre("diagram.svg", "diagram.pdf", "diagram.png", "diagram.gp", "diagram-points.tsv",
                           "diagram-line.tsv", "diagram-labels.tsv", "diagram-text.tsv"));
  EXPECT_EQ(bytes_of(folder.path()).size(), 8U) << "and nothing else";
  EXPECT_TRUE(folder.read("diagram.pdf").starts_with("%PDF-"));
  EXPECT_TRUE(folder.read("diagram.png").starts_with("\x89PNG\r\n"));
  expect_well_formed(folder.path() / "diagram.svg");
}

// 88 x 92 mm at 300 dpi: 88 / 25.4 * 300 = 1039.4, 92 / 25.4 * 300 = 1086.6.
TEST(Diagram, PngHasThreeHundredDotsPerInch) {
  const Folder folder;
  write_diagram(invented_result(), folder.path(), {.formats = {FigureFormat::png}});
  const std::string png = folder.read("diagram.png");
  const auto number = [&](std::size_t at) {  // big-endian, in the header chunk (PNG specification, 11.2.2)
    std::size_t value = 0;
    for (std::size_t i = 0; i < 4; ++i) value = 256 * value + static_cast<unsigned char>(png[at + i]);
    return value;
  };
  EXPECT_EQ(number(16), 1039U);
  EXPECT_EQ(number(20), 1087U);
}

TEST(Diagram, WritesOnlyTheFormatsAsked) {
  const Folder folder;
  write_diagram(invented_result(), folder.path(), {.formats = {FigureFormat::svg}});
  EXPECT_TRUE(fs::exists(folder.path() / "diagram.svg"));
  EXPECT_FALSE(fs::exists(folder.path() / "diagram.png"));
  write_diagram(invented_result(), folder.path(), {.formats = {}});
  EXPECT_TRUE(fs::exists(folder.path() / "diagram.gp"));
}

TEST(Diagram, ShowsSourceSpeciesResultAndTransitions) {
  const Folder folder;
  Result result = invented_result();
  result.temperature_k = {62.347, 3.09};
  write_diagram(result, folder.path(), {.formats = {FigureFormat::svg}});
  EXPECT_THAT(texts_of_svg(folder.read("diagram.svg")),
              AllOf(Contains("Lantern Cloud 4"), Contains("CH₃CN"), Contains("T = 62.3 ± 3.1 K"),
                    Contains("8(3)–7(3)"), Contains("residual (σ)")));
}

TEST(Diagram, DrawsEveryKindOfResult) {
  Result none = invented_result();
  none.lines.clear();
  for (const Result& result : {one_line_result(), not_thermal_result(), only_limits_result(), Result{}, none,
                               invented_result({.lines = 120, .relative_error = 0.1})}) {
    const Folder folder;
    EXPECT_NO_THROW(write_diagram(result, folder.path()));
    expect_well_formed(folder.path() / "diagram.svg");
  }
}

TEST(Diagram, SameResultGivesTheSameBytes) {
  const Result result = with_hostile_text(invented_result({.limits = 2, .unused = 1}), "星雲 Ωж & <b>");
  const Folder one;
  const Folder two;
  write_diagram(result, one.path());
  ::usleep(1'100'000);  // a date of drawing in a file would have changed
  write_diagram(result, two.path());
  EXPECT_EQ(bytes_of(one.path()), bytes_of(two.path()));
}

TEST(Diagram, ScriptDoesNotDependOnTexts) {
  const Result plain = invented_result({.limits = 2, .unused = 1});
  const std::vector<FigureFormat> formats = {FigureFormat::svg, FigureFormat::pdf};
  const std::string script = diagram_script(lay_out_diagram(plain), formats);
  for (const std::string& text : hostile_texts()) {
    EXPECT_EQ(diagram_script(lay_out_diagram(with_hostile_text(plain, text)), formats), script) << text;
  }
}

TEST(Diagram, DataHoldTextsAsOneQuotedCellEach) {
  for (const std::string& text : hostile_texts()) {
    const DiagramLayout layout = lay_out_diagram(with_hostile_text(invented_result({.lines = 3}), text));
    for (const NamedBytes& file : diagram_data(layout)) {
      for (const char c : file.bytes)
        EXPECT_TRUE(c == '\n' || c == '\t' || static_cast<unsigned char>(c) >= 0x20);
      std::size_t start = file.bytes.find('\n') + 1;
      const std::string head = file.bytes.substr(0, start);
      const auto tabs = std::count(head.begin(), head.end(), '\t');
      for (std::size_t end; (end = file.bytes.find('\n', start)) != std::string::npos; start = end + 1) {
        const std::string row = file.bytes.substr(start, end - start);
        EXPECT_EQ(std::count(row.begin(), row.end(), '\t'), tabs) << file.name << ": " << row;
        EXPECT_EQ(std::count(row.begin(), row.end(), '"') % 4, 0) << row;  // two texts or none
      }
    }
  }
}

TEST(Diagram, MarksUpOnlyItsOwnTexts) {
  const std::string text = "T = N(5) {/:Bold x}";
  for (const PageText& shown : lay_out_diagram(with_hostile_text(one_line_result(), text)).texts) {
    if (shown.role == TextRole::source || shown.role == TextRole::species) continue;
    EXPECT_THAT(shown.text, Not(HasSubstr("{"))) << "a text from outside where markup is read";
  }
}

/// True when `shown` is what a figure makes of `text`: the whole of it, or its beginning with an ellipsis.
bool shows(const std::string& shown, const std::string& text) {
  if (shown == text) return true;
  const std::string dots = "…";
  return shown.ends_with(dots) && text.starts_with(shown.substr(0, shown.size() - dots.size()));
}

TEST(Diagram, ShowsEveryTextAsItIsAndRunsNone) {
  for (const std::string& text : hostile_texts()) {
    const Folder folder;
    const Result result = with_hostile_text(invented_result({.limits = 1, .unused = 1}), text);
    ASSERT_NO_THROW(write_diagram(result, folder.path())) << text;
    EXPECT_FALSE(fs::exists(folder.path() / "pwned")) << text;
    EXPECT_EQ(bytes_of(folder.path()).size(), 8U) << text;
    expect_well_formed(folder.path() / "diagram.svg");
    const auto texts = texts_of_svg(folder.read("diagram.svg"));
    for (const std::string& expected : {display_text(text), typeset_transition(display_text(text))}) {
      EXPECT_TRUE(std::any_of(texts.begin(), texts.end(), [&](const std::string& t) {
        return shows(t, expected);
      })) << expected;
    }
  }
}

TEST(Diagram, CanBeDrawnAgainFromItsFolder) {
  const Folder folder;
  write_diagram(invented_result({.limits = 1}), folder.path());
  fs::remove(folder.path() / "diagram.png");
  const ProcessOutcome outcome = run_process({"gnuplot", "-d", "diagram.gp"}, {.folder = folder.path()});
  EXPECT_EQ(outcome.exit_code, 0) << outcome.output;
  EXPECT_TRUE(fs::exists(folder.path() / "diagram.png"));
}

// Its widths are those that the layout counts with; docs/outputs.md names the package.
TEST(Diagram, ItsTypefaceIsInstalled) {
  EXPECT_NE(run_process({"fc-list", ":family=Linux Biolinum O"}).output, "");
}

TEST(Diagram, StandsFoldersWithHostileNames) {
  const Folder folder;
  const fs::path inside = folder.path() / "a 'b' \"c\" `touch pwned` $HOME ; 星";
  fs::create_directory(inside);
  EXPECT_NO_THROW(write_diagram(invented_result(), inside, {.formats = {FigureFormat::svg}}));
  EXPECT_TRUE(fs::exists(inside / "diagram.svg"));
}

TEST(Diagram, SaysWhyAFigureCouldNotBeDrawn) {
  const Folder folder;
  const auto with_program = [&](const std::string& program) {
    return [&folder, program] { write_diagram(invented_result(), folder.path(), {.program = program}); };
  };
  EXPECT_THAT(with_program("no-such-plotter"),
              ThrowsMessage<SystemError>(HasSubstr("no-such-plotter: cannot be started")));
  EXPECT_THAT(with_program("false"),
              ThrowsMessage<SystemError>(HasSubstr("could not be drawn (exit code 1)")));
  EXPECT_THAT(with_program("true"), ThrowsMessage<SystemError>(HasSubstr("diagram.svg was not drawn")));
  EXPECT_THAT(with_program("ls"), ThrowsMessage<SystemError>(HasSubstr("was not drawn: diagram.gp")));
}

}  // namespace
}  // namespace trotline
