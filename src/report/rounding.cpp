#include <fmt/format.h>

#include <algorithm>
#include <charconv>
#include <cmath>
#include <limits>
#include <utility>

#include <trotline/report/rounding.hpp>

namespace trotline {
namespace {

/// How a group of numbers is written: divided by ten to the exponent, with so many decimals. Negative
/// decimals round to tens, hundreds, ...
struct Form {
  int exponent = 0;
  int decimals = 0;
};

/// Digits past which a double has nothing to say.
constexpr int kMostDigits = 15;

/// Power of ten of the first digit, after rounding to `digits` significant digits.
int leading_power(double number, int digits) {
  const std::string text = fmt::format("{:.{}e}", std::abs(number), digits - 1);
  return std::stoi(text.substr(text.find('e') + 1));
}

/// Power of ten of the second significant digit of an error.
int last_power(double error) { return leading_power(error, 2) - 1; }

/// number / 10^exponent by moving the decimal point: no overflow on the way, whatever the exponent.
double without_power(double number, int exponent) {
  const std::string text = fmt::format("{:.17e}", number);
  const std::size_t split = text.find('e');
  const int power = std::stoi(text.substr(split + 1)) - exponent;
  const std::string moved = fmt::format("{}e{}", text.substr(0, split), power);
  double result = 0.0;
  std::from_chars(moved.data(), moved.data() + moved.size(), result);
  return result;
}

/// @param magnitude  the largest number of the group  @param last  power of ten of the last digit wanted
Form form_for(double magnitude, int last) {
  if (magnitude == 0.0) return {0, -last};
  const int wanted = leading_power(magnitude, kMostDigits) - last + 1;
  const int leading = leading_power(magnitude, std::clamp(wanted, 1, kMostDigits));
  last = std::max(last, leading - kMostDigits);
  if (leading >= -3 && leading < 5) return {0, -last};
  return {leading, leading - last};
}

const char* minus_of(Glyphs glyphs) { return glyphs == Glyphs::unicode ? "−" : "-"; }

bool is_nothing(const std::string& digits) { return digits.find_first_of("123456789") == std::string::npos; }

/// "-1.2" with the sign of `glyphs`; "-0.0" without one.
std::string signed_text(std::string text, Glyphs glyphs) {
  if (text.empty() || text.front() != '-') return text;
  text.erase(0, 1);
  return is_nothing(text) ? text : minus_of(glyphs) + text;
}

std::string digits_of(double number, const Form& form, Glyphs glyphs) {
  if (form.decimals >= 0) {
    return signed_text(fmt::format("{:.{}f}", without_power(number, form.exponent), form.decimals), glyphs);
  }
  const double step = std::pow(10.0, -form.decimals);
  return signed_text(fmt::format("{:.0f}", std::round(number / step) * step), glyphs);
}

std::string power_text(int exponent, Glyphs glyphs) {
  if (glyphs == Glyphs::ascii) return fmt::format(" x 10^{}", exponent);
  static const char* const kRaised[] = {"⁰", "¹", "²", "³", "⁴", "⁵", "⁶", "⁷", "⁸", "⁹"};
  std::string text = exponent < 0 ? " × 10⁻" : " × 10";
  for (const char digit : std::to_string(std::abs(exponent))) text += kRaised[digit - '0'];
  return text;
}

/// `inner` with the power of ten behind it, in parentheses where it is more than one number.
std::string with_power(const std::string& inner, int exponent, bool several, Glyphs glyphs) {
  if (exponent == 0) return inner;
  return (several ? "(" + inner + ")" : inner) + power_text(exponent, glyphs);
}

bool is_error(double error) { return std::isfinite(error) && error > 0.0; }

/// True when a double holds the error's digits beside the value's.
bool resolves(double value, double error) { return error > std::abs(value) * 1e-14; }

std::string exact(double value, Glyphs glyphs) {
  const std::string plain = fmt::format("{:.6g}", value);
  const std::size_t power = plain.find('e');
  if (power == std::string::npos) return signed_text(plain, glyphs);
  const auto is_digit = [](char c) { return c >= '0' && c <= '9'; };
  const auto digits =
      std::count_if(plain.begin(), plain.begin() + static_cast<std::ptrdiff_t>(power), is_digit);
  return significant(value, static_cast<int>(digits), glyphs);
}

const char* dots_of(Glyphs glyphs) { return glyphs == Glyphs::unicode ? " … " : " .. "; }

/// Both ends to two significant digits, each with its own power of ten.
std::string wide_interval(double low, double high, Glyphs glyphs) {
  return significant(low, 2, glyphs) + dots_of(glyphs) + significant(high, 2, glyphs);
}

std::string one_sided(const char* sign, double end, double error, Glyphs glyphs) {
  const bool by_error = is_error(error) && resolves(end, error) && std::abs(end) > error / 10.0;
  if (!by_error) return sign + significant(end, 2, glyphs);
  const Form form = form_for(std::abs(end), last_power(error));
  return sign + with_power(digits_of(end, form, glyphs), form.exponent, false, glyphs);
}

}  // namespace

std::string significant(double value, int digits, Glyphs glyphs) {
  if (std::isnan(value)) return "not known";
  if (std::isinf(value)) return "unbounded";
  if (value == 0.0) return "0";
  const Form form = form_for(std::abs(value), leading_power(value, digits) - digits + 1);
  return with_power(digits_of(value, form, glyphs), form.exponent, false, glyphs);
}

std::string fixed_decimals(double value, int decimals, Glyphs glyphs) {
  if (std::isnan(value)) return glyphs == Glyphs::unicode ? "–" : "-";
  return signed_text(fmt::format("{:.{}f}", value, decimals), glyphs);
}

std::string value_with_error(double value, double error, Glyphs glyphs) {
  if (!std::isfinite(value)) return significant(value, 4, glyphs);
  if (error == 0.0 || (is_error(error) && !resolves(value, error))) return exact(value, glyphs);
  if (!is_error(error)) return significant(value, 4, glyphs) + " (error not known)";
  const Form form = form_for(std::max(std::abs(value), error), last_power(error));
  const char* const sign = glyphs == Glyphs::unicode ? " ± " : " +/- ";
  return with_power(digits_of(value, form, glyphs) + sign + digits_of(error, form, glyphs), form.exponent,
                    true, glyphs);
}

std::string value_with_errors(double value, double minus, double plus, Glyphs glyphs) {
  const bool below = is_error(minus);
  const bool above = is_error(plus);
  if (!std::isfinite(value) || (!below && !above)) {
    return value_with_error(value, std::numeric_limits<double>::quiet_NaN(), glyphs);
  }
  const double smaller = !below ? plus : !above ? minus : std::min(minus, plus);
  if (!resolves(value, smaller)) return exact(value, glyphs);
  const double largest = std::max({std::abs(value), below ? minus : 0.0, above ? plus : 0.0});
  const Form form = form_for(largest, last_power(smaller));
  const std::string down = below ? digits_of(minus, form, glyphs) : "no bound";
  const std::string up = above ? digits_of(plus, form, glyphs) : "no bound";
  if (down == up) return value_with_error(value, smaller, glyphs);
  const std::string text =
      fmt::format("{} ({}{}, {}{})", digits_of(value, form, glyphs), above ? "+" : "above: ", up,
                  below ? minus_of(glyphs) : "below: ", down);
  return with_power(text, form.exponent, true, glyphs);
}

std::string rounded_interval(double low, double high, double error, Glyphs glyphs) {
  const bool below = std::isfinite(low);
  const bool above = std::isfinite(high);
  if (!below && !above) return "no bound";
  if (!above) return one_sided("> ", low, error, glyphs);
  if (!below) return one_sided("< ", high, error, glyphs);
  const double step = is_error(error) ? error : (high - low) / 2.0;
  if (!(step > 0.0) || !resolves(high, step)) return wide_interval(low, high, glyphs);
  const Form form = form_for(std::max(std::abs(low), std::abs(high)), last_power(step));
  const std::string start = digits_of(low, form, glyphs);
  if (low != 0.0 && is_nothing(start)) return wide_interval(low, high, glyphs);
  return with_power(start + dots_of(glyphs) + digits_of(high, form, glyphs), form.exponent, true, glyphs);
}

}  // namespace trotline
