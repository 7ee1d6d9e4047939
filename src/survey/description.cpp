#include <fmt/format.h>

#include <algorithm>
#include <filesystem>

#include <trotline/base/files.hpp>
#include <trotline/base/text.hpp>
#include <trotline/survey/description.hpp>

#include "yaml_reader.hpp"

namespace trotline {
namespace {

constexpr std::size_t kLargestDescription = std::size_t{16} << 20;

std::string beside(const std::string& file, const std::string& path) {
  namespace fs = std::filesystem;
  return fs::path(path).is_absolute() ? path : (fs::path(file).parent_path() / path).string();
}

bool is_species_path(const std::string& name) {
  return name.find('/') != std::string::npos || name.ends_with(".yaml");
}

bool names_species(const std::vector<std::string>& wanted, const std::vector<std::string>& names) {
  return std::any_of(wanted.begin(), wanted.end(), [&](const std::string& one) {
    return std::any_of(names.begin(), names.end(),
                       [&](const std::string& name) { return lower_case(trimmed(one)) == lower_case(name); });
  });
}

class Reader {
 public:
  explicit Reader(const std::string& name) : complaints_(name) { survey_.file = name; }

  CheckedSurvey read(const std::string& text) {
    if (!is_utf8(text) || text.find('\0') != std::string::npos) {
      complaints_.add(Place{survey_.file}, {"this is no text in UTF-8", "a YAML mapping in UTF-8"});
      return {std::move(survey_), complaints_.take()};
    }
    try {
      const std::vector<YAML::Node> documents = YAML::LoadAll(text);
      if (documents.size() > 1) {
        complaints_.add(documents[1],
                        {"a second YAML document begins here", "one document, without '---' in it"});
      }
      read_root(documents.empty() ? YAML::Node() : documents.front());
    } catch (const YAML::Exception& error) {
      Place place{survey_.file};
      if (!error.mark.is_null()) {
        place.line = static_cast<std::size_t>(error.mark.line) + 1;
        place.column = static_cast<std::size_t>(error.mark.column) + 1;
      }
      complaints_.add(
          place, {"this is no valid YAML: " + printable(error.msg), "keys with values, as in 'key: value'"});
    }
    return {std::move(survey_), complaints_.take()};
  }

 private:
  void read_root(const YAML::Node& root) {
    static const std::vector<std::string> kKeys = {"tables",   "spectra",    "species",
                                                   "defaults", "exceptions", "outputs"};
    if (!root.IsMap()) {
      complaints_.add(Place{survey_.file, 1}, {"this is no survey description",
                                               "a YAML mapping with the keys 'tables' and 'species'"});
      return;
    }
    has_spectra_ = root["spectra"].IsDefined();
    for (const YamlEntry& entry : entries_of(root, "the survey description", complaints_)) {
      given_.push_back(entry.key);
      if (entry.key == "tables" || entry.key == "spectra")
        read_tables(entry);
      else if (entry.key == "species")
        read_species(entry);
      else if (entry.key == "defaults")
        read_defaults(entry);
      else if (entry.key == "exceptions")
        read_exceptions(entry);
      else if (entry.key == "outputs")
        read_outputs(entry);
      else
        complain_of_key(entry, "a survey description", kKeys, complaints_);
    }
    if (!has_spectra_) require("tables", "the tables to read, as in 'tables: lines/*.csv', or 'spectra'");
    require("species", "the species to analyse, as in 'species: [CO, 13CO]'");
    check_species_of_exceptions();
  }

  /// An exception for a species that the survey does not have is a slip of the pen.
  void check_species_of_exceptions() {
    std::vector<std::string> names = survey_.species;
    for (const std::string& name : survey_.species) {
      if (is_species_path(name)) names.push_back(std::filesystem::path(name).stem().string());
    }
    for (const SurveyException& exception : survey_.exceptions) {
      for (const std::string& name : exception.species) {
        if (survey_.species.empty() || names_species({name}, names)) continue;
        complaints_.add(exception.place,
                        {fmt::format("an exception for the species '{}'", printable(name)),
                         "a species of the survey: " + listed(names), did_you_mean(name, names)});
      }
    }
  }

