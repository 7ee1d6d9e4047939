#include <algorithm>
#include <cmath>
#include <functional>
#include <map>

#include <trotline/base/errors.hpp>
#include <trotline/inference/least_squares.hpp>
#include <trotline/inference/lte_checks.hpp>

#include "cost_minimum.hpp"
#include "score_test.hpp"

namespace trotline {
namespace {

constexpr double kLeftOut = 1e8;  // a datum whose error is multiplied so has no weight

bool is_measured(const IntensityLikelihood& likelihood, Eigen::Index i) {
  return !likelihood.problem().data[static_cast<std::size_t>(i)].is_limit;
}

/// Mean over the lines of each datum.
Eigen::VectorXd datum_mean(const ForwardModel& model, const std::function<double(const ModelLine&)>& value) {
  Eigen::VectorXd sum = Eigen::VectorXd::Zero(model.data());
  Eigen::VectorXd count = Eigen::VectorXd::Zero(model.data());
  for (const ModelLine& line : model.lines()) {
    sum[line.datum] += value(line);
    count[line.datum] += 1.0;
  }
  return sum.cwiseQuotient(count);
}

LteCheck trend_check(LteCheckKind kind, const ScoreTest& test) {
  LteCheck check{kind, {}};
  if (test.dof < 1) return check;
  check.figure = test.estimate[0] / std::sqrt(test.covariance(0, 0));
  check.p_value = test.p_value;
  check.outcome = test.p_value < kLteCheckChance ? CheckOutcome::fail : CheckOutcome::pass;
  return check;
}

LteCheck goodness_check(const LikelihoodFit& fit) {
  LteCheck check{LteCheckKind::goodness_of_fit, {}};
  check.figure = fit.chi2;
  check.p_value = chi2_survival(fit.chi2, fit.dof);
  if (std::isnan(check.p_value)) return check;
  check.outcome = check.p_value < kLteCheckChance ? CheckOutcome::fail : CheckOutcome::pass;
  return check;
}

LteCheck curvature_check(const IntensityLikelihood& likelihood, const ScoreTester& tester) {
  const Eigen::VectorXd energy =
      datum_mean(likelihood.model(), [](const auto& l) { return l.constants.upper_energy_k; });
  const double scale = std::max(1.0, energy.maxCoeff());
  return trend_check(
      LteCheckKind::curvature,
      tester.test((energy / scale).array().square().matrix().asDiagonal() * tester.column_slope()));
}

LteCheck outlier_check(const IntensityLikelihood& likelihood, const ScoreTester& tester) {
  LteCheck check{LteCheckKind::outlier, {}};
  int testable = 0;
  for (Eigen::Index i = 0; i < likelihood.data_count(); ++i) {
    const double z = tester.standardised_residual(i);
    if (!is_measured(likelihood, i) || std::isnan(z)) continue;
    ++testable;
    if (!(std::abs(check.figure) >= std::abs(z))) {
      check.figure = z;
      check.data = {static_cast<int>(i)};
    }
  }
  if (testable < 2) return {LteCheckKind::outlier, {}};
  const double one = std::erfc(std::abs(check.figure) / std::sqrt(2.0));
  check.p_value = -std::expm1(testable * std::log1p(-std::min(one, 1.0 - 1e-12)));
  check.outcome = check.p_value < kLteCheckChance ? CheckOutcome::fail : CheckOutcome::pass;
  return check;
}

/// N and T of every group apart, against one N and T: two columns for each group but the first.
LteCheck group_check(const IntensityLikelihood& likelihood, const ScoreTester& tester,
                     const DatumGrouping& grouping) {
  LteCheck check{LteCheckKind::groups, grouping.name};
  const Eigen::VectorXd energy =
      datum_mean(likelihood.model(), [](const auto& l) { return l.constants.upper_energy_k; });
  std::map<int, std::vector<Eigen::Index>> members;
  for (Eigen::Index i = 0; i < likelihood.data_count(); ++i) {
    const int group = grouping.group[static_cast<std::size_t>(i)];
    if (group >= 0 && is_measured(likelihood, i)) members[group].push_back(i);
  }
  std::erase_if(members, [&](const auto& item) {
    const auto& data = item.second;
    return std::all_of(data.begin(), data.end(),
                       [&](auto i) { return std::abs(energy[i] - energy[data[0]]) < 1e-3; });
  });
  if (members.size() < 2) return check;
  Eigen::MatrixXd columns =
      Eigen::MatrixXd::Zero(likelihood.data_count(), 2 * static_cast<Eigen::Index>(members.size() - 1));
  Eigen::Index column = 0;
  for (auto item = std::next(members.begin()); item != members.end(); ++item, column += 2) {
    for (const Eigen::Index i : item->second) {
      columns(i, column) = tester.temperature_slope()[i];
      columns(i, column + 1) = tester.column_slope()[i];
    }
  }
  const ScoreTest test = tester.test(columns);
  if (test.dof < 1) return check;
  check.p_value = test.p_value;
  check.figure = 0.0;
  for (Eigen::Index k = 0; k < columns.cols(); k += 2) {
    const double sigma = std::sqrt(test.covariance(k, k));
    if (sigma > 0.0) check.figure = std::max(check.figure, std::abs(test.estimate[k]) / sigma);
  }
  check.outcome = test.p_value < kLteCheckChance ? CheckOutcome::fail : CheckOutcome::pass;
  return check;
}

/// A factor on every optical depth, intensities of thin lines kept: W changes by W (d ln G/d ln tau - 1).
LteCheck opacity_check(const IntensityLikelihood& likelihood, const LikelihoodFit& fit,
                       const ScoreTester& tester) {
  const ForwardModel& model = likelihood.model();
  if (model.layout().components > 1) return {LteCheckKind::opacity_trend, {}};
  Eigen::VectorXd column = Eigen::VectorXd::Zero(model.data());
  const auto predictions = model.predictions(fit.state, 0);
  for (std::size_t i = 0; i < predictions.size(); ++i) {
    const double tau = predictions[i].optical_depth;
    if (std::isnan(tau)) return {LteCheckKind::opacity_trend, {}};
    const OpacityCorrection correction = curve_of_growth_correction(tau);
    // A thin model lacks the whole correction, another the next bit of it.
    const double change = model.options().opacity == Opacity::thin ? std::log(correction.factor)
                                                                   : correction.dln_factor_dln_tau;
    column[model.lines()[i].datum] -= predictions[i].intensity_k_km_s * change;
  }
  // Where no line is opaque enough to show it, the column is noise.
  constexpr double kLeastEffect = 1e-3;
  if (column.cwiseAbs().maxCoeff() < kLeastEffect * fit.intensity_k_km_s.cwiseAbs().maxCoeff()) {
    return {LteCheckKind::opacity_trend, {}};
  }
  return trend_check(LteCheckKind::opacity_trend, tester.test(column));
}

LteCheck beam_check(const IntensityLikelihood& likelihood, const LikelihoodFit& fit,
                    const ScoreTester& tester) {
  for (const ModelLine& line : likelihood.model().lines()) {
    if (!(line.beam_fwhm_arcsec > 0.0)) return {LteCheckKind::beam_trend, {}};
  }
  const Eigen::VectorXd ln_beam =
      datum_mean(likelihood.model(), [](const auto& line) { return std::log(line.beam_fwhm_arcsec); });
  if (ln_beam.maxCoeff() - ln_beam.minCoeff() < 0.05) return {LteCheckKind::beam_trend, {}};
  return trend_check(LteCheckKind::beam_trend, tester.test(ln_beam.asDiagonal() * fit.intensity_k_km_s));
}

LteCheck limit_check(const IntensityLikelihood& likelihood, const LikelihoodFit& fit) {
  LteCheck check{LteCheckKind::limits, {}};
  for (Eigen::Index i = 0; i < likelihood.data_count(); ++i) {
    if (is_measured(likelihood, i)) continue;
    const double above = -fit.residual_sigma[i];
    if (!(check.figure >= above)) check.figure = above;
    if (above > kLteLimitSigma) check.data.push_back(static_cast<int>(i));
  }
  if (std::isnan(check.figure)) return check;
  check.outcome = check.data.empty() ? CheckOutcome::pass : CheckOutcome::fail;
  return check;
}

LteCheck collision_check(const LteOptions& options) {
  LteCheck check{LteCheckKind::collisions, {}};
  if (!(options.density_per_cm3 > 0.0)) return check;
  for (std::size_t i = 0; i < options.critical_density_per_cm3.size(); ++i) {
    const double ratio = options.critical_density_per_cm3[i] / options.density_per_cm3;
    if (std::isnan(ratio)) continue;
    if (!(check.figure >= ratio)) check.figure = ratio;
    if (ratio > 1.0) check.data.push_back(static_cast<int>(i));
  }
  if (std::isnan(check.figure)) return check;
  check.outcome = check.data.empty() ? CheckOutcome::pass : CheckOutcome::fail;
  return check;
}

/// Free entry that is ln T of the first component, or -1.
Eigen::Index temperature_entry(const IntensityLikelihood& likelihood) {
  const auto& free = likelihood.free_entries();
  const auto found = std::find(free.begin(), free.end(), likelihood.model().layout().ln_temperature(0));
  return found == free.end() ? -1 : found - free.begin();
}

std::vector<LeaveOneOut> leave_each_out(const IntensityLikelihood& likelihood, const LikelihoodFit& fit,
                                        const ScoreTester& tester) {
  const Eigen::Index entry = temperature_entry(likelihood);
  const StateLayout& layout = likelihood.model().layout();
  std::vector<LeaveOneOut> table;
  for (Eigen::Index i = 0; i < likelihood.data_count(); ++i) {
    if (!is_measured(likelihood, i)) continue;
    LikelihoodProblem problem = likelihood.problem();
    problem.data[static_cast<std::size_t>(i)].sigma_k_km_s *= kLeftOut;
    const IntensityLikelihood without(likelihood.model(), problem);
    LikelihoodWorkspace workspace = without.workspace();
    const CostMinimum minimum = minimise_cost(without, fit.free, workspace);
    const Eigen::VectorXd state = without.state_of(minimum.free);
    LeaveOneOut row{static_cast<int>(i), tester.standardised_residual(i),
                    std::exp(state[layout.ln_temperature(0)]), 0.0, state[layout.ln_column(0)]};
    if (entry >= 0) {
      const Eigen::MatrixXd information = without.information(minimum.free, workspace);
      row.temperature_sigma_k =
          row.temperature_k * std::sqrt(std::max(0.0, information.inverse()(entry, entry)));
    }
    table.push_back(row);
  }
  return table;
}

/// A copy of the problem in which only some data have weight, fitted from the whole's answer.
SubsetFit fit_subset(const IntensityLikelihood& likelihood, const LikelihoodFit& fit,
                     const DatumGrouping& grouping, int group) {
  SubsetFit subset;
  subset.group = group;
  LikelihoodProblem problem = likelihood.problem();
  for (std::size_t i = 0; i < problem.data.size(); ++i) {
    if (grouping.group[i] != group) {
      problem.data[i].sigma_k_km_s *= kLeftOut;
    } else if (!problem.data[i].is_limit) {
      ++subset.data;
    }
  }
  const IntensityLikelihood part(likelihood.model(), problem);
  LikelihoodWorkspace workspace = part.workspace();
  const CostMinimum minimum = minimise_cost(part, fit.free, workspace);
  const Eigen::Index entry = temperature_entry(likelihood);
  const Eigen::MatrixXd covariance = part.information(minimum.free, workspace).inverse();
  const double sigma = std::sqrt(covariance(entry, entry));
  if (!minimum.converged || !(sigma < kWideErrorEFolds)) return subset;
  subset.temperature_k = std::exp(minimum.free[entry]);
  subset.temperature_sigma_k = subset.temperature_k * sigma;
  return subset;
}

std::vector<SubsetFit> fit_subsets(const IntensityLikelihood& likelihood, const LikelihoodFit& fit,
                                   const DatumGrouping& grouping, int number) {
  std::vector<SubsetFit> subsets;
  if (temperature_entry(likelihood) < 0) return subsets;
  std::vector<int> groups = grouping.group;
  std::sort(groups.begin(), groups.end());
  groups.erase(std::unique(groups.begin(), groups.end()), groups.end());
  for (const int group : groups) {
    if (group < 0) continue;
    subsets.push_back(fit_subset(likelihood, fit, grouping, group));
    subsets.back().grouping = number;
    if (subsets.back().data < 2) subsets.pop_back();
  }
  return subsets;
}

LteVerdict verdict_of(const IntensityLikelihood& likelihood, const LikelihoodFit& fit,
                      const std::vector<LteCheck>& checks) {
  const bool failed = std::any_of(checks.begin(), checks.end(),
                                  [](const LteCheck& check) { return check.outcome == CheckOutcome::fail; });
  if (failed) return LteVerdict::not_one_temperature;
  const Eigen::Index entry = temperature_entry(likelihood);
  const bool vague = entry >= 0 && !(std::sqrt(fit.covariance(entry, entry)) < kLteVagueLnT);
  return fit.dof < 1 || vague ? LteVerdict::cannot_tell : LteVerdict::one_temperature;
}

void require_matching(const IntensityLikelihood& likelihood, const LteOptions& options) {
  const auto data = static_cast<std::size_t>(likelihood.data_count());
  for (const DatumGrouping& grouping : options.groupings) {
    if (grouping.group.size() != data) {
      throw DomainError("grouping.group.size()", static_cast<double>(grouping.group.size()),
                        "one for each datum");
    }
  }
  const std::size_t densities = options.critical_density_per_cm3.size();
  if (densities != 0 && densities != data) {
    throw DomainError("critical_density_per_cm3.size()", static_cast<double>(densities),
                      "one for each datum");
  }
}

void add_trends(LteReport& report, const IntensityLikelihood& likelihood, const LikelihoodFit& fit,
                const ScoreTester& tester, const LteOptions& options) {
  report.checks.push_back(curvature_check(likelihood, tester));
  for (std::size_t g = 0; g < options.groupings.size(); ++g) {
    report.checks.push_back(group_check(likelihood, tester, options.groupings[g]));
    if (report.checks.back().outcome == CheckOutcome::not_testable) continue;
    for (const SubsetFit& subset : fit_subsets(likelihood, fit, options.groupings[g], static_cast<int>(g))) {
      report.subsets.push_back(subset);
    }
  }
  report.checks.push_back(opacity_check(likelihood, fit, tester));
  report.checks.push_back(beam_check(likelihood, fit, tester));
}

}  // namespace

LteReport check_lte(const IntensityLikelihood& likelihood, const LikelihoodFit& fit,
                    const LteOptions& options) {
  require_matching(likelihood, options);
  LteReport report;
  if (!fit.has_answer()) return report;
  const ScoreTester tester(likelihood, fit);
  report.checks.push_back(goodness_check(fit));
  report.checks.push_back(outlier_check(likelihood, tester));
  if (likelihood.model().layout().components == 1) add_trends(report, likelihood, fit, tester, options);
  report.checks.push_back(limit_check(likelihood, fit));
  report.checks.push_back(collision_check(options));
  report.leave_one_out = leave_each_out(likelihood, fit, tester);
  report.verdict = verdict_of(likelihood, fit, report.checks);
  return report;
}

}  // namespace trotline
