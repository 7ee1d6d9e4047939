#include <fmt/format.h>
#include <kainjow/mustache.hpp>

#include <algorithm>
#include <cmath>
#include <map>

#include <trotline/base/version.hpp>
#include <trotline/report/page.hpp>
#include <trotline/report/rounding.hpp>
#include <trotline/report/small_diagram.hpp>
#include <trotline/report/typeset.hpp>

#include "page_assets.hpp"
#include "page_rope.hpp"
#include "page_words.hpp"

namespace trotline {
namespace {

using kainjow::mustache::data;
using kainjow::mustache::mustache;
using List = kainjow::mustache::list;

constexpr std::size_t kMostTrouble = 500;
constexpr std::size_t kMostVerdicts = 12;

mustache template_of(const char* name) { return mustache(std::string(page_asset(name))); }

/// Values of the jobs with an answer.
struct SpeciesTally {
  std::vector<double> temperatures_k;
  std::vector<double> log10_columns;
};

data lines_data(const Result& result) {
  data rows = data::type::list;
  for (const LineResult& line : result.lines) {
    data row;
    row["label"] = typeset_transition(page::words(line.transition));
    row["e"] = fixed_decimals(line.upper_energy_k, 1);
    row["w"] = (line.limit ? "< " : "") +
               (line.limit ? significant(line.intensity_k_km_s, 3)
                           : value_with_error(line.intensity_k_km_s, line.intensity_error_k_km_s));
    row["y"] = line.limit ? "< " + fixed_decimals(line.ln_nu_gu, 2)
                          : value_with_error(line.ln_nu_gu, line.ln_nu_gu_error);
    row["r"] = fixed_decimals(line.residual_sigma, 1);
    row["out"] = !line.used ? data(data::type::bool_true) : data(data::type::bool_false);
    rows.push_back(row);
  }
  return rows;
}

data checks_data(const Result& result) {
  data checks = data::type::list;
  for (const Check& check : result.checks) {
    const bool open = check.outcome == Outcome::not_testable;
    data item;
    item["mark"] = open ? "open" : check.outcome == Outcome::pass ? "pass" : "fail";
    item["outcome"] = open ? "–" : check.outcome == Outcome::pass ? "✓ holds:" : "✗ fails:";
    item["name"] = page::words(check.name);
    if (std::isfinite(check.figure)) item["figure"] = significant(check.figure, 3);
    item["meaning"] = page::words(check.meaning);
    checks.push_back(item);
  }
  return checks;
}

data warnings_data(const Result& result) {
  data warnings = data::type::list;
  for (const std::string& warning : result.warnings) warnings.push_back(page::words(warning));
  return warnings;
}

data flag(bool on) { return on ? data(data::type::bool_true) : data(data::type::bool_false); }

void set_text(data& item, const char* name, const std::string& text) {
  if (!text.empty())
    item[name] = text;
  else
    item[name] = data(data::type::bool_false);
}

}  // namespace

struct SurveyPage::Templates {
  mustache row = template_of("row.mustache");
  mustache section = template_of("section.mustache");
  mustache opening = template_of("opening.mustache");
  mustache middle = template_of("middle.mustache");
  mustache closing = template_of("closing.mustache");
};

struct SurveyPage::Tally {
  std::size_t jobs = 0;
  std::map<std::string, std::size_t> statuses;
  std::map<std::string, SpeciesTally> species;
  std::map<std::string, std::size_t> verdicts;
  std::vector<std::pair<std::string, std::string>> failures;
  std::vector<RopeHook> hooks;