  void require(const std::string& key, const std::string& expected) {
    if (std::find(given_.begin(), given_.end(), key) != given_.end()) return;
    complaints_.add(Place{survey_.file}, {fmt::format("'{}' is missing", key), expected});
  }

  void add_pattern(const std::string& pattern, SurveyTables tables) {
    if (pattern == "-") {
      complaints_.add(tables.place,
                      {"'-' stands for standard input, which cannot be read again", "the path of a file"});
      return;
    }
    tables.pattern = beside(survey_.file, pattern);
    survey_.tables.push_back(std::move(tables));
  }

  void read_tables(const YamlEntry& entry) {
    if (entry.value.IsMap()) {
      read_table_mapping(entry, entry.value);
    } else if (entry.value.IsSequence() && entry.value.size() > 0) {
      for (const YAML::Node& item : entry.value) {
        if (item.IsMap())
          read_table_mapping(entry, item);
        else if (item.IsSequence())
          complaints_.add(item, {fmt::format("a list stands in the list '{}'", entry.key), "a text or a mapping"});
        else
          read_plain_table({entry.key, item, complaints_.place_of(item)});
      }
    } else {
      read_plain_table(entry);
    }
  }

  void read_plain_table(const YamlEntry& entry) {
    for (const std::string& pattern : texts_of(entry, complaints_)) {
      add_pattern(pattern, {{}, {}, {}, complaints_.place_of(entry.value), entry.key == "spectra"});
    }
  }

  void read_table_mapping(const YamlEntry& list, const YAML::Node& node) {
    static const std::vector<std::string> kKeys = {"files", "species", "source"};
    SurveyTables tables{{}, {}, {}, complaints_.place_of(node), list.key == "spectra"};
    std::vector<std::string> files;
    bool has_files = false;
    const std::string where = fmt::format("an entry of '{}'", list.key);
    for (const YamlEntry& entry : entries_of(node, where, complaints_)) {
      if (entry.key == "files") {
        has_files = true;
        files = texts_of(entry, complaints_);
      } else if (entry.key == "species" || entry.key == "source") {
        (entry.key == "species" ? tables.species : tables.source) = one_text(entry);
      } else if (tables.is_spectra) {
        const auto value = value_of(entry);
        if (value && set_measuring(entry, *value)) tables.measuring.emplace_back(entry.key, *value);
      } else {
        complain_of_key(entry, where, kKeys, complaints_);
      }
    }
    if (!has_files)
      complaints_.add(node, {fmt::format("this entry of '{}' has no 'files'", list.key),
                             tables.is_spectra ? "'files: spectra/*.fits' in it" : "'files: lines/*.csv' in it"});
    for (const std::string& pattern : files) add_pattern(pattern, tables);
  }

  std::optional<std::string> one_text(const YamlEntry& entry) {
    const std::vector<std::string> texts = texts_of(entry, complaints_);
    if (texts.empty()) return std::nullopt;
    if (texts.size() > 1)
      complaints_.add(entry.place, {fmt::format("'{}' holds a list", entry.key), "one text"});
    return texts.front();
  }

  void read_species(const YamlEntry& entry) {
    for (const std::string& text : texts_of(entry, complaints_)) {
      const std::string name(trimmed(text));
      const bool again =
          std::any_of(survey_.species.begin(), survey_.species.end(),
                      [&](const std::string& other) { return lower_case(other) == lower_case(name); });
      if (again) {
        complaints_.add(entry.value,
                        {fmt::format("the species '{}' is listed twice", printable(name)), "each once"});
      } else {
        survey_.species.push_back(is_species_path(name) ? beside(survey_.file, name) : name);
      }
    }
  }

  /// The value of a run option: a text, or a list of texts joined by commas.
  std::optional<std::string> value_of(const YamlEntry& entry) {
    const std::vector<std::string> texts = texts_of(entry, complaints_);
    if (texts.empty()) return std::nullopt;
    std::string joined;
    for (const std::string& text : texts) joined += (joined.empty() ? "" : ", ") + text;
    return joined;
  }

