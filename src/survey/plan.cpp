#include <fmt/format.h>

#include <algorithm>
#include <filesystem>
#include <unordered_map>

#include <trotline/base/files.hpp>
#include <trotline/base/text.hpp>
#include <trotline/base/version.hpp>
#include <trotline/survey/plan.hpp>

#include "table_files.hpp"

namespace trotline {
namespace {

/// Names by which each species goes, to find it from a row and from an exception.
class SpeciesNames {
 public:
  void add(const std::string& as_listed, const Species& species) {
    const std::uint32_t index = static_cast<std::uint32_t>(names_.size());
    names_.push_back(
        {as_listed, std::filesystem::path(as_listed).stem().string(), species.name, species.formula});
    for (const std::string& name : names_.back()) index_.emplace(lower_case(name), index);
  }

  [[nodiscard]] const std::vector<std::string>& of(std::uint32_t species) const { return names_[species]; }

  [[nodiscard]] std::optional<std::uint32_t> find(const std::string& name) const {
    const auto found = index_.find(lower_case(trimmed(name)));
    return found == index_.end() ? std::nullopt : std::optional(found->second);
  }

 private:
  std::vector<std::vector<std::string>> names_;
  std::unordered_map<std::string, std::uint32_t> index_;
};

std::string options_text(const RunOptions& options) {
  std::string text;
  for (const auto& [key, value] : shown(options)) {
    if (key != "source") text += fmt::format("{}: {}\n", key, value);
  }
  return text;
}

/// Which option differs, for the reason of a job.
std::string difference(const std::string& before, const std::string& now) {
  const auto lines_of = [](const std::string& text) {
    std::map<std::string, std::string> lines;
    for (std::size_t start = 0; start < text.size();) {
      const std::size_t end = std::min(text.find('\n', start), text.size());
      const std::string line = text.substr(start, end - start);
      const std::size_t colon = std::min(line.find(": "), line.size());
      lines[line.substr(0, colon)] = line.substr(std::min(colon + 2, line.size()));
      start = end + 1;
    }
    return lines;
  };
  const auto old_lines = lines_of(before);
  std::vector<std::string> keys;
  for (const auto& [key, value] : lines_of(now)) {
    const auto old = old_lines.find(key);
    if (old == old_lines.end() || old->second != value) keys.push_back(key);
  }
  return keys.empty() ? "options have changed" : "options have changed: " + listed(keys, 4);
}

std::string why_changed(const JobMemory& memory, const JobStamp& now, const char* input) {
  const JobStamp& before = memory.stamp;
  if (before.input_fingerprint != now.input_fingerprint) return fmt::format("its {} have changed", input);
  if (before.options != now.options) return difference(before.options, now.options);
  if (before.species_fingerprint != now.species_fingerprint) return "the species' data have changed";
  if (before.version != now.version) return fmt::format("computed by version {}", before.version);
  if (before.table_file != now.table_file || before.table_lines != now.table_lines)
    return fmt::format("its {} stand elsewhere", input);
  return memory.again ? "failed by a fault before" : "";
}

std::string lines_of(const TablePart& part) {
  const std::string span = fmt::format("{}-{}", part.first_line, part.last_line);
  return part.gaps.empty() ? span : span + " #" + part.gaps;
}

class Planner {
 public:
  Planner(const SurveyDescription& survey, Ledger* ledger, const PlanRequest& request)
      : ledger_(ledger), request_(request) {
    result_.plan.survey = survey;
  }

  PlannedSurvey plan() {
    load_species();
    TableFiles files = table_files_of(result_.plan.survey);
    for (InputError& error : files.errors) result_.errors.push_back(std::move(error));
    if (!result_.errors.empty()) return std::move(result_);
    for (const TableFile& file : files.files) read_table(file);
    for (std::size_t i = 0; i < result_.plan.jobs.size(); ++i) settle(result_.plan.jobs[i], i);
    warn_of_passed_rows();
    warn_of_idle_exceptions();
    warn_of_idle_requests();
    return std::move(result_);
  }

 private:
  SurveyPlan& plan_() { return result_.plan; }

