#pragma once

#include <cstdint>
#include <limits>
#include <optional>
#include <string>
#include <utility>
#include <vector>

namespace trotline {

inline constexpr double kNotKnown = std::numeric_limits<double>::quiet_NaN();

/// A number with its error and intervals. NaN where not known; an interval's end is NaN where the data
/// set no bound on that side.
struct Estimate {
  double value = kNotKnown;
  double error = kNotKnown;  ///< standard error, from the curvature at the best fit
  double low68 = kNotKnown;
  double high68 = kNotKnown;
  double low95 = kNotKnown;
  double high95 = kNotKnown;
};

/// How an analysis ended. Everything but `done` is an answer that the data cannot give.
enum class Status {
  done,
  one_line,     ///< one line and no stated temperature: N(T) over a range is given, no temperature
  not_thermal,  ///< the slope of the diagram is not negative: no temperature
  only_limits,  ///< no line is detected
  no_lines,     ///< no line is left to fit: the options or the intensities leave none
  unbounded,    ///< a temperature, but outside the range for which the species has a Q(T)
  degenerate,   ///< the lines do not hold some combination of the parameters; ranges are what they do set
  several,      ///< several answers describe the lines alike, see Result::alternatives
  at_bound,     ///< the best value of a parameter is the edge of its range
  no_solution,  ///< no temperature and column density agree with the opacity corrections that they imply
  not_converged
};

/// Every status, for those who go through them.
inline constexpr Status kEveryStatus[] = {Status::done,        Status::one_line,     Status::not_thermal,
                                          Status::only_limits, Status::no_lines,     Status::unbounded,
                                          Status::degenerate,  Status::several,      Status::at_bound,
                                          Status::no_solution, Status::not_converged};

[[nodiscard]] const char* name_of(Status status);

struct LineResult {
  std::string transition;
  double frequency_mhz = kNotKnown;
  double upper_energy_k = kNotKnown;
  double upper_degeneracy = kNotKnown;
  double einstein_a_s1 = kNotKnown;
  double intensity_k_km_s = kNotKnown;        ///< main-beam scale
  double intensity_error_k_km_s = kNotKnown;  ///< without calibration
  double calibration_error = 0.0;             ///< fraction
  std::string calibration_group;              ///< empty: its own
  bool limit = false;
  bool excluded = false;  ///< an option of the user's chooses other lines
  std::string blend;  ///< empty where the line stands alone
  double ln_nu_gu = kNotKnown;
  double ln_nu_gu_error = kNotKnown;  ///< noise and calibration together
  double optical_depth = kNotKnown;  ///< at line centre, where a width is known; of two components the larger
  double filling = 1.0;
  double beam_fwhm_arcsec = kNotKnown;
  double fwhm_km_s = kNotKnown;
  double model_intensity_k_km_s = kNotKnown;
  double residual_sigma = kNotKnown;  ///< (observed - model) / error; for a limit (limit - model) / error
  double calibration_factor = 1.0;    ///< the shared factor that the fit puts on the model of this line
  double critical_density_cm3 = kNotKnown;  ///< where collision rates are given
  bool used = true;
  std::string why_unused;
  std::size_t table_line = 0;  ///< line of the input table
  std::string note;            ///< from the input table
};

enum class Outcome { pass, fail, not_testable };

[[nodiscard]] const char* name_of(Outcome outcome);

struct Check {
  std::string name;
  double figure = kNotKnown;
  Outcome outcome = Outcome::not_testable;
  std::string meaning;
};

/// The fitted line of the diagram, for figures: ln(N_u/g_u) = intercept - E_u / T, with its covariance.
struct DiagramLine {
  double intercept = kNotKnown;
  double slope_per_k = kNotKnown;  ///< -1/T
  double intercept_variance = kNotKnown;
  double slope_variance = kNotKnown;
  double covariance = kNotKnown;
};

struct ColumnAtTemperature {
  double temperature_k = kNotKnown;
  double column_density_cm2 = kNotKnown;
  double error_cm2 = kNotKnown;
  bool upper_limit = false;  ///< N is below column_density_cm2, not equal to it
};

/// One part of an answer that has several: a component, or a spin isomer.
struct Component {
  std::string name;  ///< "component 1", "ortho" ...
  Estimate temperature_k;
  Estimate column_density_cm2;
  Estimate log10_column_density_cm2;
  double source_size_arcsec = kNotKnown;  ///< NaN: fills every beam
};

/// A free parameter as the fit has it, for those who propagate errors further.
struct FittedParameter {
  std::string name;  ///< "ln_column_density_cm2", "ln_temperature_k", "ln_source_size_arcsec", "background_k"
  double value = kNotKnown;
  double error = kNotKnown;
};

/// Another answer that describes the lines as well.
struct Alternative {
  double temperature_k = kNotKnown;
  double log10_column_density_cm2 = kNotKnown;
  double source_size_arcsec = kNotKnown;
  double delta_chi2 = kNotKnown;  ///< -2 ln L above that of the best
};

/// What leaving one line out does to the answer.
struct LeftOut {
  std::string transition;
  double standardised_residual =
      kNotKnown;  ///< of the line against the fit with it, over its expected scatter
  double temperature_k = kNotKnown;
  double temperature_error_k = kNotKnown;
  double log10_column_density_cm2 = kNotKnown;
};

/// The temperature of a part of the lines by itself.
struct SubsetTemperature {
  std::string division;  ///< "spin isomer", "K-ladder", "band", "beam"
  std::string subset;
  int lines = 0;
  double temperature_k = kNotKnown;
  double temperature_error_k = kNotKnown;
};

/// A model of the lines next to others.
struct ModelEntry {
  std::string name;
  int free_count = 0;
  double minus_2_ln_likelihood = kNotKnown;
  double delta_aicc = kNotKnown;  ///< above the best of the models that are listed
  double delta_bic = kNotKnown;
  double likelihood_ratio =
      kNotKnown;               ///< against the model of one component, isomers together, with opacity
  double p_value = kNotKnown;  ///< of such a ratio, if the smaller of the two holds
  bool on_boundary = false;    ///< the smaller lies at the edge of the larger: p is no exact number
  std::string note;            ///< e.g. why the model could not be fitted
};

/// A curve of the diagram where the model is no single straight line.
struct DiagramCurvePoint {
  double energy_k = kNotKnown;
  double ln_nu_gu = kNotKnown;
  double low68 = kNotKnown;
  double high68 = kNotKnown;
};
struct DiagramCurve {
  std::string name;
  std::vector<DiagramCurvePoint> points;
};

/// How intervals of a posterior were come by; draws only where they were asked for.
struct PosteriorSummary {
  std::string method;   ///< "quadrature", "ensemble sampler", or empty: no posterior was asked for
  std::string refusal;  ///< why it gives no intervals; empty where it does
  std::uint64_t seed = 0;
  int walkers = 0;  ///< of each ensemble
  int ensembles = 0;
  int steps = 0;  ///< of each walker, burn-in left out
  double acceptance = kNotKnown;
  std::vector<double> autocorrelation_steps;  ///< in the order of Result::parameters, as the two below
  std::vector<double> effective_size;
  std::vector<double> split_r_hat;
  std::vector<std::vector<double>> draws;  ///< one for each parameter; not part of result.json
};

struct Provenance {
  std::string version;
  std::string table_file;
  std::string table_fingerprint;
  std::string species_file;
  std::string species_fingerprint;
  std::vector<std::string> data_sources;
  std::string constants;
  std::vector<std::pair<std::string, std::string>> options;  ///< every option in force, defaults included
};

/// One source and one species, analysed. What result.json holds, and what every output is made from.
struct Result {
  std::string source;
  std::string species;
  std::string formula;
  std::string method;
  Status status = Status::not_converged;
  std::string message;  ///< for a status other than done: what can be said, in one or two sentences
  bool temperature_fixed = false;
  Estimate temperature_k;
  Estimate column_density_cm2;
  Estimate log10_column_density_cm2;
  double correlation_ln_n_t = kNotKnown;
  double chi2 = kNotKnown;
  int dof = 0;
  double p_value = kNotKnown;  ///< NaN where dof = 0
  double partition_function = kNotKnown;
  std::string partition_function_source;
  double source_size_arcsec = kNotKnown;  ///< NaN: fills every beam
  double background_k = 0.0;
  /// What the numbers rest on beside background, filling and Q, a phrase each: "LTE: one temperature for
  /// every line", "optically thin lines".
  std::vector<std::string> assumptions;
  DiagramLine diagram_line;
  std::vector<DiagramCurve> diagram_curves;  ///< instead of diagram_line: two components, isomers apart
  Estimate source_size_fit_arcsec;           ///< where the size is fitted
  std::vector<Component> components;         ///< where there are more than one
  std::vector<FittedParameter> parameters;
  std::vector<std::vector<double>>
      parameter_covariance;  ///< rows and columns as parameters; NaN where not known
  std::vector<Alternative> alternatives;
  PosteriorSummary posterior;
  std::vector<LineResult> lines;
  std::vector<ColumnAtTemperature> columns_at_temperatures;  ///< for Status::one_line
  std::vector<Check> checks;
  std::string verdict;
  std::vector<LeftOut> leave_one_out;
  std::vector<SubsetTemperature> subset_temperatures;
  std::vector<ModelEntry> models;  ///< where models are compared
  std::string model_choice;        ///< what the comparison says, in one or two sentences
  std::vector<std::string> warnings;
  Provenance provenance;
};

}  // namespace trotline
