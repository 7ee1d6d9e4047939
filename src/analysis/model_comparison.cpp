#include "model_comparison.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <set>

#include <trotline/inference/model_choice.hpp>

#include "likelihood_method.hpp"
#include "model_partitions.hpp"

namespace trotline {
namespace {

// Common practice with AICc and BIC: a difference of 2 is nothing, one of 6 is much, one of 10 decides.
constexpr double kNothing = 2.0;
constexpr double kMuch = 6.0;

struct Candidate {
  std::string name;
  ModelKind kind;
  RunOptions options;
  bool on_boundary = false;  ///< the basic model lies at the edge of this one
};

struct Scored {
  Candidate candidate;
  ModelScore score;
  FitStatus status = FitStatus::not_converged;
  std::string note;
  bool usable = false;
};

bool have_widths(const std::vector<PreparedLine>& lines) {
  return std::all_of(lines.begin(), lines.end(),
                     [](const auto& line) { return !line.result.used || line.result.fwhm_km_s > 0.0; });
}

bool have_beams_that_differ(const std::vector<PreparedLine>& lines) {
  double least = HUGE_VAL;
  double most = 0.0;
  for (const PreparedLine& line : lines) {
    if (!line.result.used) continue;
    if (!(line.result.beam_fwhm_arcsec > 0.0)) return false;
    least = std::min(least, line.result.beam_fwhm_arcsec);
    most = std::max(most, line.result.beam_fwhm_arcsec);
  }
  return most > 1.1 * least;
}

bool have_two_isomers(const std::vector<PreparedLine>& lines, const Species& species) {
  std::set<std::string> seen;
  for (const PreparedLine& line : lines) {
    if (line.result.used && !line.result.limit) seen.insert(line.spin);
  }
  return seen.size() > 1 && !spin_isomers(species).empty();
}

/// The basic model first.
std::vector<Candidate> candidates(const std::vector<PreparedLine>& lines, const Species& species,
                                  const RunOptions& options) {
  RunOptions plain = options;
  plain.components = 1;
  plain.isomers_apart = false;
  plain.source_size_free = false;
  plain.column_density_per_cm2.reset();
  const NoiseModel noise = options.method == "robust" ? NoiseModel::student_t : NoiseModel::gaussian;
  const bool opaque = have_widths(lines) && options.opacity != "thin";
  const Opacity opacity = !opaque                            ? Opacity::thin
                          : options.opacity == "line-centre" ? Opacity::line_centre
                                                             : Opacity::curve_of_growth;
  const std::string basic = opaque ? "one component, with opacity" : "one component, thin";
  std::vector<Candidate> list = {{basic, {opacity, 1, false, noise}, plain}};
  if (opaque) list.push_back({"one component, thin", {Opacity::thin, 1, false, noise}, plain});
  if (have_two_isomers(lines, species))
    list.push_back({"spin isomers apart", {opacity, 1, true, noise}, plain});
  if (have_beams_that_differ(lines) && !options.source_size_rad) {
    list.push_back({"source size free", {opacity, 1, false, noise}, plain, true});
    list.back().options.source_size_free = true;
  }
  if (!options.temperature_k) list.push_back({"two components", {opacity, 2, false, noise}, plain, true});
  return list;
}

std::string note_on(FitStatus status) {
  switch (status) {
    case FitStatus::converged:
    case FitStatus::at_bound:
      return {};
    case FitStatus::multimodal:
      return "several answers fit alike";
    case FitStatus::degenerate:
      return "the lines do not hold all its parameters";
    case FitStatus::only_limits:
    case FitStatus::too_few_data:
      return "more parameters than measurements";
    case FitStatus::not_converged:
      return "not converged";
  }
  return {};
}

Scored scored(const Candidate& candidate, const std::vector<PreparedLine>& lines, const Species& species) {
  Scored entry{candidate, {}, FitStatus::not_converged, {}, false};
  const ModelSetup setup = set_up_model(lines, species, candidate.options, candidate.kind);
  const IntensityLikelihood likelihood(*setup.model, setup.problem);
  entry.score.free_count = static_cast<int>(likelihood.free_count());
  if (likelihood.measured_count() < likelihood.free_count()) {
    entry.status = FitStatus::too_few_data;
  } else {
    const LikelihoodFit fit = fit_likelihood(likelihood);
    entry.status = fit.status;
    if (fit.status != FitStatus::not_converged) entry.score = score_of(likelihood, fit);
  }
  entry.note = note_on(entry.status);
  entry.usable = std::isfinite(entry.score.aicc) && entry.status != FitStatus::too_few_data &&
                 entry.status != FitStatus::not_converged && entry.status != FitStatus::only_limits;
  if (!entry.usable && entry.note.empty()) entry.note = "too few lines for AICc";
  return entry;
}

ModelEntry entry_of(const Scored& scored, const Scored& basic, double least_aicc, double least_bic) {
  ModelEntry entry;
  entry.name = scored.candidate.name;
  entry.free_count = scored.score.free_count;
  entry.note = scored.note;
  if (!scored.usable) return entry;
  entry.minus_2_ln_likelihood = 2.0 * scored.score.minus_ln_likelihood;
  entry.delta_aicc = scored.score.aicc - least_aicc;
  entry.delta_bic = scored.score.bic - least_bic;
  if (!basic.usable || scored.score.free_count <= basic.score.free_count) return entry;
  const ModelComparison comparison = compare(basic.score, scored.score, scored.candidate.on_boundary);
  entry.likelihood_ratio = comparison.likelihood_ratio;
  entry.p_value = comparison.p_value;
  entry.on_boundary = comparison.on_boundary;
  return entry;
}

std::string choice_of(const std::vector<ModelEntry>& models) {
  std::vector<const ModelEntry*> usable;
  for (const ModelEntry& model : models) {
    if (std::isfinite(model.delta_aicc)) usable.push_back(&model);
  }
  if (usable.size() < 2) return "these lines are too few to compare models";
  std::stable_sort(usable.begin(), usable.end(),
                   [](const auto* a, const auto* b) { return a->delta_aicc < b->delta_aicc; });
  const ModelEntry& best = *usable[0];
  const double lead = usable[1]->delta_aicc;
  if (lead < kNothing) {
    std::vector<std::string> names;
    int fewest = best.free_count;
    const ModelEntry* simplest = &best;
    for (const ModelEntry* model : usable) {
      if (model->delta_aicc >= kNothing) continue;
      names.push_back("'" + model->name + "'");
      if (model->free_count < fewest) {
        fewest = model->free_count;
        simplest = model;
      }
    }
    return fmt::format("{} describe the lines about as well (AICc within 2): nothing asks for more than '{}'",
                       fmt::join(names, " and "), simplest->name);
  }
  std::string text = fmt::format("'{}' describes the lines {}, by {:.1f} in AICc over '{}'", best.name,
                                 lead < kMuch ? "somewhat better" : "much better", lead, usable[1]->name);
  if (best.delta_bic > kNothing) text += "; BIC, which counts parameters more dearly, prefers another";
  return text;
}

}  // namespace

void compare_models(Result& result, const std::vector<PreparedLine>& lines, const Species& species,
                    const RunOptions& options) {
  const bool any = std::any_of(lines.begin(), lines.end(),
                               [](const auto& line) { return line.result.used && !line.result.limit; });
  if (!any) {
    result.model_choice = "no line is measured: there is nothing to compare models on";
    return;
  }
  std::vector<Scored> list;
  for (const Candidate& candidate : candidates(lines, species, options)) {
    list.push_back(scored(candidate, lines, species));
  }
  double least_aicc = HUGE_VAL;
  double least_bic = HUGE_VAL;
  for (const Scored& one : list) {
    if (!one.usable) continue;
    least_aicc = std::min(least_aicc, one.score.aicc);
    least_bic = std::min(least_bic, one.score.bic);
  }
  for (const Scored& one : list) result.models.push_back(entry_of(one, list.front(), least_aicc, least_bic));
  result.model_choice = choice_of(result.models);
}

}  // namespace trotline