  void load_species() {
    for (const std::string& name : plan_().survey.species) {
      try {
        plan_().species.push_back(std::make_shared<const Species>(request_.find_species(name)));
        refuse_same_name(name);
        names_.add(name, *plan_().species.back());
      } catch (const InputError& error) {
        const bool has_place = !error.place().file.empty();
        result_.errors.emplace_back(has_place ? error.place() : Place{plan_().survey.file},
                                    error.complaint());
      }
    }
  }

  /// The ledger tells species apart by their name.
  void refuse_same_name(const std::string& as_listed) {
    const auto& species = plan_().species;
    const std::string& name = species.back()->name;
    if (std::any_of(species.begin(), species.end() - 1,
                    [&](const auto& other) { return other->name == name; })) {
      result_.errors.emplace_back(Place{plan_().survey.file},
                                  Complaint{fmt::format("'{}' is the species {}, which is listed before it",
                                                        printable(as_listed), name),
                                            "each species once"});
    }
  }

  void read_table(const TableFile& file) {
    try {
      if (file.entry->is_spectra) return add_spectra(file);
      DividedTable table(file.path);
      const auto index = static_cast<std::uint32_t>(plan_().tables.size());
      plan_().tables.push_back(std::move(table));
      add_jobs(index, file);
    } catch (const InputError& error) {
      plan_().unread_tables.push_back({file.path, error.what()});
    }
  }

  void add_jobs(std::uint32_t table, const TableFile& file) {
    const std::vector<TablePart>& parts = plan_().tables[table].parts();
    const bool names_sources =
        std::any_of(parts.begin(), parts.end(), [](const TablePart& p) { return p.source.has_value(); });
    for (std::uint32_t i = 0; i < parts.size(); ++i) {
      const auto species = species_of(parts[i], *file.entry);
      if (!species) continue;
      const std::string stem = std::filesystem::path(file.path).stem().string();
      PlannedJob job;
      job.source = parts[i].source.value_or(file.entry->source.value_or(stem));
      job.table = table;
      job.species = species->index;
      job.parts = {i};
      job.problem = species->problem;
      if (!parts[i].source && names_sources && !file.entry->source) {
        job.problem = fmt::format(
            "{}:{}: the row names no source, and other rows of the table do; expected a source "
            "in every row",
            file.path, parts[i].first_line);
      }
      add_job(std::move(job));
    }
  }

  /// A job for every species that may be looked for; whether its lines are there, measuring will tell.
  void add_spectra(const TableFile& file) {
    const auto index = static_cast<std::uint32_t>(plan_().spectra.size());
    const auto entry = static_cast<std::uint32_t>(file.entry - plan_().survey.tables.data());
    plan_().spectra.push_back({file.path, fingerprint(read_file(file.path)), entry});
    const auto only = file.entry->species ? names_.find(*file.entry->species) : std::nullopt;
    if (file.entry->species && !only) passed_rows_[*file.entry->species] += 1;
    for (std::uint32_t species = 0; species < plan_().species.size(); ++species) {
      if (file.entry->species && only != species) continue;
      PlannedJob job;
      job.source = file.entry->source.value_or(source_named_by(file.path));
      job.species = species;
      job.spectra = {index};
      add_job(std::move(job));
    }
  }

  /// "Fen 3" of "spectra/Fen 3.fits.gz".
  static std::string source_named_by(const std::string& path) {
    const std::filesystem::path name = std::filesystem::path(path).filename();
    return name.extension() == ".gz" ? name.stem().stem().string() : name.stem().string();
  }

  struct SpeciesOfPart {
    std::uint32_t index = 0;
    std::string problem;
  };

  /// Nothing where the survey does not ask for the species.
  std::optional<SpeciesOfPart> species_of(const TablePart& part, const SurveyTables& entry) {
    const auto name = part.species ? part.species : entry.species;
    if (name) {
      if (const auto index = names_.find(*name)) return SpeciesOfPart{*index, {}};
      passed_rows_[*name] += part.rows;
      return std::nullopt;
    }
    if (plan_().species.size() == 1) return SpeciesOfPart{0, {}};
    return SpeciesOfPart{
        0, fmt::format("the rows name no species, and the survey has {}; expected a column 'species', "
                       "or 'species:' in this entry of 'tables'",
                       plan_().species.size())};
  }

