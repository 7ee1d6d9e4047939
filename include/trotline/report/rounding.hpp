#pragma once

#include <string>

namespace trotline {

/// Which characters a text may use: `unicode` writes "± × 10¹⁴ − …", `ascii` "+/- x 10^14 - ..".
enum class Glyphs { unicode, ascii };

/// A value and its error, rounded together the way the trade writes them: the error to two significant
/// digits, the value to the same decimals. Outside 0.001 <= max(|value|, error) < 100 000 the power of ten
/// is taken out of both.
///
///     62.347 , 3.09      ->  62.3 ± 3.1
///     1.2341e14, 4.3e12  ->  (1.234 ± 0.043) × 10¹⁴
///     12345, 230         ->  12350 ± 230
///
/// An error of 0, or one too small for a double to show beside the value, means exact: the value alone, to
/// six digits. A value that is NaN gives "not known", an infinite one "unbounded"; an error that is NaN,
/// infinite or negative gives the value to four digits and "(error not known)".
[[nodiscard]] std::string value_with_error(double value, double error, Glyphs glyphs = Glyphs::unicode);

/// The same with two errors, both > 0: "62.3 (+3.4, −2.9)". The smaller error sets the decimals. Errors that
/// round to the same digits are written with ±. A side without a bound (NaN or infinite) says so.
[[nodiscard]] std::string value_with_errors(double value, double minus, double plus,
                                            Glyphs glyphs = Glyphs::unicode);

/// An interval to the decimals that `error` asks for: "59.3 … 65.5", "(1.19 … 1.28) × 10¹⁴". An end that is
/// NaN or infinite is no bound: "> 59.3", "< 65.5", "no bound". Ends so far apart that the lower one would
/// round to nothing are written apart, with two significant digits each.
[[nodiscard]] std::string rounded_interval(double low, double high, double error,
                                           Glyphs glyphs = Glyphs::unicode);

/// One number to so many significant digits, with the power of ten taken out as above: "2.1 × 10¹⁴".
/// NaN gives "not known", an infinity "unbounded".
[[nodiscard]] std::string significant(double value, int digits, Glyphs glyphs = Glyphs::unicode);

/// A number with fixed decimals, with the minus sign of `glyphs` and never "-0.0"; a dash for NaN.
[[nodiscard]] std::string fixed_decimals(double value, int decimals, Glyphs glyphs = Glyphs::unicode);

}  // namespace trotline
