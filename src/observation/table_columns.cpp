#include <array>
#include <set>

#include <trotline/base/text.hpp>
#include <trotline/physics/quantity.hpp>

#include "raw_table.hpp"

namespace trotline::raw {
namespace {

enum class Name : std::size_t {
  transition,
  frequency,
  intensity,
  intensity_error,
  limit,
  scale,
  source,
  species,
  beam_fwhm,
  fwhm,
  calibration_group,
  calibration_error,
  forward_efficiency,
  main_beam_efficiency,
  blend,
  note,
  count
};

enum class Kind { text, flag, number, intensity };

struct Known {
  const char* name;
  Kind kind;
  Dimension dimension = Dimension::dimensionless;
  double per_internal = 1.0;  ///< row units per internal unit of the dimension
};

constexpr std::size_t kCount = static_cast<std::size_t>(Name::count);
constexpr double kKmPerM = 1e-3;

constexpr std::array<Known, kCount> kKnown = {{
    {"transition", Kind::text},
    {"frequency", Kind::number, Dimension::frequency},
    {"intensity", Kind::intensity},
    {"intensity_error", Kind::intensity},
    {"limit", Kind::flag},
    {"scale", Kind::text},
    {"source", Kind::text},
    {"species", Kind::text},
    {"beam_fwhm", Kind::number, Dimension::angle},
    {"fwhm", Kind::number, Dimension::velocity, kKmPerM},
    {"calibration_group", Kind::text},
    {"calibration_error", Kind::number},
    {"forward_efficiency", Kind::number},
    {"main_beam_efficiency", Kind::number},
    {"blend", Kind::text},
    {"note", Kind::text},
}};

const Known& known(Name name) { return kKnown.at(static_cast<std::size_t>(name)); }

std::vector<std::string> known_names() {
  std::vector<std::string> names;
  for (const Known& column : kKnown) names.emplace_back(column.name);
  return names;
}

/// Where a known column stands in the table, and what its numbers are multiplied with.
struct Found {
  std::size_t index = 0;
  double factor = 1.0;
};

class Interpreter {
 public:
  explicit Interpreter(const Table& table) : table_(table) {
    result_.file = table.file;
    find_columns();
    require_columns();
  }

  IntensityTable read() {
    if (table_.rows.empty()) {
      throw InputError(header(), {"the table has no row", "one row for each line at least"});
    }
    result_.rows.reserve(table_.rows.size());
    for (const Row& row : table_.rows) result_.rows.push_back(read_row(row));
    return std::move(result_);
  }

 private:
  [[nodiscard]] Place header() const { return Place{table_.file, table_.header_line}; }
  [[nodiscard]] bool has(Name name) const { return found_[static_cast<std::size_t>(name)].has_value(); }

  void find_columns() {
    std::set<std::string> seen;
    for (std::size_t i = 0; i < table_.columns.size(); ++i) {
      const std::string name = lower_case(trimmed(table_.columns[i].name));
      if (name.empty()) {
        throw InputError(header(), {fmt::format("column {} has no name", i + 1), "a name for every column"});
      }
      if (!seen.insert(name).second) {
        throw InputError(header(), {fmt::format("column '{}' stands there twice", printable(name)),
                                    "each column once (upper and lower case are the same)"});
      }
      adopt(i, name);
    }
  }

  void adopt(std::size_t index, const std::string& name) {
    const auto place =
        std::find_if(kKnown.begin(), kKnown.end(), [&](const Known& k) { return name == k.name; });
    if (place == kKnown.end()) {
      std::string warning = fmt::format("column '{}' is not known and was passed over", printable(name));
      const std::string guess = did_you_mean(name, known_names());
      result_.warnings.push_back(guess.empty() ? warning : warning + "; " + guess);
      return;
    }
    const Column& column = table_.columns[index];
    if (!column.trouble.empty()) {
      throw InputError(header(), {fmt::format("column '{}' {}", name, column.trouble), "one value a row"});
    }
    found_[static_cast<std::size_t>(place - kKnown.begin())] = Found{index, factor_of(*place, column)};
  }

