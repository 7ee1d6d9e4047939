#include <fmt/format.h>
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <string>
#include <vector>

#include <trotline/survey/description.hpp>

namespace trotline {
namespace {

using ::testing::HasSubstr;

std::vector<std::string> messages(const CheckedSurvey& checked) {
  std::vector<std::string> texts;
  for (const InputError& error : checked.errors) texts.emplace_back(error.what());
  return texts;
}

CheckedSurvey parsed(const std::string& text) { return parse_survey_description(text, "plans/survey.yaml"); }

TEST(SurveyDescription, ReadsEveryPart) {
  const CheckedSurvey checked = parsed(R"(
tables:
  - lines/*.csv
  - {files: [a.fits, /tmp/b.fits], species: CS, source: Lantern 4}
species: [CO, own/thing.yaml]
defaults: {background: 0 K, without: [1-0, 2-1]}
exceptions:
  - sources: ["Reef *", Lantern 4]
    source_size: 8 arcsec
  - {species: co, temperature: 20 K}
outputs: {tables: [latex, ecsv], figures: no, page: yes, folders: [lines, result]}
)");
  EXPECT_THAT(messages(checked), ::testing::IsEmpty());
  const SurveyDescription& survey = checked.survey;
  ASSERT_EQ(survey.tables.size(), 3u);
  EXPECT_EQ(survey.tables[0].pattern, "plans/lines/*.csv");
  EXPECT_EQ(survey.tables[0].place.line, 3u);
  EXPECT_EQ(survey.tables[1].pattern, "plans/a.fits");
  EXPECT_EQ(survey.tables[2].pattern, "/tmp/b.fits");
  EXPECT_EQ(survey.tables[2].species, "CS");
  EXPECT_EQ(survey.tables[2].source, "Lantern 4");
  EXPECT_EQ(survey.species, (std::vector<std::string>{"CO", "plans/own/thing.yaml"}));
  EXPECT_EQ(survey.defaults.background_k, 0.0);
  EXPECT_EQ(survey.defaults.without_lines, (std::vector<std::string>{"1-0", "2-1"}));
  EXPECT_EQ(survey.exceptions.size(), 2u);
  EXPECT_EQ(survey.outputs.tables, (std::vector<std::string>{"ecsv", "latex"}));
  EXPECT_EQ(survey.outputs.folders, (std::vector<std::string>{"result", "lines"}));
  EXPECT_FALSE(survey.outputs.figures);
}

TEST(SurveyDescription, LaterExceptionsWinOverEarlierOnesAndOverDefaults) {
  const CheckedSurvey checked = parsed(R"(
tables: a.csv
species: [CO, CS]
defaults: {temperature: 10 K}
exceptions:
  - {sources: "Reef *", temperature: 20 K}
  - {sources: "Reef 7", species: cs, temperature: 30 K}
)");
  ASSERT_THAT(messages(checked), ::testing::IsEmpty());
  EXPECT_EQ(options_for(checked.survey, "Lantern", {"CO"}).temperature_k, 10.0);
  EXPECT_EQ(options_for(checked.survey, "Reef 7", {"CO"}).temperature_k, 20.0);
  EXPECT_EQ(options_for(checked.survey, "Reef 7", {"CS"}).temperature_k, 30.0);
  EXPECT_EQ(options_for(checked.survey, "Reef 7", {"CS"}).source, "Reef 7");
}

TEST(SurveyDescription, EveryRunOptionButTheSourceCanBeADefaultAndAnException) {
  for (const RunOption& option : run_option_table()) {
    if (option.key == "source") continue;
    const std::string text = fmt::format(
        "tables: a.csv\nspecies: CO\ndefaults: {{{0}: \"{1}\"}}\n"
        "exceptions: [{{sources: A, {0}: \"{1}\"}}]\n",
        option.key, option.example);
    EXPECT_THAT(messages(parsed(text)), ::testing::IsEmpty()) << text;
  }
}

TEST(SurveyDescription, PatternsKnowOnlyTheStar) {
  EXPECT_TRUE(fits_pattern("", "*"));
  EXPECT_TRUE(fits_pattern("", ""));
  EXPECT_FALSE(fits_pattern("", "a"));
  EXPECT_TRUE(fits_pattern("Reef 12", "Reef *"));
  EXPECT_TRUE(fits_pattern("abcabd", "*abd"));
  EXPECT_TRUE(fits_pattern("a[b]?", "a[b]?"));
  EXPECT_FALSE(fits_pattern("axb", "a?b"));
  EXPECT_TRUE(fits_pattern("x*y", "x*y"));
  EXPECT_FALSE(
      fits_pattern(std::string(20000, 'a') + "b", "*a*a*a*a*a*a*a*a*a*c"));  // must not take for ever
}

TEST(SurveyDescription, TellsAllErrorsAtOnceEachWithItsPlace) {
  const CheckedSurvey checked = parsed(
      "tabels: a.csv\n"
      "species: [CO, co]\n"
      "defaults:\n"
      "  backgroud: 2.7 K\n"
      "  source_size: 12\n"
      "  source_size: 12 arcsec\n"
      "exceptions:\n"
      "  - sources: A\n"
      "    temperature: warm\n"
      "  - temperature: 20 K\n"
      "outputs:\n"
      "  tables: [ecsv, docx]\n"
      "  page: perhaps\n");
  const std::vector<std::string> texts = messages(checked);
  ASSERT_EQ(texts.size(), 10u) << ::testing::PrintToString(texts);
  EXPECT_THAT(texts[0], HasSubstr("'tables' is missing"));
  EXPECT_THAT(texts[1], ::testing::StartsWith("plans/survey.yaml:1:1: 'tabels'"));
  EXPECT_THAT(texts[1], HasSubstr("did you mean 'tables'?"));
  EXPECT_THAT(texts[2], HasSubstr("survey.yaml:2:"));
  EXPECT_THAT(texts[3], HasSubstr("survey.yaml:4:3"));
  EXPECT_THAT(texts[3], HasSubstr("background"));
  EXPECT_THAT(texts[4], HasSubstr("survey.yaml:5:16"));
  EXPECT_THAT(texts[5], HasSubstr("survey.yaml:6:3: 'source_size' is given twice"));
  EXPECT_THAT(texts[6], HasSubstr("survey.yaml:9:18"));
  EXPECT_THAT(texts[7], HasSubstr("survey.yaml:10:5: this exception names neither"));
  EXPECT_THAT(texts[8], HasSubstr("'docx'"));
  EXPECT_THAT(texts[9], HasSubstr("survey.yaml:13:9"));
}

struct Hostile {
  const char* name;
  std::string text;
  std::size_t least_errors;
  std::string fragment;
  friend void PrintTo(const Hostile& hostile, std::ostream* out) { *out << hostile.name; }
};

const std::string kGood = "tables: a.csv\nspecies: CO\n";

std::vector<Hostile> hostile_files() {
  return {
      {"Empty", "", 1, "no survey description"},
      {"OnlyAComment", "# nothing\n", 1, "no survey description"},
      {"OnlyAScalar", "hello", 1, "no survey description"},
      {"OnlyAList", "[tables, species]", 1, "no survey description"},
      {"OnlyANumber", "42", 1, "no survey description"},
      {"EmptyMapping", "{}", 2, "'tables' is missing"},
      {"Nul", std::string("tables: a\0b\n", 12), 1, "UTF-8"},
      {"NotUtf8", "tables: \xff\xfe\n", 1, "UTF-8"},
      {"OverlongUtf8", "tables: \xc0\xaf\n", 1, "UTF-8"},
      {"Binary",
       std::string("\x7f"
                   "ELF\x02\x01\x01") +
           std::string(200, '\0'),
       1, "UTF-8"},
      {"TabIndent", "tables:\n\t- a.csv\nspecies: CO\n", 1, "YAML"},
      {"OpenBracket", "tables: [a.csv\nspecies: CO\n", 1, "YAML"},
      // The YAML library closes the quotation mark at the end of the file, so all that follows is one path.
      {"OpenQuote", "tables: \"a.csv\nspecies: CO\n", 1, "'species' is missing"},
      {"OpenBrace", "tables: {files: a.csv\n", 1, "YAML"},
      {"UndefinedAlias", "tables: *nowhere\nspecies: CO\n", 1, "YAML"},
      {"DeepNesting", "tables: " + std::string(100000, '[') + "\n", 1, "YAML"},
      {"DeepMapping",
       [] {
         std::string t;
         for (int i = 0; i < 5000; ++i) t += "{a: ";
         return t;
       }(),
       1, "YAML"},
      {"BadEscape", "tables: \"\\q\"\nspecies: CO\n", 1, "YAML"},
      {"TwoDocuments", kGood + "---\n" + kGood, 1, "second YAML document"},
      {"MergeKey", "x: &x {method: line}\n" + kGood + "defaults: {<<: *x}\n", 2, "'<<'"},
      {"KeyIsAList", kGood + "? [a, b]\n: c\n", 1, "no plain text"},
      {"KeyIsNull", kGood + "~: c\n", 1, "no plain text"},
      {"KeyIsEmpty", kGood + "\"\": c\n", 1, "no plain text"},
      {"KeyTwice", kGood + "species: CS\n", 1, "given twice"},
      {"KeyWithControls", kGood + "\"a\\x1b[31m\\nb\": c\n", 1, "no key"},
      {"LongKey", kGood + std::string(900, 'k') + ": c\n", 1, "no key"},
      {"WrongCase", "Tables: a.csv\nspecies: CO\n", 2, "did you mean 'tables'"},
      {"TablesNull", "tables:\nspecies: CO\n", 1, "empty"},
      {"TablesEmptyText", "tables: \"\"\nspecies: CO\n", 1, "empty"},
      {"TablesEmptyList", "tables: []\nspecies: CO\n", 1, "empty"},
      {"TablesListOfLists", "tables: [[a.csv]]\nspecies: CO\n", 1, "a list stands in the list"},
      {"TablesStandardInput", "tables: \"-\"\nspecies: CO\n", 1, "standard input"},
      {"TablesMappingWithoutFiles", "tables: {species: CO}\nspecies: CO\n", 1, "no 'files'"},
      {"TablesUnknownKey", "tables: {file: a.csv}\nspecies: CO\n", 2, "did you mean 'files'"},
      {"TablesTwoSources", "tables: {files: a.csv, source: [A, B]}\nspecies: CO\n", 1, "list"},
      {"TablesSourceIsMapping", "tables: {files: a.csv, source: {a: b}}\nspecies: CO\n", 1, "no text"},
      {"SpeciesMissing", "tables: a.csv\n", 1, "'species' is missing"},
      {"SpeciesNull", "tables: a.csv\nspecies: ~\n", 1, "empty"},
      {"SpeciesMapping", "tables: a.csv\nspecies: {CO: yes}\n", 1, "no text"},
      {"SpeciesTwice", "tables: a.csv\nspecies: [CO, CS, co]\n", 1, "listed twice"},
      {"DefaultsNull", kGood + "defaults:\n", 1, "no mapping"},
      {"DefaultsText", kGood + "defaults: yes\n", 1, "no mapping"},
      {"DefaultsList", kGood + "defaults: [method, line]\n", 1, "no mapping"},
      {"DefaultUnknown", kGood + "defaults: {metod: line}\n", 1, "did you mean 'method'"},
      {"DefaultWithoutUnit", kGood + "defaults: {background: 2.7}\n", 1, "2.7"},
      {"DefaultWrongUnit", kGood + "defaults: {background: 2.7 km}\n", 1, "km"},
      {"DefaultNotFinite", kGood + "defaults: {background: .inf K}\n", 1, "background"},
      {"DefaultNegative", kGood + "defaults: {source_size: -3 arcsec}\n", 1, "above zero"},
      {"DefaultOverflow", kGood + "defaults: {source_size: 1e999 arcsec}\n", 1, "source_size"},
      {"DefaultIsMapping", kGood + "defaults: {background: {value: 3, unit: K}}\n", 1, "no text"},
      {"DefaultNull", kGood + "defaults: {background: }\n", 1, "empty"},
      {"DefaultUnknownMethod", kGood + "defaults: {method: lien}\n", 1, "did you mean 'line'"},
      {"DefaultSource", kGood + "defaults: {source: A}\n", 1, "cannot be set"},
      {"RangeBackwards", kGood + "defaults: {upper_energy: 300 K..10 K}\n", 1, "upper_energy"},
      {"ExceptionsMapping", kGood + "exceptions: {sources: A}\n", 1, "no list"},
      {"ExceptionIsText", kGood + "exceptions: [A]\n", 1, "no mapping"},
      {"ExceptionNull", kGood + "exceptions:\n  -\n", 1, "no mapping"},
      {"ExceptionForNobody", kGood + "exceptions: [{method: line}]\n", 1, "neither sources nor species"},
      {"ExceptionForNothing", kGood + "exceptions: [{sources: A}]\n", 1, "sets no option"},
      {"ExceptionForAnotherSpecies", kGood + "exceptions: [{species: C0, method: line}]\n", 1,
       "did you mean 'CO'"},
      {"ExceptionUnknownKey", kGood + "exceptions: [{source_: A, sources: B, method: line}]\n", 1,
       "no option"},
      {"OutputsList", kGood + "outputs: [ecsv]\n", 1, "no mapping"},
      {"OutputsUnknownKey", kGood + "outputs: {tabels: ecsv}\n", 1, "did you mean 'tables'"},
      {"OutputsUnknownFormat", kGood + "outputs: {tables: vottable}\n", 1, "did you mean 'votable'"},
      {"OutputsPageNumber", kGood + "outputs: {page: 2}\n", 1, "neither yes nor no"},
      {"OutputsFiguresNull", kGood + "outputs: {figures: }\n", 1, "neither yes nor no"},
  };
}

class HostileSurveyDescription : public ::testing::TestWithParam<Hostile> {};

TEST_P(HostileSurveyDescription, IsRefusedWithAWordThatHelps) {
  const CheckedSurvey checked = parsed(GetParam().text);
  ASSERT_GE(checked.errors.size(), GetParam().least_errors);
  bool found = false;
  for (const std::string& text : messages(checked)) {
    EXPECT_THAT(text, ::testing::StartsWith("plans/survey.yaml"));
    found = found || text.find(GetParam().fragment) != std::string::npos;
  }
  EXPECT_TRUE(found) << ::testing::PrintToString(messages(checked));
}

INSTANTIATE_TEST_SUITE_P(All, HostileSurveyDescription, ::testing::ValuesIn(hostile_files()),
                         [](const auto& tested) { return tested.param.name; });

TEST(SurveyDescription, SharedNodesAreNotUnfolded) {
  // Each line names the one before it ten times: unfolded it would be 10^9 texts.
  std::string text = "a0: &a0 [x, x, x, x, x, x, x, x, x, x]\n";
  for (int i = 1; i < 9; ++i) {
    text += fmt::format(
        "a{0}: &a{0} [*a{1}, *a{1}, *a{1}, *a{1}, *a{1}, *a{1}, *a{1}, *a{1}, *a{1}, *a{1}]\n", i, i - 1);
  }
  EXPECT_GE(parsed(text + "tables: *a8\nspecies: CO\n").errors.size(), 10u);
}

}  // namespace
}  // namespace trotline