  void add_job(PlannedJob job) {
    const std::string key = fmt::format("{}:{}", job.species, job.source);
    const auto [place, is_new] = index_.emplace(key, plan_().jobs.size());
    if (is_new) {
      plan_().jobs.push_back(std::move(job));
      return;
    }
    PlannedJob& first = plan_().jobs[place->second];
    if (!first.spectra.empty() && !job.spectra.empty()) {
      first.spectra.push_back(job.spectra.front());
      if (plan_().spectra[first.spectra.front()].entry != plan_().spectra[job.spectra.front()].entry)
        first.problem = "its spectra stand in several entries of 'spectra'; expected one, with a list of files";
    } else if (first.spectra.empty() != job.spectra.empty()) {
      first.problem = "it has rows in a table and spectra; expected one of them for a source and species";
    } else if (first.table == job.table) {
      first.parts.insert(first.parts.end(), job.parts.begin(), job.parts.end());
      if (first.problem.empty()) first.problem = job.problem;
    } else {
      first.problem =
          fmt::format("its rows stand in two tables: {} and {}; expected one table for a source and species",
                      plan_().tables[first.table].path(), plan_().tables[job.table].path());
    }
  }

  /// Chooses the options of a job and finds out whether it must be computed.
  void settle(PlannedJob& job, std::size_t position) {
    job.options = option_set(job);
    const std::string& species = plan_().species[job.species]->name;
    const auto memory = ledger_ != nullptr ? ledger_->recall(job.source, species) : std::nullopt;
    if (!memory) {
      job.reason = "new";
    } else {
      job.reason = why_changed(*memory, stamp_of(plan_(), job), job.spectra.empty() ? "rows" : "spectra");
      job.moved = memory->position != static_cast<std::int64_t>(position);
    }
    for (std::size_t i = 0; i < request_.again.size(); ++i) {
      if (!fits_pattern(job.source, request_.again[i])) continue;
      if (job.reason.empty()) job.reason = "asked for";
      used_requests_.resize(request_.again.size());
      used_requests_[i] = true;
    }
    if (job.reason.empty()) return;
    ++plan_().to_compute;
    if (!memory) return;
    ++plan_().last_known;
    plan_().last_seconds += memory->seconds;
  }

  std::uint32_t option_set(const PlannedJob& job) {
    const auto& exceptions = plan_().survey.exceptions;
    used_exceptions_.resize(exceptions.size());
    std::vector<bool> chosen(exceptions.size());
    for (std::size_t i = 0; i < exceptions.size(); ++i) {
      chosen[i] = applies(exceptions[i], job.source, names_.of(job.species));
      if (chosen[i]) used_exceptions_[i] = true;
    }
    const SurveyTables* spectra =
        job.spectra.empty() ? nullptr : &plan_().survey.tables[plan_().spectra[job.spectra.front()].entry];
    const auto [place, is_new] = option_index_.emplace(
        std::pair(chosen, spectra), static_cast<std::uint32_t>(plan_().option_sets.size()));
    if (is_new) {
      RunOptions options = options_for(plan_().survey, job.source, names_.of(job.species));
      options.source.reset();
      plan_().option_sets.push_back({options, options_text(options)});
      if (spectra != nullptr) add_measuring(plan_().option_sets.back(), job, *spectra);
    }
    return place->second;
  }

  void add_measuring(OptionSet& set, const PlannedJob& job, const SurveyTables& spectra) {
    set.measuring = measuring_for(plan_().survey, spectra, job.source, names_.of(job.species));
    for (const auto& [key, value] : shown(*set.measuring)) set.text += fmt::format("measure {}: {}\n", key, value);
    for (const std::string& name : set.measuring->other_species) {
      set.confusion.species.push_back(request_.find_species(name));
    }
    set.confusion.local_oscillator_hz = set.measuring->local_oscillator_hz;
  }

