#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <cstring>
#include <set>

#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/physics/constants.hpp>
#include <trotline/species/line_list.hpp>

namespace trotline {
namespace {

/// A field of the format: where it stands (columns from 1) and how a complaint speaks of it.
struct Field {
  std::size_t first;
  std::size_t width;
  const char* name;
  const char* expected;
};

constexpr Field kFrequency = {1, 13, "frequency",
                              "a number above 0 with a decimal point, e.g. '  115271.2018'"};
constexpr Field kUncertainty = {14, 8, "uncertainty", "a number with a decimal point, e.g. '  0.0005'"};
constexpr Field kIntensity = {22, 8, "log10 of intensity", "a number with a decimal point, e.g. ' -5.0105'"};
constexpr Field kFreedom = {30, 2, "degrees of freedom", "0, 2 or 3"};
constexpr Field kEnergy = {32, 10, "lower-state energy", "a number with a decimal point, e.g. '    3.8450'"};
constexpr Field kDegeneracy = {42, 3, "upper-state degeneracy",
                               "a whole number above 0, e.g. ' 21' or 'A05' for 1005"};
constexpr Field kTag = {45, 7, "species tag", "a whole number other than 0, e.g. '  28503'"};
constexpr Field kFormat = {52, 4, "quantum-number format", "a whole number that ends in 1 to 9, e.g. ' 303'"};
constexpr const char* kQuantumExpected = "a number such as '12', ' 7', '-3', 'A4' (104) or 'a4' (-14)";

constexpr std::size_t kFirstQuantum = 56;
constexpr std::size_t kFirstLowerQuantum = 68;  // up to six quantum numbers
constexpr int kQuantaOfFormat = 6;
constexpr std::size_t kShortestRow = kFirstQuantum + 1;
constexpr std::size_t kLongestRow = kFirstQuantum - 1 + 2 * 2 * LineListRow::kMostQuanta;
constexpr double kMhzPerWavenumberCm = constants::kLightMPerS * 100.0 * 1e-6;

bool is_digit(char c) { return c >= '0' && c <= '9'; }

/// A number in Fortran F notation that fills the field but for blanks at its ends. The decimal point must
/// be there: without it Fortran would supply one, and a person would read another number.
bool parse_fixed(const char* p, std::size_t width, double& value) {
  constexpr std::array<double, 16> kPowersOfTen = {1e0, 1e1, 1e2,  1e3,  1e4,  1e5,  1e6,  1e7,
                                                   1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15};
  const char* const end = p + width;
  while (p != end && *p == ' ') ++p;
  const bool negative = p != end && *p == '-';
  if (p != end && (*p == '-' || *p == '+')) ++p;
  std::int64_t digits = 0;  // 13 at most: exact in a double, so that the division below rounds once
  std::size_t count = 0;
  for (; p != end && is_digit(*p); ++p, ++count) digits = 10 * digits + (*p - '0');
  if (p == end || *p != '.') return false;
  const char* const point = p++;
  for (; p != end && is_digit(*p); ++p, ++count) digits = 10 * digits + (*p - '0');
  const auto decimals = static_cast<std::size_t>(p - point - 1);
  while (p != end && *p == ' ') ++p;
  if (p != end || count == 0) return false;
  value = static_cast<double>(negative ? -digits : digits) / kPowersOfTen[decimals];
  return true;
}

/// A whole number that ends at the end of the field.
bool parse_integer(const char* p, std::size_t width, std::int32_t& value) {
  const char* const end = p + width;
  while (p != end && *p == ' ') ++p;
  const bool negative = p != end && *p == '-';
  if (negative) ++p;
  if (p == end) return false;
  std::int32_t digits = 0;
  for (; p != end && is_digit(*p); ++p) digits = 10 * digits + (*p - '0');
  value = negative ? -digits : digits;
  return p == end;
}

/// As parse_integer, with a letter for hundreds above nine.
bool parse_degeneracy(const char* p, std::int32_t& value) {
  if (*p < 'A' || *p > 'Z') return parse_integer(p, kDegeneracy.width, value);
  if (!is_digit(p[1]) || !is_digit(p[2])) return false;
  value = 100 * (*p - 'A' + 10) + 10 * (p[1] - '0') + (p[2] - '0');
  return true;
}

/// One line of text, padded with blanks, and the complaints about it.
class RowReader {
 public:
  RowReader(std::string_view line, std::size_t number, const std::string& name)
      : length_(line.size()), number_(number), name_(name) {
    const std::size_t kept = std::min(line.size(), text_.size());
    std::memcpy(text_.data(), line.data(), kept);
    std::memset(text_.data() + kept, ' ', text_.size() - kept);
  }

