#pragma once

#include <limits>
#include <string>
#include <vector>

#include <trotline/inference/likelihood_fit.hpp>

namespace trotline {

enum class LteCheckKind {
  goodness_of_fit,  ///< figure: chi2; p of a larger one
  curvature,        ///< figure: z of a term quadratic in E_u added to ln(N_u/g_u)
  outlier,          ///< figure: largest standardised residual [sigma]; p allows for the number of lines
  groups,         ///< figure: largest |z| of a group's T against the common one; p of N and T of every group
  opacity_trend,  ///< figure: z of a factor on all optical depths
  beam_trend,     ///< figure: z of a power of the beam's size
  limits,         ///< figure: the most by which the model exceeds a limit [sigma]
  collisions      ///< figure: largest critical density over the density given
};

enum class CheckOutcome { pass, fail, not_testable };

struct LteCheck {
  LteCheckKind kind;
  std::string grouping = {};  ///< for groups: what they are, e.g. "spin isomer"
  double figure = std::numeric_limits<double>::quiet_NaN();
  double p_value = std::numeric_limits<double>::quiet_NaN();  ///< NaN where the check is no test
  CheckOutcome outcome = CheckOutcome::not_testable;
  std::vector<int> data =
      {};  ///< the data that speak loudest: the outlier, limits broken, lines not thermalised
};

/// What leaving one datum out does.
struct LeaveOneOut {
  int datum = 0;
  double standardised_residual = 0.0;  ///< of the datum against the fit, over its expected scatter; N(0, 1)
  double temperature_k = 0.0;          ///< T without it
  double temperature_sigma_k = 0.0;
  double ln_column = 0.0;  ///< ln N of the first isomer without it
};

/// A division of the data into groups that one temperature should describe alike.
struct DatumGrouping {
  std::string name;        ///< "spin isomer", "K-ladder", "band", "beam" ...
  std::vector<int> group;  ///< of each datum; below 0: in none
};

/// N and T of the data of one group by themselves.
struct SubsetFit {
  int grouping = 0;  ///< index into LteOptions::groupings
  int group = 0;
  int data = 0;                                                     ///< how many
  double temperature_k = std::numeric_limits<double>::quiet_NaN();  ///< NaN where they hold none
  double temperature_sigma_k = std::numeric_limits<double>::quiet_NaN();
};

struct LteOptions {
  std::vector<DatumGrouping> groupings;
  std::vector<double> critical_density_per_cm3;  ///< of each datum, NaN where not known; empty: none known
  double density_per_cm3 = std::numeric_limits<double>::quiet_NaN();
};

enum class LteVerdict {
  one_temperature,      ///< one temperature describes the lines
  not_one_temperature,  ///< it does not; the checks that failed say why
  cannot_tell
};

struct LteReport {
  std::vector<LteCheck> checks;
  std::vector<LeaveOneOut> leave_one_out;  ///< of every measured datum
  std::vector<SubsetFit> subsets;          ///< of groupings that can be tested
  LteVerdict verdict = LteVerdict::cannot_tell;
};

/// Whether the temperature of a fit describes its data. With several components the trends (curvature,
/// groups, opacity, beam) are not testable.
///
/// Every trend is a score test: the parameter that would describe a departure is added to the linearised fit,
/// calibration included, and its estimate is held against its standard error. Nothing is refitted, so a test
/// costs nothing and cannot fail to converge. A check fails where chance alone would do so in fewer than
/// kLteCheckChance of cases; the verdict needs one failure.
/// @throws DomainError if groupings or critical densities do not match the data
/// Reference: [Rao1948] for score tests; [CookWeisberg1982] for standardised residuals.
[[nodiscard]] LteReport check_lte(const IntensityLikelihood& likelihood, const LikelihoodFit& fit,
                                  const LteOptions& options = {});

/// Some eight checks share a chance of less than 5 % to raise a false alarm.
inline constexpr double kLteCheckChance = 0.004;

/// A limit is broken where the model lies this many sigma above it (chance 0.4 %, one-sided).
inline constexpr double kLteLimitSigma = 2.65;

/// A temperature known no better than this (standard error of ln T) is no basis for a verdict.
inline constexpr double kLteVagueLnT = 0.7;

}  // namespace trotline