  void warn_of_passed_rows() {
    for (const auto& [name, rows] : passed_rows_) {
      std::vector<std::string> known;
      for (const auto& species : plan_().species) known.push_back(species->name);
      const std::string guess = did_you_mean(name, known);
      plan_().warnings.push_back(
          fmt::format("{} rows of '{}' were passed over: the survey does not list this species{}", rows,
                      printable(name), guess.empty() ? "" : "; " + guess));
    }
  }

  void warn_of_idle_exceptions() {
    used_exceptions_.resize(plan_().survey.exceptions.size());
    for (std::size_t i = 0; i < used_exceptions_.size(); ++i) {
      if (used_exceptions_[i]) continue;
      const SurveyException& exception = plan_().survey.exceptions[i];
      plan_().warnings.push_back(fmt::format("{}: this exception fits no source{}",
                                             to_string(exception.place), guess_source(exception.sources)));
    }
  }

  void warn_of_idle_requests() {
    used_requests_.resize(request_.again.size());
    for (std::size_t i = 0; i < used_requests_.size(); ++i) {
      if (used_requests_[i]) continue;
      plan_().warnings.push_back(fmt::format("no source fits '{}' to be done again{}",
                                             printable(request_.again[i]),
                                             guess_source({request_.again[i]})));
    }
  }

  std::string guess_source(const std::vector<std::string>& patterns) {
    std::vector<std::string> sources;
    for (const PlannedJob& job : plan_().jobs) sources.push_back(job.source);
    for (const std::string& pattern : patterns) {
      const std::string guess = did_you_mean(pattern, sources);
      if (!guess.empty()) return "; " + guess;
    }
    return {};
  }

  Ledger* ledger_;
  const PlanRequest& request_;
  PlannedSurvey result_;
  SpeciesNames names_;
  std::unordered_map<std::string, std::size_t> index_;
  std::map<std::pair<std::vector<bool>, const SurveyTables*>, std::uint32_t> option_index_;
  std::vector<bool> used_exceptions_;
  std::vector<bool> used_requests_;
  std::map<std::string, std::size_t> passed_rows_;
};

}  // namespace

PlannedSurvey plan_survey(const SurveyDescription& survey, Ledger* ledger, const PlanRequest& request) {
  return Planner(survey, ledger, request).plan();
}

namespace {

void stamp_rows(JobStamp& stamp, const DividedTable& table, const PlannedJob& job) {
  stamp.table_file = table.path();
  for (const std::uint32_t part : job.parts) {
    const TablePart& rows = table.parts()[part];
    stamp.table_lines += (stamp.table_lines.empty() ? "" : ", ") + lines_of(rows);
    stamp.input_fingerprint += rows.fingerprint;
  }
}

void stamp_spectra(JobStamp& stamp, const SurveyPlan& plan, const PlannedJob& job) {
  for (const std::uint32_t index : job.spectra) {
    const SpectraOfSource& file = plan.spectra[index];
    stamp.table_file += (stamp.table_file.empty() ? "" : ", ") + file.path;
    stamp.input_fingerprint += file.fingerprint;
  }
}

}  // namespace

JobStamp stamp_of(const SurveyPlan& plan, const PlannedJob& job) {
  JobStamp stamp;
  if (job.spectra.empty()) {
    stamp_rows(stamp, plan.tables[job.table], job);
  } else {
    stamp_spectra(stamp, plan, job);
  }
  if (job.parts.size() > 1 || job.spectra.size() > 1 || !job.problem.empty())
    stamp.input_fingerprint = fingerprint(stamp.input_fingerprint + job.problem);
  stamp.species_fingerprint = plan.species[job.species]->file_fingerprint;
  stamp.options = plan.option_sets[job.options].text;
  stamp.version = version();
  return stamp;
}

std::vector<std::pair<std::string, std::int64_t>> reasons_of(const SurveyPlan& plan) {
  std::map<std::string, std::int64_t> counts;
  for (const PlannedJob& job : plan.jobs) ++counts[job.reason.empty() ? "kept" : job.reason];
  std::vector<std::pair<std::string, std::int64_t>> sorted(counts.begin(), counts.end());
  std::stable_sort(sorted.begin(), sorted.end(),
                   [](const auto& a, const auto& b) { return a.second > b.second; });
  return sorted;
}

}  // namespace trotline