  void add(const PageJob& job) {
    ++jobs;
    ++statuses[job.status];
    SpeciesTally& of_species = species[page::words(job.species)];
    if (job.status == "failed" && failures.size() < kMostTrouble) {
      failures.emplace_back(job.source + ", " + job.species, job.message);
    }
    if (job.result == nullptr) return;
    if (!job.result->verdict.empty()) ++verdicts[verdict_without_details(job.result->verdict)];
    if (job.status != "done") return;
    const double t = job.result->temperature_k.value;
    const double n = job.result->log10_column_density_cm2.value;
    if (std::isfinite(n)) of_species.log10_columns.push_back(n);
    if (!std::isfinite(t)) return;
    of_species.temperatures_k.push_back(t);
    hooks.push_back({t, n, page::failed_checks(*job.result) > 0});
  }
};

SurveyPage::SurveyPage(PageFrame frame)
    : frame_(std::move(frame)),
      templates_(std::make_unique<Templates>()),
      tally_(std::make_unique<Tally>()) {}

SurveyPage::~SurveyPage() = default;

void SurveyPage::set_figures(std::vector<PageFigure> figures) { frame_.figures = std::move(figures); }

namespace {

data row_data(const PageJob& job, bool has_section) {
  const Result blank;
  const Result& result = job.result != nullptr ? *job.result : blank;
  data row;
  row["id"] = std::to_string(job.id);
  row["has_section"] = flag(has_section);
  row["source"] = page::words(job.source);
  row["species"] = page::words(job.species);
  row["keys"] =
      page::key(result.temperature_k.value) + " " + page::key(result.log10_column_density_cm2.value);
  row["t"] = page::with_error(result.temperature_k);
  row["n"] = page::with_error(result.log10_column_density_cm2);
  row["lines"] = job.result != nullptr ? std::to_string(page::fitted_lines(result)) : "";
  row["chi2"] = page::chi_squared(result);
  row["failed_checks"] = job.result != nullptr ? std::to_string(page::failed_checks(result)) : "";
  row["status"] = job.status;
  row["note"] = page::words(job.message.empty() ? result.verdict : job.message);
  return row;
}

data section_data(const PageJob& job) {
  const Result& result = *job.result;
  data section;
  section["id"] = std::to_string(job.id);
  section["source"] = page::words(job.source);
  section["formula"] = typeset_formula(page::words(result.formula));
  section["status"] = job.status;
  set_text(section, "t", page::with_error(result.temperature_k));
  set_text(section, "n", page::with_error(result.column_density_cm2));
  set_text(section, "t68", result.temperature_fixed ? "" : page::interval68(result.temperature_k));
  section["n68"] = page::interval68(result.column_density_cm2);
  const std::string chi2 = page::chi_squared(result);
  set_text(section, "fit",
           chi2.empty() ? "" : fmt::format("χ²/d.o.f. {}; {}", chi2, page::words(result.method)));
  set_text(section, "message", page::words(job.message));
  set_text(section, "verdict", page::words(result.verdict));
  section["diagram"] = small_diagram(result);
  section["has_lines"] = flag(!result.lines.empty());
  section["rows"] = lines_data(result);
  section["has_checks"] = flag(!result.checks.empty());
  section["checks"] = checks_data(result);
  section["has_warnings"] = flag(!result.warnings.empty());
  section["warnings"] = warnings_data(result);
  section["from"] = fmt::format("From {}; Q: {}.", page::words(job.table_file),
                                page::words(result.partition_function_source));
  return section;
}

data species_data(const std::map<std::string, SpeciesTally>& tallies) {
  data list = data::type::list;
  for (const auto& [name, tally] : tallies) {
    std::vector<double> t = tally.temperatures_k, n = tally.log10_columns;
    std::sort(t.begin(), t.end());
    std::sort(n.begin(), n.end());
    const auto range = [](const std::vector<double>& sorted, int decimals) {
      return sorted.empty() ? std::string("–")
                            : fixed_decimals(page::quantile(sorted, 0.16), decimals) + " … " +
                                  fixed_decimals(page::quantile(sorted, 0.84), decimals);
    };
    data item;
    item["name"] = name;
    item["answers"] = std::to_string(n.size());
    item["t"] = fixed_decimals(page::quantile(t, 0.5), 1);
    item["t_range"] = range(t, 1);
    item["n"] = fixed_decimals(page::quantile(n, 0.5), 2);
    item["n_range"] = range(n, 2);
    list.push_back(item);
  }
  return list;
}

data verdict_data(const std::map<std::string, std::size_t>& verdicts) {
  std::vector<std::pair<std::string, std::size_t>> sorted(verdicts.begin(), verdicts.end());
  std::stable_sort(sorted.begin(), sorted.end(),
                   [](const auto& a, const auto& b) { return a.second > b.second; });
  data list = data::type::list;
  std::size_t others = 0;
  for (std::size_t i = 0; i < sorted.size(); ++i) {
    if (i >= kMostVerdicts) {
      others += sorted[i].second;
      continue;
    }
    data item;
    item["verdict"] = page::words(sorted[i].first);
    item["count"] = std::to_string(sorted[i].second);
    list.push_back(item);
  }
  if (others > 0) {
    data item;
    item["verdict"] = "others";
    item["count"] = std::to_string(others);
    list.push_back(item);
  }
  return list;
}

data count_data(const char* mark, const char* name, std::size_t count, const char* meaning) {
  data item;
  item["mark"] = mark;
  item["name"] = name;
  item["count"] = std::to_string(count);
  item["meaning"] = meaning;
  return item;
}

/// An SVG document as the source of an image: nothing in it can reach the page.
std::string image_of(const std::string& svg) {
  static constexpr char kDigits[] = "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/";
  std::string text = "data:image/svg+xml;base64,";
  for (std::size_t i = 0; i < svg.size(); i += 3) {
    const auto byte = [&](std::size_t k) {
      return k < svg.size() ? static_cast<std::uint32_t>(static_cast<unsigned char>(svg[k])) : 0U;
    };
    const std::uint32_t bits = byte(i) << 16 | byte(i + 1) << 8 | byte(i + 2);
    text += kDigits[bits >> 18];
    text += kDigits[bits >> 12 & 63];
    text += i + 1 < svg.size() ? kDigits[bits >> 6 & 63] : '=';
    text += i + 2 < svg.size() ? kDigits[bits & 63] : '=';
  }
  return text;
}

}  // namespace

SurveyPage::Pieces SurveyPage::add(const PageJob& job) {
  tally_->add(job);
  Pieces pieces;
  const bool has_section = job.result != nullptr && tally_->jobs <= kMostSections;
  if (tally_->jobs <= kMostRows) pieces.row = templates_->row.render(row_data(job, has_section));
  if (has_section) pieces.section = templates_->section.render(section_data(job));
  return pieces;
}

std::string SurveyPage::opening() const {
  const Tally& tally = *tally_;
  const auto status = [&](const char* name) {
    const auto found = tally.statuses.find(name);
    return found == tally.statuses.end() ? std::size_t{0} : found->second;
  };
  data page;
  page["version"] = version();
  page["title"] = page::words(frame_.title);
  page["lead"] = fmt::format(
      "Rotation temperatures and column densities of {} jobs, a job being one source and one species.",
      tally.jobs);
  page["css"] = std::string(page_asset("page.css"));
  page["rope"] = rope_svg(tally.hooks);
  page["rope_caption"] =
      tally.hooks.empty()
          ? "No job gave a temperature."
          : "Every line hangs at the temperature of one job; the longer it is, the larger the "
            "column density. Rust: a check failed.";
  data counts = data::type::list;
  counts.push_back(count_data("all", "Jobs", tally.jobs, "source and species"));
  counts.push_back(count_data("done", "Done", status("done"), "temperature and column density"));
  counts.push_back(count_data("weak", "Weak", status("weak"), "analysed, but the data cannot answer"));
  counts.push_back(count_data("failed", "Failed", status("failed"), "the input is wrong"));
  page["counts"] = std::move(counts);
  page["species"] = species_data(tally.species);
  page["verdicts"] = verdict_data(tally.verdicts);
  data figures = data::type::list;
  for (const PageFigure& figure : frame_.figures) {
    data item;
    item["alt"] = figure.caption;
    item["caption"] = figure.caption;
    item["data"] = image_of(figure.svg);
    figures.push_back(item);
  }
  page["has_figures"] = flag(!frame_.figures.empty());
  page["figures"] = std::move(figures);
  data trouble = data::type::list;
  for (const auto& list : {frame_.unread, tally.failures}) {
    for (const auto& [name, message] : list) {
      data item;
      item["name"] = page::words(name);
      item["message"] = page::words(message);
      trouble.push_back(item);
    }
  }
  page["has_trouble"] = flag(!frame_.unread.empty() || !tally.failures.empty());
  page["trouble"] = std::move(trouble);
  set_text(page, "trouble_note",
           status("failed") > tally.failures.size()
               ? fmt::format("{} more failed; the tables and the ledger hold them.",
                             status("failed") - tally.failures.size())
               : "");
  set_text(page, "table_note",
           tally.jobs > kMostRows
               ? fmt::format("The first {} of {} jobs; the others are in the tables beside this page.",
                             kMostRows, tally.jobs)
               : "");
  return templates_->opening.render(page);
}

std::string SurveyPage::middle() const {
  data page;
  set_text(page, "note",
           tally_->jobs > kMostSections
               ? fmt::format("The first {} of {} jobs; the ledger beside this page holds the others.",
                             kMostSections, tally_->jobs)
               : "");
  return templates_->middle.render(page);
}

std::string SurveyPage::closing() const {
  data page;
  page["provenance"] = fmt::format("Made by trotline {} from the ledger beside this page.", version());
  page["js"] = std::string(page_asset("page.js"));
  return templates_->closing.render(page);
}

}  // namespace trotline
