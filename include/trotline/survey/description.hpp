#pragma once

#include <optional>
#include <string>
#include <utility>
#include <vector>

#include <trotline/analysis/measure_description.hpp>
#include <trotline/analysis/run_options.hpp>
#include <trotline/base/errors.hpp>

namespace trotline {

/// Options as a person writes them: keys and values, each found valid.
using Settings = std::vector<std::pair<std::string, std::string>>;

/// Tables that a survey reads, or spectra that it measures, and what is known of all of them.
struct SurveyTables {
  std::string pattern;  ///< path, perhaps with `*`, `?` and `[...]`; relative ones are resolved
  std::optional<std::string> species;  ///< for rows that name none
  std::optional<std::string> source;   ///< for rows that name none
  Place place;
  bool is_spectra = false;  ///< each file is of one source, by `source` or the file's name
  Settings measuring = {};  ///< of spectra: options of `trotline measure`
};

/// Some run options for some sources or species.
struct SurveyException {
  std::vector<std::string> sources;  ///< names, `*` for any text; empty: every source
  std::vector<std::string> species;  ///< names in any case; empty: every species
  Settings settings;                 ///< run options
  Place place;
  Settings measuring = {};  ///< options of `trotline measure`, for spectra
};

/// What a survey writes beside its ledger.
struct SurveyOutputs {
  std::vector<std::string> tables = {"ecsv"};  ///< of kTableFormats
  bool figures = true;                         ///< figures over all sources
  bool page = true;                            ///< the report, report.html
  std::vector<std::string> folders;  ///< in each source's folder, of kFolderContents; empty: no folders
};

inline const std::vector<std::string> kTableFormats = {"ecsv", "csv", "fits", "votable", "latex"};
inline const std::vector<std::string> kFolderContents = {"result", "lines", "diagram"};

/// A survey as a person describes it.
struct SurveyDescription {
  std::string file;
  std::vector<SurveyTables> tables;
  std::vector<std::string> species;  ///< names, or paths of species files (resolved)
  RunOptions defaults;
  Settings measuring = {};  ///< options of `trotline measure` for all spectra
  std::vector<SurveyException> exceptions;
  SurveyOutputs outputs;
};

/// A description with everything that is wrong with it, in the order of the text.
struct CheckedSurvey {
  SurveyDescription survey;  ///< to be used only where `errors` is empty
  std::vector<InputError> errors;
};

/// Reads a survey description, a YAML mapping (docs/survey.md):
///
///     tables: lines/*.csv                  # a path, a list of paths, or {files:, species:, source:}
///     species: [CO, 13CO]
///     defaults: {method: line, background: 2.7255 K}
///     exceptions:
///       - {sources: [Lantern 4, "Reef *"], species: CO, source_size: 8 arcsec}
///     outputs: {tables: [ecsv, fits], figures: yes, page: yes, folders: [result, lines]}
///
/// Instead of tables, or beside them, `spectra` names files of spectra that are measured first, with options of
/// `trotline measure` there, in the defaults and in exceptions; a key that both verbs know serves both.
/// All errors are collected, each with its line and column: unknown keys (with the nearest known one), keys
/// given twice, values that are wrong, `tables` or `species` missing. A text that is no YAML is one error.
/// @throws InputError  only when the file cannot be read
[[nodiscard]] CheckedSurvey read_survey_description(const std::string& path);

/// The same from text. @param name  stands for the file in messages; paths are taken from its folder
[[nodiscard]] CheckedSurvey parse_survey_description(const std::string& text, const std::string& name);

/// True when `name` fits `pattern`, in which `*` stands for any text and every other byte for itself.
[[nodiscard]] bool fits_pattern(const std::string& name, const std::string& pattern);

/// True when the exception is for this source and species.
/// @param species_names  the names by which the species goes (as in the description, name, formula)
[[nodiscard]] bool applies(const SurveyException& exception, const std::string& source,
                           const std::vector<std::string>& species_names);

/// The options for one source and species: the defaults, then each exception that fits, later ones winning.
[[nodiscard]] RunOptions options_for(const SurveyDescription& survey, const std::string& source,
                                     const std::vector<std::string>& species_names);

/// How the spectra of an entry are measured: the defaults, the entry, each exception that fits; later ones win.
[[nodiscard]] MeasureDescription measuring_for(const SurveyDescription& survey, const SurveyTables& spectra,
                                               const std::string& source,
                                               const std::vector<std::string>& species_names);

}  // namespace trotline