  /// Sets one run option on `options`; false, with a complaint, where it cannot be.
  bool set_option(const YamlEntry& entry, const std::string& value, RunOptions& options) {
    if (entry.key == "source") {
      complaints_.add(entry.place,
                      {"'source' cannot be set for a survey", "the sources as the tables name them",
                       "to name the source of a table that names none, write it in 'tables'"});
      return false;
    }
    try {
      set_run_option(options, entry.key, value);
      return true;
    } catch (const InputError& error) {
      complaints_.add(is_option(entry.key) ? value_place(entry) : entry.place, error.complaint());
      return false;
    }
  }

  /// Tries one option of measuring; false, with a complaint, where it cannot be set.
  bool set_measuring(const YamlEntry& entry, const std::string& value) {
    MeasureDescription scratch;
    scratch.inputs.resize(1);
    try {
      set_measure_option(scratch, entry.key, value);
      return true;
    } catch (const InputError& error) {
      complaints_.add(is_measuring(entry.key) ? value_place(entry) : entry.place, error.complaint());
      return false;
    }
  }

  /// Sets an option where it belongs: to the fits, to the measuring of spectra, or to both.
  void set_for_both(const YamlEntry& entry, const std::string& value, RunOptions& options, Settings* settings,
                    Settings& measuring) {
    const bool measures = has_spectra_ && is_measuring(entry.key);
    if (measures && set_measuring(entry, value)) measuring.emplace_back(entry.key, value);
    if (measures && !is_option(entry.key)) return;
    if (set_option(entry, value, options) && settings != nullptr) settings->emplace_back(entry.key, value);
  }

  static bool is_measuring(const std::string& key) {
    const auto& table = measure_option_table();
    return std::any_of(table.begin(), table.end(),
                       [&](const MeasureOption& option) { return option.key == key; });
  }

  [[nodiscard]] Place value_place(const YamlEntry& entry) const {
    return entry.value.Mark().is_null() ? entry.place : complaints_.place_of(entry.value);
  }

  static bool is_option(const std::string& key) {
    const auto& table = run_option_table();
    return std::any_of(table.begin(), table.end(),
                       [&](const RunOption& option) { return option.key == key; });
  }

  void read_defaults(const YamlEntry& defaults) {
    for (const YamlEntry& entry : entries_of(defaults.value, "'defaults'", complaints_)) {
      if (const auto value = value_of(entry))
        set_for_both(entry, *value, survey_.defaults, nullptr, survey_.measuring);
    }
  }

  void read_exceptions(const YamlEntry& exceptions) {
    if (!exceptions.value.IsSequence()) {
      complaints_.add(exceptions.place, {"'exceptions' is no list", "entries that begin with '- '"});
      return;
    }
    for (const YAML::Node& item : exceptions.value) read_exception(item);
  }

  void read_exception(const YAML::Node& node) {
    SurveyException exception{{}, {}, {}, complaints_.place_of(node)};
    RunOptions scratch;
    bool chosen = false;
    const std::size_t errors_before = complaints_.count();
    for (const YamlEntry& entry : entries_of(node, "an exception", complaints_)) {
      if (entry.key == "sources" || entry.key == "species") {
        chosen = true;
        (entry.key == "sources" ? exception.sources : exception.species) = texts_of(entry, complaints_);
      } else if (const auto value = value_of(entry)) {
        set_for_both(entry, *value, scratch, &exception.settings, exception.measuring);
      }
    }
    if (complaints_.count() == errors_before) complain_of_nothing(node, exception, chosen);
    survey_.exceptions.push_back(std::move(exception));
  }

  void complain_of_nothing(const YAML::Node& node, const SurveyException& exception, bool chosen) {
    if (!chosen) {
      complaints_.add(node, {"this exception names neither sources nor species",
                             "'sources:' or 'species:' in it", "what holds for all belongs in 'defaults'"});
    } else if (exception.settings.empty() && exception.measuring.empty()) {
      complaints_.add(node,
                      {"this exception sets no option", "a run option in it, as in 'source_size: 8 arcsec'"});
    }
  }

  void read_outputs(const YamlEntry& outputs) {
    static const std::vector<std::string> kKeys = {"tables", "figures", "page", "folders"};
    for (const YamlEntry& entry : entries_of(outputs.value, "'outputs'", complaints_)) {
      if (entry.key == "tables")
        survey_.outputs.tables = choices(entry, kTableFormats);
      else if (entry.key == "folders")
        survey_.outputs.folders = choices(entry, kFolderContents);
      else if (entry.key == "figures")
        survey_.outputs.figures = yes_or_no(entry);
      else if (entry.key == "page")
        survey_.outputs.page = yes_or_no(entry);
      else
        complain_of_key(entry, "'outputs'", kKeys, complaints_);
    }
  }

