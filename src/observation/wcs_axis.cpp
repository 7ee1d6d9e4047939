// Spectral axes of FITS headers, by wcslib. Symbols as in Greisen et al. 2006 (Paper III): S is the quantity
// that the axis is written in, nu0 the rest frequency.
#include <wcslib/spx.h>
#include <wcslib/wcs.h>
#include <wcslib/wcsfix.h>
#include <wcslib/wcshdr.h>

#include <array>
#include <mutex>
#include <numbers>

#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/observation/spectral_axis.hpp>
#include <trotline/physics/constants.hpp>

#include "circumstances.hpp"
#include "fits_structure.hpp"
#include "header_cards.hpp"

namespace trotline {
namespace {

constexpr std::array<const char*, 12> kTypes = {"FREQ", "AFRQ", "ENER", "WAVN", "VRAD", "WAVE",
                                                "VOPT", "ZOPT", "AWAV", "VELO", "BETA", "FELO"};

/// wcslib's header parsers and unit scanner are not promised to be reentrant.
std::mutex& wcslib_mutex() {
  static std::mutex mutex;
  return mutex;
}

/// A text must end in its card: the scanner of wcslib 7.12 reads on into the next one and overruns its buffer.
void require_closed_text(std::string_view line, const HeaderCards& cards) {
  if (line.substr(8, 2) != "= ") return;
  const std::string_view value = trimmed(line.substr(10));
  if (!value.starts_with('\'')) return;
  for (std::size_t i = 1; i < value.size(); ++i) {
    const bool doubled = value[i] == '\'' && i + 1 < value.size() && value[i + 1] == '\'';
    if (value[i] == '\'' && !doubled) return;
    i += doubled ? 1 : 0;
  }
  cards.refuse(fmt::format("the text of keyword {} does not end", printable(trimmed(line.substr(0, 8)))),
               "a text in single quotes");
}

/// The cards as wcslib can read them without harm: printable ASCII, and texts that end.
std::string harmless(const HeaderCards& cards) {
  std::string copy(cards.cards());
  for (char& c : copy) {
    if (c < ' ' || c > '~') c = ' ';
  }
  for (std::size_t at = 0; at + kFitsCard <= copy.size(); at += kFitsCard) {
    require_closed_text(std::string_view(copy).substr(at, kFitsCard), cards);
  }
  return copy;
}

/// The coordinate systems of one header.
class ParsedHeader {
 public:
  explicit ParsedHeader(const HeaderCards& cards) {
    std::string copy = harmless(cards);
    int rejected = 0;
    const int status = wcspih(copy.data(), static_cast<int>(copy.size() / kFitsCard), WCSHDR_all, 0,
                              &rejected, &count_, &systems_);
    if (status != 0)
      cards.refuse("wcslib cannot read the coordinates of the header", "a header of the FITS standard");
  }
  ~ParsedHeader() { wcsvfree(&count_, &systems_); }
  ParsedHeader(const ParsedHeader&) = delete;
  ParsedHeader& operator=(const ParsedHeader&) = delete;

  /// The primary description; nothing when the header has none.
  [[nodiscard]] wcsprm* primary() const { return count_ > 0 ? systems_ : nullptr; }

 private:
  int count_ = 0;
  wcsprm* systems_ = nullptr;
};

/// One axis cut out of a coordinate system.
class OneAxis {
 public:
  OneAxis(const wcsprm& all, int axis, const HeaderCards& cards) {
    axis_.flag = -1;
    int count = 1;
    int wanted = axis;
    if (wcssub(1, &all, &count, &wanted, &axis_) != 0 || count != 1) {
      cards.refuse(
          fmt::format("the spectral axis {} cannot be separated from the others (CDi_j or PCi_j)", axis),
          "a spectral axis that does not turn with another");
    }
  }
  ~OneAxis() { wcsfree(&axis_); }
  OneAxis(const OneAxis&) = delete;
  OneAxis& operator=(const OneAxis&) = delete;
  wcsprm* operator->() { return &axis_; }
  [[nodiscard]] wcsprm* get() { return &axis_; }

