#include <trotline/physics/quantity.hpp>

#include <fmt/format.h>
#include <wcslib/wcsunits.h>

#include <array>
#include <cmath>
#include <mutex>
#include <optional>

#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/physics/constants.hpp>

namespace trotline {
namespace {

struct Kind {
  Dimension dimension;
  const char* fits_unit;  ///< the internal unit in the notation of the FITS standard
  const char* name;
  const char* example;
};

constexpr std::array<Kind, 15> kKinds = {{
    {Dimension::frequency, "Hz", "a frequency", "230.538 GHz"},
    {Dimension::velocity, "m/s", "a velocity", "12.5 km/s"},
    {Dimension::angle, "rad", "an angle", "27.4 arcsec"},
    {Dimension::temperature, "K", "a temperature", "2.725 K"},
    {Dimension::integrated_intensity, "K m/s", "an integrated intensity", "1.2 K km/s"},
    {Dimension::flux_times_velocity, "Jy/beam m/s", "a velocity-integrated flux density", "0.4 Jy/beam km/s"},
    {Dimension::column_density, "m-2", "a column density", "1e14 cm-2"},
    {Dimension::number_density, "m-3", "a number density", "1e5 cm-3"},
    {Dimension::wavenumber, "m-1", "a wavenumber", "3.845 cm-1"},
    {Dimension::length, "m", "a length", "1.128 Angstrom"},
    {Dimension::mass, "kg", "a mass", "12 u"},
    {Dimension::dipole_moment, "C m", "a dipole moment", "0.11 D"},
    {Dimension::time, "s", "a time", "600 s"},
    {Dimension::rate, "s-1", "a rate", "7.2e-8 s-1"},
    {Dimension::dimensionless, "", "a number", "0.1 or 10 %"},
}};

const Kind& kind_of(Dimension dimension) { return kKinds.at(static_cast<std::size_t>(dimension)); }

[[noreturn]] void refuse_unit(std::string_view unit, Dimension dimension, const std::string& why) {
  throw InputError({fmt::format("unit '{}' {}", printable(unit), why),
                    fmt::format("{} such as '{}'", name_of(dimension), example_of(dimension))});
}

/// wcslib takes powers through logarithms, so that 1000 may come back as 1000.0000000000001: a factor within
/// a few units in the last place of a power of ten is that power.
double cleaned(double scale) {
  const double power_of_ten = std::pow(10.0, std::round(std::log10(scale)));
  const bool is_rounding =
      std::abs(scale / power_of_ten - 1.0) < 8.0 * std::numeric_limits<double>::epsilon();
  return is_rounding ? power_of_ten : scale;
}

/// wcslib's conversion factor, or nothing when either unit is unknown or the two do not agree.
std::optional<double> wcslib_scale(std::string_view have, const char* want) {
  constexpr std::size_t kWcslibUnitLength = 71;  // wcsutrn() needs room in a buffer of 72 characters
  if (have.size() > kWcslibUnitLength) return std::nullopt;
  static std::mutex mutex;  // the scanner generated inside of wcslib is not promised to be reentrant
  const std::scoped_lock lock(mutex);
  std::array<char, 160> buffer{};
  std::copy(have.begin(), have.end(), buffer.begin());
  wcsutrn(0, buffer.data());
  double scale = 0.0;
  double offset = 0.0;
  double power = 1.0;
  if (wcsunits(buffer.data(), want, &scale, &offset, &power) != 0) return std::nullopt;
  if (offset != 0.0 || power != 1.0 || !(scale > 0.0) || !std::isfinite(scale)) return std::nullopt;
  return cleaned(scale);
}

/// Units that the standard names but wcslib scales otherwise, or that trade usage adds.
std::optional<double> own_scale(std::string_view unit, Dimension dimension) {
  if (dimension == Dimension::dimensionless && unit == "%") return 0.01;
  // The debye of the FITS standard, from the vintage of constants that the rest of trotline uses.
  if (dimension == Dimension::dipole_moment && (unit == "D" || unit == "debye")) return constants::kDebyeCM;
  if (dimension == Dimension::mass && unit == "u") return constants::kAtomicMassKg;
  return std::nullopt;
}

std::optional<double> find_scale(std::string_view unit, Dimension dimension) {
  if (const auto own = own_scale(unit, dimension)) return own;
  if (dimension == Dimension::dimensionless) return unit.empty() ? std::optional(1.0) : std::nullopt;
  if (unit.empty()) return std::nullopt;
  return wcslib_scale(unit, kind_of(dimension).fits_unit);
}

struct NumberAndUnit {
  std::string_view number;
  std::string_view unit;
};

/// Splits after the longest prefix made of the characters of a number.
NumberAndUnit split(std::string_view text) {
  text = trimmed(text);
  std::size_t end = text.find_first_of(" \t%");
  if (end == std::string_view::npos) {
    end = text.size();
    while (end > 0 && !parse_number(text.substr(0, end))) --end;
  }
  return {text.substr(0, end), trimmed(text.substr(end))};
}

}  // namespace

std::string_view name_of(Dimension dimension) { return kind_of(dimension).name; }

std::string_view example_of(Dimension dimension) { return kind_of(dimension).example; }

bool is_unit_of(std::string_view unit, Dimension dimension) {
  return find_scale(trimmed(unit), dimension).has_value();
}

double unit_scale(std::string_view unit, Dimension dimension) {
  const std::string_view bare = trimmed(unit);
  if (const auto scale = find_scale(bare, dimension)) return *scale;
  for (const Kind& other : kKinds) {
    if (other.dimension != dimension && find_scale(bare, other.dimension)) {
      refuse_unit(bare, dimension, fmt::format("is a unit of {}", other.name));
    }
  }
  refuse_unit(bare, dimension, "is not known");
}

double parse_quantity(std::string_view text, Dimension dimension) {
  const auto [number_text, unit] = split(text);
  const std::string expected = fmt::format("{} such as '{}'", name_of(dimension), example_of(dimension));
  const auto number = parse_number(number_text);
  if (!number || !std::isfinite(*number)) {
    throw InputError({fmt::format("'{}' does not begin with a finite number", printable(text)), expected});
  }
  if (unit.empty() && dimension != Dimension::dimensionless) {
    throw InputError({fmt::format("'{}' has no unit", printable(text)), expected});
  }
  const double value = *number * unit_scale(unit, dimension);
  if (!std::isfinite(value)) {
    throw InputError({fmt::format("'{}' is too large to be computed with", printable(text)), expected});
  }
  return value;
}

QuantityRange parse_quantity_range(std::string_view text, Dimension dimension) {
  const std::size_t dots = text.find("..");
  const std::string_view unit_example = example_of(dimension);
  if (dots == std::string_view::npos) {
    throw InputError({fmt::format("'{}' is no range", printable(text)),
                      fmt::format("two values joined by '..', each written like '{}'", unit_example)});
  }
  std::string low(trimmed(text.substr(0, dots)));
  const std::string high(trimmed(text.substr(dots + 2)));
  if (parse_number(low) && dimension != Dimension::dimensionless)
    low = fmt::format("{} {}", low, split(high).unit);
  const QuantityRange range{parse_quantity(low, dimension), parse_quantity(high, dimension)};
  if (!(range.low < range.high)) {
    throw InputError({fmt::format("the range '{}' is empty", printable(text)), "the lower value first"});
  }
  return range;
}

}  // namespace trotline
