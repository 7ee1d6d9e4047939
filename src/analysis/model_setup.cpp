#include "model_setup.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>
#include <map>
#include <numbers>

#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/physics/angle.hpp>

#include "model_partitions.hpp"

namespace trotline {
namespace {

constexpr double kSpeedOfLightKmS = constants::kLightMPerS / 1e3;
constexpr double kLeastLnColumn = 9.21;  // 1e4 cm^-2
constexpr double kMostLnColumn = 59.87;  // 1e26 cm^-2
constexpr double kColdestModelK = 2.0;
constexpr double kHottestModelK = 5000.0;
constexpr double kAboveBackground = 1.02;  // of the background: nearer, lines vanish and N runs away
constexpr double kLimitSigma = 3.0;        // a limit without an error is taken as this many
constexpr double kMostBackgroundK = 100.0;

std::string named(const LineResult& line) {
  return fmt::format("line {} (table line {})", printable(line.transition), line.table_line);
}

const LineResult* used_line_without_width(const std::vector<PreparedLine>& lines) {
  for (const PreparedLine& line : lines) {
    if (line.result.used && !(line.result.fwhm_km_s > 0.0)) return &line.result;
  }
  return nullptr;
}

void require_width(const LineResult* line, const std::string& opacity) {
  if (line == nullptr) return;
  throw InputError({fmt::format("{} has no width, which the opacity '{}' needs", named(*line), opacity),
                    "a width for every line", "add a column 'fwhm [km/s]' or the option 'line_width'"});
}

/// Rows in the order of their data: those of one blend together.
std::vector<std::vector<std::size_t>> rows_by_datum(const std::vector<PreparedLine>& lines) {
  std::vector<std::vector<std::size_t>> data;
  std::map<std::string, std::size_t> blends;
  for (std::size_t i = 0; i < lines.size(); ++i) {
    const LineResult& line = lines[i].result;
    if (!line.used) continue;
    if (line.blend.empty()) {
      data.push_back({i});
      continue;
    }
    const auto [known, is_new] = blends.emplace(line.blend, data.size());
    if (is_new) data.emplace_back();
    data[known->second].push_back(i);
  }
  return data;
}

void require_one_measurement(const std::vector<PreparedLine>& lines, const std::vector<std::size_t>& rows) {
  const LineResult& first = lines[rows.front()].result;
  for (const std::size_t row : rows) {
    const LineResult& other = lines[row].result;
    constexpr double kSame = 1e-6;
    const auto alike = [](double a, double b) {
      return (std::isnan(a) && std::isnan(b)) || std::abs(a - b) <= kSame * std::abs(a);
    };
    if (row != rows.front() && other.transition == first.transition) {
      throw InputError(
          {fmt::format("{} stands twice in blend '{}', in table lines {} and {}", other.transition,
                       printable(first.blend), first.table_line, other.table_line),
           "each transition of a blend once"});
    }
    const bool alike_in_error = alike(first.intensity_error_k_km_s, other.intensity_error_k_km_s) &&
                                alike(first.calibration_error, other.calibration_error) &&
                                first.calibration_group == other.calibration_group &&
                                first.limit == other.limit;
    if (!alike_in_error) {
      throw InputError(
          {fmt::format(
               "the rows of blend '{}' in table lines {} and {} differ in error, calibration or limit",
               printable(first.blend), first.table_line, other.table_line),
           "one measurement: the same error, calibration and limit in each row of a blend"});
    }
    if (alike(first.intensity_k_km_s, other.intensity_k_km_s)) continue;
    throw InputError(
        {fmt::format("the rows of blend '{}' differ: {:g} K km/s in table line {}, {:g} K km/s in {}",
                     printable(first.blend), first.intensity_k_km_s, first.table_line, other.intensity_k_km_s,
                     other.table_line),
         "the intensity of the whole blend in each of its rows"});
  }
}

Measurement measurement_of(const LineResult& line, int group) {
  Measurement datum;
  datum.intensity_k_km_s = line.intensity_k_km_s;
  datum.sigma_k_km_s = line.intensity_error_k_km_s;
  datum.is_limit = line.limit;
  datum.calibration_error = line.calibration_error;
  datum.calibration_group = group;
  if (!std::isnan(datum.sigma_k_km_s)) return datum;
  if (!(line.intensity_k_km_s > 0.0)) {
    throw InputError(
        {fmt::format("{} is a limit of {:g} K km/s without an error", named(line), line.intensity_k_km_s),
         "a limit above 0, which is taken as three sigma, or a limit with its error"});
  }
  datum.sigma_k_km_s = line.intensity_k_km_s / kLimitSigma;
  return datum;
}

/// A number for each calibration group; -1 for a line whose factor is its own.
class CalibrationGroups {
 public:
  explicit CalibrationGroups(const RunOptions& options) : shared_(options.calibration_shared) {}
  int of(const LineResult& line) {
    if (line.calibration_group.empty() && !shared_) return -1;
    return numbers_.emplace(line.calibration_group, static_cast<int>(numbers_.size())).first->second;
  }