 private:
  wcsprm axis_;
};

bool is_spectral(std::string_view type) {
  const std::string start(trimmed(type.substr(0, 4)));
  const bool whole_word = type.size() <= 4 || type[4] == '-' || type[4] == ' ';
  return whole_word && std::find(kTypes.begin(), kTypes.end(), start) != kTypes.end();
}

/// Look-up tables lie in another extension, and wcslib refuses a header that points to a missing one.
void refuse_tables(const HeaderCards& cards) {
  constexpr int kMostAxes = 9;
  for (int i = 1; i <= kMostAxes; ++i) {
    const auto type = cards.text(fmt::format("CTYPE{}", i));
    if (type && type->ends_with("-TAB")) {
      cards.refuse(fmt::format("CTYPE{} is '{}'", i, printable(*type)), "an axis without look-up table");
    }
  }
}

/// The number of the one axis with a spectral CTYPE.
int find_axis(const HeaderCards& cards, const ParsedHeader& header) {
  const int axes = header.primary() == nullptr ? 0 : header.primary()->naxis;
  std::vector<int> found;
  std::vector<std::string> types;
  for (int i = 1; i <= axes; ++i) {
    const auto type = cards.text(fmt::format("CTYPE{}", i));
    if (!type) continue;
    types.push_back(fmt::format("CTYPE{} = '{}'", i, printable(*type)));
    if (is_spectral(*type)) found.push_back(i);
  }
  if (found.size() == 1) return found[0];
  const std::string listing = types.empty() ? "no keyword CTYPEn at all" : listed(types);
  cards.refuse(fmt::format("there {} spectral {}: {}", found.empty() ? "is no" : "are several",
                           found.empty() ? "axis" : "axes", listing),
               "one axis with CTYPEn FREQ, VRAD, VOPT, VELO, WAVE or another of the FITS standard");
}

/// Everything about the axis that has to be finite, present and not zero.
void require_numbers(const HeaderCards& cards, int axis) {
  (void)cards.number(fmt::format("CRPIX{}", axis));
  if (!cards.number(fmt::format("CRVAL{}", axis))) {
    cards.refuse(fmt::format("keyword CRVAL{} is missing", axis),
                 "the value of the axis at its reference channel");
  }
  const auto step = cards.number(fmt::format("CDELT{}", axis));
  const auto matrix = cards.number(fmt::format("CD{}_{}", axis, axis));
  if (!step && !matrix) {
    cards.refuse(fmt::format("keyword CDELT{} is missing", axis), "the step from channel to channel");
  }
  const auto used = matrix ? matrix : step;
  if (*used == 0.0) {
    cards.refuse(fmt::format("keyword {}{} is 0", matrix ? fmt::format("CD{}_", axis) : "CDELT", axis),
                 "a step that is not 0");
  }
}

std::size_t channels_of(const HeaderCards& cards, int axis) {
  for (const std::string& keyword : {fmt::format("ZNAXIS{}", axis), fmt::format("NAXIS{}", axis)}) {
    const auto length = cards.number(keyword);
    if (!length) continue;
    constexpr double kMost = 1e9;
    if (!(*length >= 1.0 && *length <= kMost && *length == std::floor(*length))) {
      cards.refuse(fmt::format("keyword {} is {}", keyword, *length), "a number of channels, from 1 to 1e9");
    }
    return static_cast<std::size_t>(*length);
  }
  cards.refuse(fmt::format("keyword NAXIS{} is missing", axis), "the number of channels");
}

/// Spellings of units that wcslib leaves alone.
void translate_unit(char unit[72]) {
  const std::string lower = lower_case(trimmed(unit));
  for (const char* usual : {"km/s", "m/s", "cm/s", "km s-1", "m s-1"}) {
    if (lower == usual) std::snprintf(unit, 72, "%s", usual);
  }
}

int velocity_reference(const HeaderCards& cards) {
  constexpr double kRadio = 256.0;  // tables of single-dish spectra say the convention in VELDEF
  const bool radio = !cards.text("VELREF") && cards.text("VELDEF").value_or("").starts_with("RADI");
  const double value = cards.number("VELREF").value_or(radio ? kRadio : 0.0);
  const bool known =
      value == std::floor(value) && value >= 0.0 && value < 512.0 && static_cast<int>(value) % 256 <= 7;
  if (!known)
    cards.refuse(fmt::format("keyword VELREF is {}", value), "1 to 7, or 256 more for the radio convention");
  return static_cast<int>(value);
}

RestFrame frame_of_reference(int velref) {
  using enum RestFrame;
  static constexpr std::array<RestFrame, 8> kFrames = {unknown, lsrk,       barycentric, topocentric,
                                                       lsrd,    geocentric, other,       other};
  return kFrames.at(static_cast<std::size_t>(velref % 256));
}

/// The frame: SPECSYS, else VELREF, else the older CTYPE, else what the caller states.
RestFrame frame_of(const HeaderCards& cards, std::string_view ctype, int velref, const AxisOptions& options,
                   std::vector<std::string>& warnings) {
  if (const auto specsys = cards.text("SPECSYS")) {
    const auto frame = rest_frame_named(*specsys);
    if (!frame)
      cards.refuse(fmt::format("keyword SPECSYS is '{}'", printable(*specsys)),
                   "LSRK, BARYCENT, TOPOCENT or another of the standard");
    if (lower_case(*specsys) == "heliocen")
      warnings.emplace_back("HELIOCEN is taken for BARYCENT: up to 16 m/s apart");
    return *frame;
  }
  if (const RestFrame frame = frame_of_reference(velref); frame != RestFrame::unknown) return frame;
  const auto suffix = ctype.size() > 5 ? rest_frame_named(ctype.substr(5)) : std::nullopt;
  if (suffix && *suffix != RestFrame::unknown) return *suffix;
  return options.frame.value_or(RestFrame::unknown);
}

double rest_frequency(const HeaderCards& cards, const AxisOptions& options) {
  if (options.rest_frequency_hz) return *options.rest_frequency_hz;
  if (const auto frequency = cards.first_number("RESTFRQ RESTFREQ"); frequency && *frequency != 0.0) {
    constexpr double kLeastHz = 1e6;  // below lies no line: a rest frequency in other units, or none at all
    if (*frequency < kLeastHz) {
      cards.refuse(fmt::format("keyword RESTFRQ is {} Hz", *frequency),
                   "the rest frequency of the line in Hz", "when you know it, --rest-frequency states it");
    }
    return *frequency;
  }
  const auto wavelength = cards.number("RESTWAV");
  return wavelength && *wavelength > 0.0 ? constants::kLightMPerS / *wavelength : 0.0;
}

double vacuum_wavelength(double air_m) {
  double vacuum_m = 0.0;
  int failed = 0;
  if (awavwave(0.0, 1, 1, 1, &air_m, &vacuum_m, &failed) != 0)
    return std::numeric_limits<double>::quiet_NaN();
  return vacuum_m;
}

/// Frequency of S; Paper III, tables 1 and 3. @param type  the first four letters of CTYPE
double frequency_of(std::string_view type, double s, double nu0_hz) {
  constexpr double c = constants::kLightMPerS;
  if (type == "FREQ") return s;
  if (type == "AFRQ") return s / (2.0 * std::numbers::pi);
  if (type == "ENER") return s / constants::kPlanckJS;
  if (type == "WAVN") return s * c;
  if (type == "WAVE") return c / s;
  if (type == "AWAV") return c / vacuum_wavelength(s);
  if (type == "VRAD") return nu0_hz * (1.0 - s / c);
  if (type == "VOPT") return nu0_hz / (1.0 + s / c);
  if (type == "ZOPT") return nu0_hz / (1.0 + s);
  const double beta = type == "BETA" ? s : s / c;  // BETA and VELO
  return nu0_hz * std::sqrt((1.0 - beta) / (1.0 + beta));
}

bool needs_rest_frequency(std::string_view type) {
  return type == "VRAD" || type == "VOPT" || type == "ZOPT" || type == "VELO" || type == "BETA";
}

/// S at channels `first` ... in steps of one.
Eigen::ArrayXd world_values(OneAxis& axis, double first, Eigen::Index count, const HeaderCards& cards) {
  const Eigen::ArrayXd pixels =
      Eigen::ArrayXd::LinSpaced(count, first, first + static_cast<double>(count) - 1.0);
  Eigen::ArrayXd intermediate(count);
  Eigen::ArrayXd phi(count);
  Eigen::ArrayXd theta(count);
  Eigen::ArrayXd world(count);
  Eigen::ArrayXi status(count);
  if (wcsp2s(axis.get(), static_cast<int>(count), 1, pixels.data(), intermediate.data(), phi.data(),
             theta.data(), world.data(), status.data()) != 0) {
    cards.refuse("some channels of the spectral axis have no valid coordinate",
                 "an axis that is valid in all of them");
  }
  return world;
}

class AxisReader {
 public:
  AxisReader(std::string_view header, const std::string& where, const AxisOptions& options)
      : cards_(header, where), options_(options) {}