  double factor_of(const Known& column, const Column& as_written) {
    const std::string unit = as_written.unit.value_or("");
    if (column.kind == Kind::intensity) return intensity_factor(column, unit);
    if (column.kind != Kind::number) {
      if (unit.empty()) return 1.0;
      throw InputError(header(), {fmt::format("column '{}' has the unit '{}'", column.name, printable(unit)),
                                  "no unit, because it holds no quantity"});
    }
    if (unit.empty() && column.dimension != Dimension::dimensionless)
      refuse_no_unit(column, column.dimension);
    return scaled(column, unit, column.dimension) * column.per_internal;
  }

  /// Intensity and its error come in K km/s or in Jy/beam km/s, both in the same one.
  double intensity_factor(const Known& column, const std::string& unit) {
    if (unit.empty()) refuse_no_unit(column, Dimension::integrated_intensity);
    const bool flux = is_unit_of(unit, Dimension::flux_times_velocity);
    if (is_flux_ && *is_flux_ != flux) {
      throw InputError(header(), {fmt::format("column '{}' has the unit '{}'", column.name, printable(unit)),
                                  "the same kind of unit for intensity and intensity_error"});
    }
    const double factor =
        scaled(column, unit, flux ? Dimension::flux_times_velocity : Dimension::integrated_intensity);
    is_flux_ = flux;
    return factor * kKmPerM;
  }

  [[noreturn]] void refuse_no_unit(const Known& column, Dimension dimension) const {
    const std::string_view example = example_of(dimension);
    throw InputError(header(), {fmt::format("column '{}' has no unit", column.name),
                                fmt::format("the unit of {}, such as '{}', {}", name_of(dimension),
                                            example.substr(example.find(' ') + 1), table_.unit_place)});
  }

  [[nodiscard]] double scaled(const Known& column, const std::string& unit, Dimension dimension) const {
    try {
      return unit_scale(unit, dimension);
    } catch (const InputError& error) {
      throw InputError(header(), {fmt::format("column '{}': {}", column.name, error.complaint().found),
                                  error.complaint().expected});
    }
  }

  void require_columns() const {
    const auto missing = [&](const char* what) {
      std::vector<std::string> names;
      for (const Column& column : table_.columns) names.push_back(printable(column.name));
      std::string guess;
      for (const std::string& name : names) {
        if (guess.empty() && nearest_name(name, {what}))
          guess = fmt::format("did you mean that by '{}'?", name);
      }
      throw InputError(header(), {fmt::format("there is no column '{}' among {}", what, listed(names)),
                                  fmt::format("a column '{}'", what), guess});
    };
    if (!has(Name::intensity)) missing("intensity");
    if (!has(Name::intensity_error) && !has(Name::limit)) missing("intensity_error");
    if (!has(Name::transition) && !has(Name::frequency)) missing("frequency");
  }

  [[nodiscard]] const std::string* cell(const Row& row, Name name) const {
    const auto& found = found_[static_cast<std::size_t>(name)];
    if (!found || row.cells[found->index].empty()) return nullptr;
    return &row.cells[found->index];
  }

  [[noreturn]] void refuse(const Row& row, Name name, const std::string& expected,
                           const std::string& advice = {}) const {
    const std::string* text = cell(row, name);
    const std::string found = text == nullptr
                                  ? fmt::format("column '{}' is empty", known(name).name)
                                  : fmt::format("column '{}' holds '{}'", known(name).name, printable(*text));
    throw InputError(Place{table_.file, row.line}, {found, expected, advice});
  }

  [[nodiscard]] std::optional<std::string> text(const Row& row, Name name) const {
    const std::string* found = cell(row, name);
    return found == nullptr ? std::nullopt : std::optional(*found);
  }

  [[nodiscard]] std::optional<double> number(const Row& row, Name name) const {
    const std::string* found = cell(row, name);
    if (found == nullptr) return std::nullopt;
    const auto value = parse_number(*found);
    if (!value) refuse(row, name, "a number");
    if (!std::isfinite(*value))
      refuse(row, name, "a finite number", "leave the cell empty where nothing is known");
    const double scaled_value = *value * found_[static_cast<std::size_t>(name)]->factor;
    if (!std::isfinite(scaled_value)) refuse(row, name, "a number that can be computed with");
    return scaled_value;
  }

  [[nodiscard]] std::optional<double> positive(const Row& row, Name name) const {
    const auto value = number(row, name);
    if (value && !(*value > 0.0)) refuse(row, name, "a number above 0");
    return value;
  }

