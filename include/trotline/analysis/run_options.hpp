#pragma once

#include <cstdint>
#include <functional>
#include <optional>
#include <string>
#include <utility>
#include <vector>

#include <trotline/excitation/thin_line.hpp>
#include <trotline/physics/constants.hpp>
#include <trotline/physics/quantity.hpp>

namespace trotline {

/// What is known beforehand of a positive quantity: a value and its error, taken as normal in its logarithm.
struct PriorKnowledge {
  double value;
  double sigma;
};

/// Everything that a person may set about the analysis of one source and species. SI inside.
struct RunOptions {
  std::string method = "line";        ///< line, opacity-line, likelihood, robust
  std::string opacity = "automatic";  ///< automatic, curve-of-growth, line-centre, thin; not for `line`
  std::string intervals = "profile";  ///< profile, curvature, posterior
  std::uint64_t seed = 1;             ///< of the draws from a posterior
  bool keep_samples = false;          ///< draws of the posterior go into the result
  int components = 1;
  bool isomers_apart = false;
  bool compare_models = false;
  std::optional<double> column_density_per_cm2;  ///< N is given, only T is fitted
  std::optional<QuantityRange> temperature_range_k;
  std::optional<PriorKnowledge> temperature_prior_k;
  std::optional<QuantityRange> source_size_range_rad;
  std::optional<PriorKnowledge> source_size_prior_rad;
  bool source_size_free = false;  ///< fitted; source_size_rad is then empty
  bool background_free = false;
  std::string collisions;                 ///< path of a file of collision rates; empty: none
  std::optional<double> density_per_cm3;  ///< of the collision partner
  double background_k = constants::kCosmicBackgroundK;
  std::optional<double> source_size_rad;  ///< FWHM or diameter; without one the source fills every beam
  SourceShape source_shape = SourceShape::gaussian;
  std::optional<double> beam_fwhm_rad;  ///< for rows that give none
  std::optional<double> fwhm_km_s;      ///< line width for rows that give none
  std::optional<double> forward_efficiency;
  std::optional<double> main_beam_efficiency;
  std::optional<double> calibration_error;  ///< fraction, for rows that give none
  bool calibration_shared = false;          ///< rows without a group share one calibration factor
  std::optional<double> temperature_k;      ///< T is given, only N is fitted
  std::vector<std::string> only_lines;      ///< labels; empty: all
  std::vector<std::string> without_lines;   ///< labels
  std::optional<QuantityRange> upper_energy_k;
  std::optional<QuantityRange> frequency_hz;
  double frequency_tolerance_hz = 0.5e6;
  double least_snr = 0.0;             ///< lines with a lower W/sigma are not fitted
  std::optional<std::string> source;  ///< which source of the table
};

/// One option: the same word serves the command line (--two-words), the run description (two_words) and the
/// provenance of every output.
struct RunOption {
  std::string key;                                           ///< two_words
  std::string example;                                       ///< a valid value
  std::string help;                                          ///< one line
  std::function<void(RunOptions&, const std::string&)> set;  ///< throws InputError on a value that is none
  std::function<std::string(const RunOptions&)> show;        ///< the value in force, as text
};

/// All options, in the order in which they are documented.
[[nodiscard]] const std::vector<RunOption>& run_option_table();

/// The option of that key, or a null pointer.
[[nodiscard]] const RunOption* find_run_option(const std::string& key);

/// Sets one option from text. @throws InputError when there is no such key (with the nearest one), or when
/// the value is wrong (naming key, value and an example)
void set_run_option(RunOptions& options, const std::string& key, const std::string& value);

/// Every option with its value in force, for provenance.
[[nodiscard]] std::vector<std::pair<std::string, std::string>> shown(const RunOptions& options);

}  // namespace trotline