  HeaderAxis read(bool to_lsrk) {
    refuse_tables(cards_);
    const std::scoped_lock lock(wcslib_mutex());
    const ParsedHeader header(cards_);
    const int number = find_axis(cards_, header);
    require_numbers(cards_, number);
    result_.fits_axis = number;
    OneAxis axis(*header.primary(), number, cards_);
    prepare(axis);
    fill(axis, channels_of(cards_, number));
    if (to_lsrk) move_to_lsrk(*header.primary());
    return std::move(result_);
  }

 private:
  void prepare(OneAxis& axis) {
    const std::string written = axis->ctype[0];
    const int velref = velocity_reference(cards_);
    result_.frame = frame_of(cards_, written, velref, options_, result_.warnings);
    axis->velref = velref;
    // wcslib passes over what it cannot read, such as a number in quotation marks, and goes on with its
    // default.
    axis->crval[0] = cards_.number(fmt::format("CRVAL{}", result_.fits_axis)).value_or(0.0);
    axis->crpix[0] = cards_.number(fmt::format("CRPIX{}", result_.fits_axis)).value_or(0.0);
    const auto step = cards_.number(fmt::format("CDELT{}", result_.fits_axis));
    constexpr int kHasCd = 2;
    if (step && (axis->altlin & kHasCd) == 0) axis->cdelt[0] = *step;
    translate_unit(axis->cunit[0]);
    if (trimmed(axis->cunit[0]).empty()) {
      result_.warnings.push_back(fmt::format(
          "CUNIT{} is missing: SI units are taken, as the FITS standard says", result_.fits_axis));
    }
    // An older spelling that names no frame, or FELO by itself, would not be translated without this.
    if (written == "FELO") std::snprintf(axis->ctype[0], 72, "FELO-LSR");
    (void)unitfix(0, axis.get());
    (void)spcfix(axis.get());
    axis->restfrq = rest_frequency(cards_, options_);
    axis->restwav = 0.0;
    result_.type = std::string(trimmed(axis->ctype[0]));
    const std::string_view kind = std::string_view(result_.type).substr(0, 4);
    if (needs_rest_frequency(kind) && axis->restfrq == 0.0) {
      cards_.refuse(fmt::format("keyword RESTFRQ is missing, and the axis is in {}", result_.type),
                    "a rest frequency for an axis of velocities", "when you know it, --rest-frequency states it");
    }
    if (axis->restfrq > 0.0) result_.rest_frequency_hz = axis->restfrq;
    set(axis, written);
  }