  /// A fraction: 1 or more is most likely a percentage whose unit was forgotten.
  [[nodiscard]] std::optional<double> fraction(const Row& row, Name name, bool zero_and_not_one) const {
    const auto value = number(row, name);
    if (!value) return value;
    const bool good = zero_and_not_one ? *value >= 0.0 && *value < 1.0 : *value > 0.0 && *value <= 1.0;
    if (!good) {
      refuse(row, name, zero_and_not_one ? "a fraction from 0 to below 1" : "a fraction above 0 and up to 1",
             "give a percentage with the unit '%'");
    }
    return value;
  }

  [[nodiscard]] bool flag(const Row& row, Name name) const {
    const std::string* found = cell(row, name);
    if (found == nullptr) return false;
    const std::string word = lower_case(*found);
    if (word == "true" || word == "yes" || word == "1" || word == "t") return true;
    if (word == "false" || word == "no" || word == "0" || word == "f") return false;
    refuse(row, name, "true or false (or yes/no, 1/0, T/F)");
  }

  [[nodiscard]] IntensityScale scale(const Row& row) const {
    const bool flux = is_flux_.value_or(false);
    const std::string* found = cell(row, Name::scale);
    if (found == nullptr) return flux ? IntensityScale::flux_per_beam : IntensityScale::main_beam;
    const std::string word = lower_case(*found);
    if (word == "flux_per_beam" && flux) return IntensityScale::flux_per_beam;
    if ((word == "tmb" || word == "t_mb") && !flux) return IntensityScale::main_beam;
    if ((word == "ta*" || word == "t_a*") && !flux) return IntensityScale::antenna;
    refuse(row, Name::scale, flux ? "flux_per_beam, because the intensities are in Jy/beam" : "Tmb or TA*");
  }

  void read_intensity(const Row& row, IntensityRow& result) const {
    const auto intensity = number(row, Name::intensity);
    if (!intensity) refuse(row, Name::intensity, "a number");
    result.intensity = *intensity;
    result.is_limit = flag(row, Name::limit);
    if (result.is_limit && !(*intensity > 0.0)) refuse(row, Name::intensity, "an upper limit above 0");
    const auto sigma = positive(row, Name::intensity_error);
    if (!sigma && !result.is_limit) {
      if (has(Name::intensity_error)) refuse(row, Name::intensity_error, "a standard error above 0");
      throw InputError(Place{table_.file, row.line}, {"this measurement has no error, and there is no column "
                                                      "'intensity_error'",
                                                      "the column; only upper limits may go without"});
    }
    result.intensity_sigma = sigma.value_or(std::numeric_limits<double>::quiet_NaN());
  }

  void read_calibration(const Row& row, IntensityRow& result) const {
    result.calibration_group = text(row, Name::calibration_group);
    result.calibration_error = fraction(row, Name::calibration_error, true);
    result.forward_efficiency = fraction(row, Name::forward_efficiency, false);
    result.main_beam_efficiency = fraction(row, Name::main_beam_efficiency, false);
    if (result.forward_efficiency && result.main_beam_efficiency &&
        *result.main_beam_efficiency > *result.forward_efficiency) {
      refuse(row, Name::main_beam_efficiency, "a fraction not above forward_efficiency");
    }
  }

  [[nodiscard]] IntensityRow read_row(const Row& row) const {
    IntensityRow result;
    result.line_number = row.line;
    result.transition = text(row, Name::transition);
    result.frequency_hz = positive(row, Name::frequency);
    if (!result.transition && !result.frequency_hz) {
      throw InputError(Place{table_.file, row.line}, {"this row gives neither a transition nor a frequency",
                                                      "one of them, to know which line it is"});
    }
    read_intensity(row, result);
    result.scale = scale(row);
    result.source = text(row, Name::source);
    result.species = text(row, Name::species);
    result.beam_fwhm_rad = positive(row, Name::beam_fwhm);
    result.fwhm_km_s = positive(row, Name::fwhm);
    read_calibration(row, result);
    result.blend = text(row, Name::blend);
    result.note = text(row, Name::note);
    return result;
  }

  const Table& table_;
  std::array<std::optional<Found>, kCount> found_ = {};
  std::optional<bool> is_flux_;  ///< nothing until a column of intensities was met
  IntensityTable result_;
};

}  // namespace

void check_header(const Table& table) { Interpreter{table}; }

IntensityTable interpret(const Table& table) { return Interpreter(table).read(); }

}  // namespace trotline::raw
