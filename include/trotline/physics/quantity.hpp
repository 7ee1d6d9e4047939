#pragma once

#include <string>
#include <string_view>

namespace trotline {

/// The kinds of quantity that trotline reads from text, each with the one unit that it has inside.
enum class Dimension {
  frequency,             ///< Hz
  velocity,              ///< m/s
  angle,                 ///< rad
  temperature,           ///< K
  integrated_intensity,  ///< K m/s (a brightness temperature times a velocity)
  flux_times_velocity,   ///< Jy/beam m/s
  column_density,        ///< 1/m2
  number_density,        ///< 1/m3
  wavenumber,            ///< 1/m
  length,                ///< m
  mass,                  ///< kg
  dipole_moment,         ///< C m
  time,                  ///< s
  rate,                  ///< 1/s
  dimensionless          ///< 1; "%" is understood
};

/// What the dimension is called in messages, e.g. "a frequency".
[[nodiscard]] std::string_view name_of(Dimension dimension);

/// A valid quantity of the dimension, as an example in messages, e.g. "230.538 GHz".
[[nodiscard]] std::string_view example_of(Dimension dimension);

/// How many internal units one `unit` is: scale("GHz", frequency) = 1e9.
///
/// The unit is written as the FITS standard has it (Pence et al. 2010, A&A 524, A42, section 4.3), e.g.
/// "km/s", "km s-1", "K km s-1", "MHz", "arcsec", "cm-2"; frequent other spellings ("Kelvin", "GHZ" ...)
/// are understood where wcslib translates them without ambiguity.
/// @throws InputError naming the unit and an example, if it is unknown or of another dimension
[[nodiscard]] double unit_scale(std::string_view unit, Dimension dimension);

/// True when `unit` is a known unit of the dimension; never throws.
[[nodiscard]] bool is_unit_of(std::string_view unit, Dimension dimension);

/// Reads "27.4 arcsec", "230.538 GHz", "1.2 K km/s", "10 %": a number, a space, a unit.
///
/// @return the value in the internal unit of the dimension; finite
/// @throws InputError if the text is no number with a unit (a bare number for a quantity with a
///         dimension included), if the unit is unknown or of another dimension, or if the number is not
///         finite. The message shows an example.
[[nodiscard]] double parse_quantity(std::string_view text, Dimension dimension);

/// A span of a quantity, low < high, in the internal unit.
struct QuantityRange {
  double low;
  double high;
};

/// Reads "80 GHz..116 GHz" or "80..116 GHz". @throws InputError as parse_quantity, and if low >= high
[[nodiscard]] QuantityRange parse_quantity_range(std::string_view text, Dimension dimension);

}  // namespace trotline