  /// Some of `known`, in their order; "none" for none of them.
  std::vector<std::string> choices(const YamlEntry& entry, const std::vector<std::string>& known) {
    const std::vector<std::string> words = texts_of(entry, complaints_);
    if (words.size() == 1 && lower_case(trimmed(words.front())) == "none") return {};
    std::vector<std::string> chosen;
    for (const std::string& text : words) {
      const std::string word = lower_case(trimmed(text));
      if (std::find(known.begin(), known.end(), word) == known.end()) {
        complaints_.add(value_place(entry),
                        {fmt::format("'{}' holds '{}'", entry.key, printable(text)),
                         "some of " + listed(known) + ", or none", did_you_mean(word, known)});
      }
      chosen.push_back(word);
    }
    std::vector<std::string> sorted;
    std::copy_if(known.begin(), known.end(), std::back_inserter(sorted), [&](const std::string& word) {
      return std::find(chosen.begin(), chosen.end(), word) != chosen.end();
    });
    return sorted;
  }

  bool yes_or_no(const YamlEntry& entry) {
    const std::string word = entry.value.IsScalar() ? lower_case(trimmed(entry.value.Scalar())) : "";
    if (word == "yes" || word == "true") return true;
    if (word != "no" && word != "false") {
      complaints_.add(value_place(entry),
                      {fmt::format("'{}' is neither yes nor no", entry.key), "'yes' or 'no'"});
    }
    return false;
  }

  SurveyDescription survey_;
  YamlComplaints complaints_;
  std::vector<std::string> given_;
  bool has_spectra_ = false;
};

}  // namespace

CheckedSurvey read_survey_description(const std::string& path) {
  return parse_survey_description(read_file(path, kLargestDescription), path);
}

CheckedSurvey parse_survey_description(const std::string& text, const std::string& name) {
  return Reader(name).read(text);
}

bool fits_pattern(const std::string& name, const std::string& pattern) {
  // Greedy with one step back to the last star: linear for the patterns that people write, never exponential.
  std::size_t n = 0, p = 0, star = std::string::npos, resume = 0;
  while (n < name.size()) {
    if (p < pattern.size() && pattern[p] == '*') {
      star = p++;
      resume = n;
    } else if (p < pattern.size() && pattern[p] == name[n]) {
      ++p;
      ++n;
    } else if (star != std::string::npos) {
      p = star + 1;
      n = ++resume;
    } else {
      return false;
    }
  }
  return pattern.find_first_not_of('*', p) == std::string::npos;
}

bool applies(const SurveyException& exception, const std::string& source,
             const std::vector<std::string>& species_names) {
  const auto fits = [&](const std::string& pattern) { return fits_pattern(source, pattern); };
  const bool of_source =
      exception.sources.empty() || std::any_of(exception.sources.begin(), exception.sources.end(), fits);
  return of_source && (exception.species.empty() || names_species(exception.species, species_names));
}

RunOptions options_for(const SurveyDescription& survey, const std::string& source,
                       const std::vector<std::string>& species_names) {
  RunOptions options = survey.defaults;
  for (const SurveyException& exception : survey.exceptions) {
    if (!applies(exception, source, species_names)) continue;
    for (const auto& [key, value] : exception.settings) set_run_option(options, key, value);
  }
  options.source = source;
  return options;
}

MeasureDescription measuring_for(const SurveyDescription& survey, const SurveyTables& spectra,
                                 const std::string& source, const std::vector<std::string>& species_names) {
  MeasureDescription measuring;
  measuring.inputs.resize(1);  // takes the options of files; the paths come later
  const auto set_all = [&](const Settings& settings) {
    for (const auto& [key, value] : settings) set_measure_option(measuring, key, value);
  };
  set_all(survey.measuring);
  set_all(spectra.measuring);
  for (const SurveyException& exception : survey.exceptions) {
    if (applies(exception, source, species_names)) set_all(exception.measuring);
  }
  return measuring;
}

}  // namespace trotline
