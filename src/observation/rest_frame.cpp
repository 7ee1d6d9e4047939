#include <erfa.h>

#include <array>
#include <numbers>

#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/observation/rest_frame.hpp>
#include <trotline/physics/constants.hpp>

namespace trotline {
namespace {

constexpr double kRadPerDeg = std::numbers::pi / 180.0;
constexpr double kSecondsPerDay = 86400.0;
constexpr double kAstronomicalUnitM = 149597870700.0;  // exact: IAU 2012 resolution B2
constexpr double kMjdZero = 2400000.5;

Eigen::Vector3d unit_vector(double longitude_rad, double latitude_rad) {
  return {std::cos(latitude_rad) * std::cos(longitude_rad), std::cos(latitude_rad) * std::sin(longitude_rad),
          std::sin(latitude_rad)};
}

/// 18h, +30 deg of B1900 precessed to J2000: 18h 03m 50.29s, +30d 00' 16.8" (Newcomb's precession; the same
/// apex is printed in the documentation of several observatories, common practice).
Eigen::Vector3d solar_motion_lsrk_m_s() {
  const double right_ascension = 15.0 * (18.0 + 3.0 / 60.0 + 50.29 / 3600.0) * kRadPerDeg;
  return 20e3 * unit_vector(right_ascension, (30.0 + 16.8 / 3600.0) * kRadPerDeg);
}

/// (U, V, W) = (9, 12, 7) km/s in galactic axes.
Eigen::Vector3d solar_motion_lsrd_m_s() {
  const Eigen::Vector3d galactic(9e3, 12e3, 7e3);
  double right_ascension = 0.0;
  double declination = 0.0;
  eraG2icrs(std::atan2(galactic.y(), galactic.x()), std::asin(galactic.z() / galactic.norm()),
            &right_ascension, &declination);
  return galactic.norm() * unit_vector(right_ascension, declination);
}

struct Instant {
  double tt;  ///< days after MJD zero, terrestrial time
  double utc;
};

Instant instant_of(double mjd_utc) {
  double tai1 = 0.0;
  double tai2 = 0.0;
  double tt1 = 0.0;
  double tt2 = 0.0;
  // A year outside of the table of leap seconds costs some seconds, which is below 0.1 m/s.
  if (eraUtctai(kMjdZero, mjd_utc, &tai1, &tai2) < 0 || eraTaitt(tai1, tai2, &tt1, &tt2) != 0) {
    throw InputError(
        {"the date of the observation cannot be used", "a date between the years 1960 and 2100"});
  }
  return {(tt1 - kMjdZero) + tt2, mjd_utc};
}

Eigen::Vector3d earth_velocity_m_s(const Instant& instant) {
  double heliocentric[2][3];
  double barycentric[2][3];
  eraEpv00(kMjdZero, instant.tt, heliocentric, barycentric);
  return Eigen::Vector3d(barycentric[1][0], barycentric[1][1], barycentric[1][2]) *
         (kAstronomicalUnitM / kSecondsPerDay);
}

/// Velocity of the site with the turning Earth, on the axes of the ICRS.
Eigen::Vector3d site_velocity_m_s(const Instant& instant, const ObservingCircumstances::Site& site) {
  double xyz[3] = {site.x_m, site.y_m, site.z_m};
  double longitude = 0.0;
  double latitude = 0.0;
  double height = 0.0;
  eraGc2gd(1, xyz, &longitude, &latitude, &height);
  double of_date[2][3];
  eraPvtob(longitude, latitude, height, 0.0, 0.0, 0.0, eraEra00(kMjdZero, instant.utc), of_date);
  double celestial_to_intermediate[3][3];
  eraC2i06a(kMjdZero, instant.tt, celestial_to_intermediate);
  double velocity[3];
  eraTrxp(celestial_to_intermediate, of_date[1], velocity);
  return {velocity[0], velocity[1], velocity[2]};
}

[[noreturn]] void refuse(RestFrame frame, const char* missing) {
  throw InputError(
      {fmt::format("the spectral axis is in the frame {} and {} is missing", name_of(frame), missing),
       "what it takes to compute the velocity of that frame relative to the LSR"});
}

/// Velocity relative to the barycentre of an observer at rest in the frame.
Eigen::Vector3d velocity_of(RestFrame frame, const ObservingCircumstances& circumstances) {
  if (frame == RestFrame::lsrk) return -solar_motion_lsrk_m_s();
  if (frame == RestFrame::lsrd) return -solar_motion_lsrd_m_s();
  if (frame == RestFrame::barycentric) return Eigen::Vector3d::Zero();
  if (!circumstances.mjd_utc) refuse(frame, "the date of the observation (DATE-OBS or MJD-OBS)");
  const Instant instant = instant_of(*circumstances.mjd_utc);
  const Eigen::Vector3d earth = earth_velocity_m_s(instant);
  if (frame == RestFrame::geocentric) return earth;
  if (!circumstances.has_time_of_day) refuse(frame, "the time of day in DATE-OBS (or MJD-OBS)");
  if (!circumstances.site) refuse(frame, "the place of the telescope (OBSGEO-X, OBSGEO-Y, OBSGEO-Z)");
  return earth + site_velocity_m_s(instant, *circumstances.site);
}

/// The factor by which an observer moving with v sees a frequency of the barycentre raised: Doppler's formula
/// for the radial part of v alone, as Paper III has it.
double blue_shift(const Eigen::Vector3d& velocity_m_s, const Eigen::Vector3d& towards) {
  const double beta = velocity_m_s.dot(towards) / constants::kLightMPerS;
  return std::sqrt((1.0 + beta) / (1.0 - beta));
}

}  // namespace

std::string_view name_of(RestFrame frame) {
  static constexpr std::array<std::string_view, 7> kNames = {"LSRK",     "LSRD",  "BARYCENT", "GEOCENTR",
                                                             "TOPOCENT", "other", "unknown"};
  return kNames.at(static_cast<std::size_t>(frame));
}

std::optional<RestFrame> rest_frame_named(std::string_view name) {
  using enum RestFrame;
  static const std::map<std::string, RestFrame> kFrames = {{"", unknown},
                                                           {"lsrk", lsrk},
                                                           {"lsr", lsrk},
                                                           {"lsrd", lsrd},
                                                           {"lsd", lsrd},
                                                           {"barycent", barycentric},
                                                           {"barycentric", barycentric},
                                                           {"bary", barycentric},
                                                           {"bar", barycentric},
                                                           {"heliocen", barycentric},
                                                           {"heliocentric", barycentric},
                                                           {"hel", barycentric},
                                                           {"helio", barycentric},
                                                           {"geocentr", geocentric},
                                                           {"geocentric", geocentric},
                                                           {"geo", geocentric},
                                                           {"topocent", topocentric},
                                                           {"topocentric", topocentric},
                                                           {"topo", topocentric},
                                                           {"obs", topocentric},
                                                           {"top", topocentric},
                                                           {"source", other},
                                                           {"galactoc", other},
                                                           {"localgrp", other},
                                                           {"cmbdipol", other},
                                                           {"gal", other}};
  const auto found = kFrames.find(lower_case(trimmed(name)));
  return found == kFrames.end() ? std::nullopt : std::optional(found->second);
}

double lsrk_frequency_ratio(RestFrame frame, const ObservingCircumstances& circumstances) {
  if (frame == RestFrame::lsrk) return 1.0;
  if (frame == RestFrame::other) {
    throw InputError({"the spectral axis is in a frame from which no way leads to the LSR",
                      "LSRK, LSRD, BARYCENT, HELIOCEN, GEOCENTR or TOPOCENT in SPECSYS"});
  }
  if (frame == RestFrame::unknown) {
    throw InputError(
        {"the frame of the spectral axis is not given (SPECSYS, or VELREF, or a CTYPE such as VELO-LSR)",
         "a header that names it", "when you know it, --frame states it, as --frame LSRK"});
  }
  if (!circumstances.direction) refuse(frame, "the direction of the source (celestial axes, or RA and DEC)");
  const Eigen::Vector3d towards =
      unit_vector(circumstances.direction->right_ascension_rad, circumstances.direction->declination_rad);
  return blue_shift(velocity_of(RestFrame::lsrk, circumstances), towards) /
         blue_shift(velocity_of(frame, circumstances), towards);
}

}  // namespace trotline
