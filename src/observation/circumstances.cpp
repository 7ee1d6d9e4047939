#include "circumstances.hpp"

#include <erfa.h>
#include <wcslib/wcsfix.h>
#include <wcslib/wcsmath.h>

#include <numbers>

#include <trotline/base/text.hpp>

namespace trotline {
namespace {

using Direction = ObservingCircumstances::Direction;

constexpr double kRadPerDeg = std::numbers::pi / 180.0;

/// The celestial axes at the first pixel, in degrees and in the system that the header has.
std::optional<std::pair<double, double>> from_axes(const wcsprm& all, std::string& kind) {
  wcsprm pair{};
  pair.flag = -1;
  int count = 2;
  std::array<int, 2> axes = {WCSSUB_LONGITUDE, WCSSUB_LATITUDE};
  const int cut = wcssub(1, &all, &count, axes.data(), &pair);
  std::optional<std::pair<double, double>> found;
  if (cut == 0 && count == 2 && wcsset(&pair) == 0) {
    const std::array<double, 2> pixel = {1.0, 1.0};
    std::array<double, 2> intermediate{};
    std::array<double, 2> world{};
    double phi = 0.0;
    double theta = 0.0;
    int status = 0;
    if (wcsp2s(&pair, 1, 2, pixel.data(), intermediate.data(), &phi, &theta, world.data(), &status) == 0) {
      kind = std::string(std::string_view(pair.ctype[0]).substr(0, 4));
      found = std::pair(world[0], world[1]);
    }
  }
  wcsfree(&pair);
  return found;
}

/// Celestial axes without a projection ("RA", "DEC"), as tables of single-dish spectra have them.
std::optional<std::pair<double, double>> from_plain_axes(const HeaderCards& cards, std::string& kind) {
  std::optional<double> longitude;
  std::optional<double> latitude;
  for (int i = 1; i <= 4; ++i) {
    const std::string type = cards.text(fmt::format("CTYPE{}", i)).value_or("");
    const auto value = cards.number(fmt::format("CRVAL{}", i));
    if (type.starts_with("RA") || type.starts_with("GLON")) {
      longitude = value;
      kind = type.substr(0, 4);
    }
    if (type.starts_with("DEC") || type.starts_with("GLAT")) latitude = value;
  }
  if (!longitude || !latitude) return std::nullopt;
  return std::pair(*longitude, *latitude);
}

std::optional<std::pair<double, double>> from_keywords(const HeaderCards& cards) {
  const auto right_ascension = cards.number("RA");
  const auto declination = cards.number("DEC");
  if (!right_ascension || !declination) return std::nullopt;
  return std::pair(*right_ascension, *declination);
}

bool is_b1950(const HeaderCards& cards) {
  const std::string system = cards.text("RADESYS").value_or(cards.text("RADECSYS").value_or(""));
  if (!system.empty()) return system == "FK4";
  const auto equinox = cards.first_number("EQUINOX EPOCH");
  return equinox && *equinox < 1984.0;  // the FITS standard, version 4.0, table 24: FK4 before 1984
}

/// To ICRS; the difference between FK5 and ICRS is far below what a velocity shows.
Direction to_icrs(double longitude_deg, double latitude_deg, const std::string& kind,
                  const HeaderCards& cards) {
  Direction direction{longitude_deg * kRadPerDeg, latitude_deg * kRadPerDeg};
  if (kind.starts_with("GLON")) {
    eraG2icrs(direction.right_ascension_rad, direction.declination_rad, &direction.right_ascension_rad,
              &direction.declination_rad);
  } else if (is_b1950(cards)) {
    eraFk45z(direction.right_ascension_rad, direction.declination_rad, 1950.0, &direction.right_ascension_rad,
             &direction.declination_rad);
  }
  return direction;
}

std::optional<Direction> direction_of(const HeaderCards& cards, const wcsprm& all) {
  std::string kind = "RA--";
  auto found = from_axes(all, kind);
  if (!found) found = from_plain_axes(cards, kind);
  if (!found) found = from_keywords(cards);
  if (!found || !(std::abs(found->second) <= 90.0 && std::abs(found->first) <= 720.0)) return std::nullopt;
  if (!kind.starts_with("RA") && !kind.starts_with("GLON"))
    return std::nullopt;  // ecliptic and other systems
  return to_icrs(found->first, found->second, kind, cards);
}

std::optional<ObservingCircumstances::Site> site_of(const HeaderCards& cards) {
  const auto x = cards.number("OBSGEO-X");
  const auto y = cards.number("OBSGEO-Y");
  const auto z = cards.number("OBSGEO-Z");
  if (x && y && z) {
    constexpr double kLeastM = 6.3e6;  // zeros stand in some headers for a site that is not known
    const bool on_earth = std::hypot(*x, *y, *z) > kLeastM;
    return on_earth ? std::optional(ObservingCircumstances::Site{*x, *y, *z}) : std::nullopt;
  }
  const auto longitude = cards.first_number("OBSGEO-L SITELONG");
  const auto latitude = cards.first_number("OBSGEO-B SITELAT");
  if (!longitude || !latitude || std::abs(*latitude) > 90.0) return std::nullopt;
  double xyz[3];
  const double height_m = cards.first_number("OBSGEO-H SITEELEV").value_or(0.0);
  if (eraGd2gc(1, *longitude * kRadPerDeg, *latitude * kRadPerDeg, height_m, xyz) != 0) return std::nullopt;
  return ObservingCircumstances::Site{xyz[0], xyz[1], xyz[2]};
}

/// The middle of the observation where the header gives it, else its beginning.
void read_date(const HeaderCards& cards, ObservingCircumstances& result) {
  result.mjd_utc = cards.first_number("MJD-AVG MJD-OBS");
  if (result.mjd_utc) return;
  for (const char* keyword : {"DATE-AVG", "DATE-OBS"}) {
    const auto date = cards.text(keyword);
    if (!date) continue;
    wcsprm holder{};
    holder.flag = -1;
    if (wcsini(1, 1, &holder) == 0) {
      std::snprintf(holder.dateobs, sizeof holder.dateobs, "%s", date->c_str());
      (void)datfix(&holder);
      if (holder.mjdobs != UNDEFINED) result.mjd_utc = holder.mjdobs;
    }
    wcsfree(&holder);
    result.has_time_of_day = date->find('T') != std::string::npos;
    return;
  }
}

}  // namespace

ObservingCircumstances circumstances_of(const HeaderCards& cards, const wcsprm& all) {
  ObservingCircumstances result;
  result.direction = direction_of(cards, all);
  result.site = site_of(cards);
  read_date(cards, result);
  return result;
}

}  // namespace trotline