  [[nodiscard]] LineListRow read(bool& in_wavenumbers) const {
    if (length_ < kShortestRow) refuse_length();
    LineListRow row;
    read_numbers(row, in_wavenumbers);
    row.degrees_of_freedom = static_cast<std::int8_t>(whole(kFreedom));
    if (row.degrees_of_freedom != 0 && row.degrees_of_freedom != 2 && row.degrees_of_freedom != 3)
      refuse(kFreedom);
    if (!parse_degeneracy(at(kDegeneracy), row.upper_degeneracy) || row.upper_degeneracy < 1)
      refuse(kDegeneracy);
    const std::int32_t tag = whole(kTag);
    if (tag == 0) refuse(kTag);
    row.measured = tag < 0;
    row.tag = std::abs(tag);
    row.quantum_format = static_cast<std::int16_t>(whole(kFormat));
    if (row.quantum_format < 1 || row.quantum_format % 10 == 0) refuse(kFormat);
    read_quanta(row);
    return row;
  }

 private:
  [[nodiscard]] const char* at(const Field& field) const { return text_.data() + field.first - 1; }

  [[nodiscard]] double number(const Field& field) const {
    double value = 0.0;
    if (!parse_fixed(at(field), field.width, value)) refuse(field);
    return value;
  }

  [[nodiscard]] std::int32_t whole(const Field& field) const {
    std::int32_t value = 0;
    if (!parse_integer(at(field), field.width, value)) refuse(field);
    return value;
  }

  void read_numbers(LineListRow& row, bool& in_wavenumbers) const {
    row.frequency_mhz = number(kFrequency);
    if (!(row.frequency_mhz > 0.0)) refuse(kFrequency);
    const double uncertainty = number(kUncertainty);
    row.frequency_sigma_mhz = std::abs(uncertainty);
    row.log10_intensity = number(kIntensity);
    row.lower_energy_per_cm = number(kEnergy);
    in_wavenumbers = uncertainty < 0.0;
    if (in_wavenumbers) convert_wavenumbers(row);
  }

  void convert_wavenumbers(LineListRow& row) const {
    constexpr double kHighestWavenumber = 1e5;
    if (row.frequency_mhz > kHighestWavenumber) {
      throw InputError(
          place(kUncertainty),
          {"the uncertainty is negative, which says that frequency and uncertainty are in cm-1, but "
           "the frequency is above 100000",
           "a positive uncertainty for a frequency in MHz"});
    }
    row.frequency_mhz *= kMhzPerWavenumberCm;
    row.frequency_sigma_mhz *= kMhzPerWavenumberCm;
  }

  void read_quanta(LineListRow& row) const {
    const int n = row.quantum_format % 10;
    row.quanta = static_cast<std::int8_t>(n);
    const std::size_t lower =
        n <= kQuantaOfFormat ? kFirstLowerQuantum : kFirstQuantum + 2 * static_cast<std::size_t>(n);
    for (std::size_t i = 0; i < static_cast<std::size_t>(n); ++i) {
      row.upper[i] = quantum(kFirstQuantum + 2 * i, "upper");
      row.lower[i] = quantum(lower + 2 * i, "lower");
    }
  }

  [[nodiscard]] std::int16_t quantum(std::size_t column, const char* state) const {
    std::int16_t value = 0;
    const char* const p = text_.data() + column - 1;
    if (!decode_quantum_number(p[0], p[1], value)) {
      const std::string name = fmt::format("quantum number of the {} state", state);
      refuse({column, 2, name.c_str(), kQuantumExpected});
    }
    return value;
  }