 private:
  bool shared_;
  std::map<std::string, int> numbers_;
};

ModelLine model_line(const PreparedLine& line, const PreparedLine& first, int datum,
                     const RunOptions& options) {
  ModelLine result;
  result.constants = line.constants;
  result.fwhm_km_s = line.result.fwhm_km_s;
  result.datum = datum;
  result.offset_km_s = kSpeedOfLightKmS * (1.0 - line.constants.frequency_hz / first.constants.frequency_hz);
  if (options.source_size_free || options.source_size_rad) {
    if (!(line.result.beam_fwhm_arcsec > 0.0)) {
      throw InputError({named(line.result) + " has no beam, which a source size needs", "one for every line",
                        "add a column 'beam_fwhm [arcsec]' or the option 'beam'"});
    }
  }
  // Without a source size every beam is filled, whatever its size; the checks look for a trend with it.
  if (line.result.beam_fwhm_arcsec > 0.0) result.beam_fwhm_arcsec = line.result.beam_fwhm_arcsec;
  return result;
}

void apply_prior(StateParameter& parameter, const std::optional<PriorKnowledge>& prior, double unit) {
  if (!prior) return;
  parameter.prior_mean = std::log(prior->value / unit);
  parameter.prior_sigma = prior->sigma / prior->value;
}

StateParameter column_parameter(const RunOptions& options) {
  StateParameter parameter{true, 32.0, kLeastLnColumn, kMostLnColumn};
  if (options.column_density_per_cm2) {
    parameter.free = false;
    parameter.value = std::log(*options.column_density_per_cm2);
  }
  return parameter;
}

StateParameter temperature_parameter(const Species& species, const RunOptions& options) {
  const TemperatureSpan span = temperature_span(species, options);
  StateParameter parameter{true, 0.5 * std::log(span.lowest_k * span.highest_k), std::log(span.lowest_k),
                           std::log(span.highest_k)};
  if (options.temperature_k) {
    parameter.free = false;
    parameter.value = std::log(*options.temperature_k);
  }
  apply_prior(parameter, options.temperature_prior_k, 1.0);
  return parameter;
}

StateParameter size_parameter(const std::vector<ModelLine>& lines, const RunOptions& options) {
  StateParameter parameter;
  parameter.value = std::numeric_limits<double>::infinity();
  if (options.source_size_rad) parameter.value = std::log(*options.source_size_rad / kRadPerArcsec);
  if (!options.source_size_free) return parameter;
  double least = HUGE_VAL;
  double most = 0.0;
  for (const ModelLine& line : lines) {
    least = std::min(least, line.beam_fwhm_arcsec / 50.0);
    most = std::max(most, line.beam_fwhm_arcsec * 20.0);
  }
  if (options.source_size_range_rad) {
    least = options.source_size_range_rad->low / kRadPerArcsec;
    most = options.source_size_range_rad->high / kRadPerArcsec;
    if (!(least > 0.0)) throw InputError({"source_size_range begins at 0", "sizes above zero"});
  }
  parameter = {true, 0.5 * std::log(least * most), std::log(least), std::log(most)};
  apply_prior(parameter, options.source_size_prior_rad, kRadPerArcsec);
  return parameter;
}

StateParameter background_parameter(const RunOptions& options) {
  StateParameter parameter;
  parameter.value = options.background_k;
  if (options.background_free) {
    parameter.free = true;
    parameter.lower = 0.0;
    parameter.upper = kMostBackgroundK;
  }
  return parameter;
}

std::vector<StateParameter> parameters_of(const ModelSetup& setup, const Species& species,
                                          const RunOptions& options) {
  const StateLayout& layout = setup.model->layout();
  std::vector<StateParameter> parameters(static_cast<std::size_t>(layout.size()));
  const auto at = [&](int entry) -> StateParameter& { return parameters[static_cast<std::size_t>(entry)]; };
  for (int component = 0; component < layout.components; ++component) {
    for (int isomer = 0; isomer < layout.isomers; ++isomer) {
      at(layout.ln_column(component, isomer)) = column_parameter(options);
    }
    at(layout.ln_temperature(component)) = temperature_parameter(species, options);
    at(layout.ln_size(component)) = size_parameter(setup.model->lines(), options);
  }
  at(layout.background()) = background_parameter(options);
  return parameters;
}

void require_options_agree(const RunOptions& options, const ModelKind& kind) {
  const bool several = kind.components > 1 || kind.isomers_apart;
  if (options.temperature_k && kind.components > 1) {
    throw InputError({"'temperature' is given for two components", "no 'temperature', or one component"});
  }
  if (options.column_density_per_cm2 && several) {
    throw InputError({"'column_density' is given for several components or isomers",
                      "no 'column_density', or one component with its isomers together"});
  }
  if (options.column_density_per_cm2 && options.temperature_k && !options.source_size_free) {
    throw InputError(
        {"'temperature' and 'column_density' are both given", "one of them, or a source size that is free"});
  }
}

}  // namespace

TemperatureSpan temperature_span(const Species& species, const RunOptions& options) {
  const double background = options.background_free ? 0.0 : options.background_k;
  double lowest = std::max({species.partition->lowest_k(), kColdestModelK, kAboveBackground * background});
  double highest = std::min(species.partition->highest_k(), kHottestModelK);
  if (options.temperature_range_k) {
    lowest = std::max(lowest, options.temperature_range_k->low);
    highest = std::min(highest, options.temperature_range_k->high);
  }
  if (options.temperature_k) {
    lowest = std::min(lowest, *options.temperature_k);
    highest = std::max(highest, *options.temperature_k);
  }
  if (!(lowest < highest)) {
    throw InputError(
        {fmt::format("no temperature is left between {:g} K and {:g} K", lowest, highest),
         fmt::format("temperatures above the background, inside the range of Q(T) of {}: {:g} K to {:g} K",
                     species.name, species.partition->lowest_k(), species.partition->highest_k())});
  }
  return {lowest, highest};
}

ModelKind model_kind(const std::vector<PreparedLine>& lines, const RunOptions& options,
                     std::vector<std::string>& warnings) {
  ModelKind kind{Opacity::thin, options.components, options.isomers_apart,
                 options.method == "robust" ? NoiseModel::student_t : NoiseModel::gaussian};
  const LineResult* without = used_line_without_width(lines);
  if (options.opacity == "automatic") {
    if (without == nullptr) {
      kind.opacity = Opacity::curve_of_growth;
    } else {
      warnings.push_back(
          fmt::format("{} has no width: all lines are taken as optically thin. A column "
                      "'fwhm [km/s]' or the option 'line_width' lets the fit see opacity",
                      named(*without)));
    }
  } else if (options.opacity != "thin") {
    require_width(without, options.opacity);
    kind.opacity = options.opacity == "line-centre" ? Opacity::line_centre : Opacity::curve_of_growth;
  }
  return kind;
}

ModelSetup set_up_model(const std::vector<PreparedLine>& lines, const Species& species,
                        const RunOptions& options, const ModelKind& kind) {
  require_options_agree(options, kind);
  ModelSetup setup;
  setup.kind = kind;
  setup.isomers = {""};
  if (kind.isomers_apart) {
    setup.isomers = spin_isomers(species);
    if (setup.isomers.empty()) {
      throw InputError(
          {fmt::format("{} has no spin isomers to be fitted apart", species.name), "isomers 'together'"});
    }
  }
  setup.rows_of_datum = rows_by_datum(lines);
  std::vector<ModelLine> model_lines;
  CalibrationGroups groups(options);
  for (std::size_t d = 0; d < setup.rows_of_datum.size(); ++d) {
    const auto& rows = setup.rows_of_datum[d];
    require_one_measurement(lines, rows);
    setup.problem.data.push_back(
        measurement_of(lines[rows.front()].result, groups.of(lines[rows.front()].result)));
    for (const std::size_t row : rows) {
      model_lines.push_back(model_line(lines[row], lines[rows.front()], static_cast<int>(d), options));
      if (kind.isomers_apart) {
        const auto found = std::find(setup.isomers.begin(), setup.isomers.end(), lines[row].spin);
        model_lines.back().isomer = static_cast<int>(found - setup.isomers.begin());
      }
      setup.row_of_line.push_back(row);
    }
  }
  TemperatureSpan span = temperature_span(species, options);
  for (const std::string& isomer : setup.isomers) {
    if (!isomer.empty())
      span.lowest_k = std::max(span.lowest_k, isomer_partition(species, isomer)->lowest_k());
  }
  setup.model = std::make_shared<ForwardModel>(
      std::move(model_lines), model_partitions(species, setup.isomers, span.lowest_k, span.highest_k),
      ForwardModelOptions{kind.opacity, options.source_shape, kind.components});
  setup.problem.noise = kind.noise;
  setup.problem.parameters = parameters_of(setup, species, options);
  for (int c = 0; c < kind.components; ++c) {
    auto& t = setup.problem.parameters[static_cast<std::size_t>(setup.model->layout().ln_temperature(c))];
    t.lower = std::log(span.lowest_k);
  }
  return setup;
}

}  // namespace trotline