  void set(OneAxis& axis, const std::string& written) {
    const std::string unit = axis->cunit[0];
    if (const int status = wcsset(axis.get()); status != 0) {
      cards_.refuse(fmt::format("the spectral axis {} with CTYPE '{}' and CUNIT '{}' cannot be used: {}",
                                result_.fits_axis, printable(written), printable(unit), wcs_errmsg[status]),
                    "a type and a unit of the FITS standard");
    }
  }

  void fill(OneAxis& axis, std::size_t channels) {
    const std::string_view kind = std::string_view(result_.type).substr(0, 4);
    const double nu0 = result_.rest_frequency_hz.value_or(0.0);
    const bool is_linear = result_.type == "FREQ" || result_.type == "VRAD" || channels < 2;
    try {
      if (is_linear) {
        const Eigen::ArrayXd ends = world_values(axis, 1.0, 2, cards_);
        const double first = frequency_of(kind, ends(0), nu0);
        result_.axis = SpectralAxis(first, step(axis, kind, nu0, channels, first), channels);
      } else {
        Eigen::ArrayXd values = world_values(axis, 1.0, static_cast<Eigen::Index>(channels), cards_);
        for (double& value : values) value = frequency_of(kind, value, nu0);
        result_.axis = SpectralAxis(std::move(values));
      }
    } catch (const DomainError& error) {
      cards_.refuse(fmt::format("the spectral axis {} ('{}') leads to impossible frequencies ({})",
                                result_.fits_axis, printable(result_.type), error.what()),
                    "CRVAL, CDELT and CRPIX that give positive frequencies");
    }
  }