  [[nodiscard]] Place place(const Field& field) const { return {name_, number_, field.first}; }

  [[noreturn]] void refuse(const Field& field) const {
    const std::string_view held(at(field), field.width);
    throw InputError(place(field), {fmt::format("columns {}-{} ({}) hold '{}'", field.first,
                                                field.first + field.width - 1, field.name, printable(held)),
                                    field.expected, advice()});
  }

  [[noreturn]] void refuse_length() const {
    throw InputError(
        {name_, number_, length_},
        {fmt::format("the row ends in column {}", length_),
         fmt::format("{} columns with the quantum numbers of both states", kFirstLowerQuantum + 1)});
  }

  /// Rows copied from a search page of a catalogue stand in wider columns than its files.
  [[nodiscard]] std::string advice() const {
    double ignored = 0.0;
    const bool wide =
        parse_fixed(text_.data() + 13, 11, ignored) && parse_fixed(text_.data() + 24, 11, ignored);
    return wide ? "the row looks like one of a search result in wider columns: use the catalogue's own file"
                : "";
  }

  std::array<char, kLongestRow> text_;
  std::size_t length_;
  std::size_t number_;
  const std::string& name_;
};

std::vector<std::string> warnings_about(const std::set<std::int32_t>& tags, std::size_t in_wavenumbers) {
  std::vector<std::string> warnings;
  if (in_wavenumbers > 0) {
    warnings.push_back(fmt::format("{} frequencies have a negative uncertainty and are taken to be in cm-1",
                                   in_wavenumbers));
  }
  if (tags.size() > 1) {
    std::vector<std::string> names;
    for (const std::int32_t tag : tags) names.push_back(fmt::format("{}", tag));
    warnings.push_back(fmt::format("the list holds rows of {} tags: {}", tags.size(), listed(names)));
  }
  return warnings;
}

}  // namespace

bool decode_quantum_number(char tens, char units, std::int16_t& value) {
  if (!is_digit(units)) return false;
  const int unit = units - '0';
  int decoded = 0;
  if (tens == ' ') {
    decoded = unit;
  } else if (tens == '-') {
    decoded = -unit;
  } else if (is_digit(tens)) {
    decoded = 10 * (tens - '0') + unit;
  } else if (tens >= 'A' && tens <= 'Z') {
    decoded = 10 * (tens - 'A' + 10) + unit;
  } else if (tens >= 'a' && tens <= 'z') {
    decoded = -10 * (tens - 'a' + 1) - unit;
  } else {
    return false;
  }
  value = static_cast<std::int16_t>(decoded);
  return true;
}

LineList parse_line_list(std::string_view text, const std::string& name) {
  constexpr std::size_t kUsualRow = 81;
  LineList list;
  list.rows.reserve(text.size() / kUsualRow + 1);
  list.line_numbers.reserve(text.size() / kUsualRow + 1);
  std::size_t in_wavenumbers = 0;
  std::set<std::int32_t> tags;
  std::int32_t last_tag = 0;
  for (std::size_t number = 1; !text.empty(); ++number) {
    const std::size_t end = std::min(text.find('\n'), text.size());
    std::string_view line = text.substr(0, end);
    text.remove_prefix(std::min(end + 1, text.size()));
    if (line.ends_with('\r')) line.remove_suffix(1);
    if (line.find_first_not_of(' ') == std::string_view::npos) continue;
    bool wavenumbers = false;
    list.rows.push_back(RowReader(line, number, name).read(wavenumbers));
    list.line_numbers.push_back(static_cast<std::uint32_t>(number));
    in_wavenumbers += wavenumbers ? 1 : 0;
    const std::int32_t tag = list.rows.back().tag;
    if (tag != last_tag) tags.insert(tag);
    last_tag = tag;
  }
  if (list.rows.empty()) throw InputError({name}, {"holds no rows", "a line list in 80 columns"});
  list.warnings = warnings_about(tags, in_wavenumbers);
  return list;
}

}  // namespace trotline