  /// Over the whole axis, so that rounding does not add up.
  double step(OneAxis& axis, std::string_view kind, double nu0, std::size_t channels, double first) {
    const auto steps = static_cast<double>(std::max<std::size_t>(channels, 2) - 1);
    const Eigen::ArrayXd last = world_values(axis, 1.0 + steps, 1, cards_);
    return (frequency_of(kind, last(0), nu0) - first) / steps;
  }

  void move_to_lsrk(const wcsprm& all) {
    if (result_.frame == RestFrame::lsrk) return;
    const auto stated = ratio_of_table_keywords();
    try {
      result_.lsrk_ratio = lsrk_frequency_ratio(result_.frame, circumstances_of(cards_, all));
      compare(stated);
    } catch (const InputError& error) {
      if (!stated)
        cards_.refuse(error.complaint().found, error.complaint().expected, error.complaint().advice);
      result_.lsrk_ratio = *stated;
    }
    result_.axis = result_.axis.scaled(result_.lsrk_ratio);
  }

  /// Tables of single-dish spectra have the velocity of the frame named in VELDEF relative to the observer,
  /// VFRAME.
  [[nodiscard]] std::optional<double> ratio_of_table_keywords() const {
    constexpr double kMostMPerS =
        6e4;  // the Earth and the Sun together do not move faster; 0 means not known
    const std::string definition = cards_.text("VELDEF").value_or("");
    const double velocity = cards_.number("VFRAME").value_or(0.0);
    const bool usable =
        result_.frame == RestFrame::topocentric && definition.ends_with("-LSR") && velocity != 0.0;
    if (!usable || std::abs(velocity) > kMostMPerS) return std::nullopt;
    const double beta = velocity / constants::kLightMPerS;
    return std::sqrt((1.0 + beta) / (1.0 - beta));
  }

  void compare(const std::optional<double>& stated) {
    if (!stated) return;
    constexpr double kTolerableMPerS = 100.0;
    const double difference_m_s = (*stated / result_.lsrk_ratio - 1.0) * constants::kLightMPerS;
    if (std::abs(difference_m_s) < kTolerableMPerS) return;
    result_.warnings.push_back(
        fmt::format("VFRAME differs by {:.3f} km/s from the velocity of the LSR computed from date, "
                    "place and direction, which was taken",
                    difference_m_s * 1e-3));
  }

  HeaderCards cards_;
  const AxisOptions& options_;
  HeaderAxis result_;
};

}  // namespace

HeaderAxis read_spectral_axis(std::string_view cards, const std::string& where, const AxisOptions& options) {
  return AxisReader(cards, where, options).read(true);
}

HeaderAxis read_spectral_axis_as_written(std::string_view cards, const std::string& where,
                                         const AxisOptions& options) {
  return AxisReader(cards, where, options).read(false);
}

}  // namespace trotline
