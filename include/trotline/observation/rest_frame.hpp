#pragma once

#include <optional>
#include <string_view>

namespace trotline {

/// The standard of rest in which a spectral axis is written (FITS keyword SPECSYS).
enum class RestFrame {
  lsrk,         ///< kinematic local standard of rest: what trotline calls V_LSR
  lsrd,         ///< dynamical local standard of rest
  barycentric,  ///< solar system barycentre; heliocentric is taken for the same, they differ by up to 16 m/s
  geocentric,
  topocentric,
  other,   ///< known to the FITS standard, but no way leads from it to the LSR (SOURCE, GALACTOC, ...)
  unknown  ///< the header does not say
};

/// "LSRK", "TOPOCENT" ...: the names of the FITS standard; "unknown" for unknown.
[[nodiscard]] std::string_view name_of(RestFrame frame);

/// Understands the names of the FITS standard, and "LSR", "HEL", "BARY", "OBS", "TOPO" ...; case free.
/// An empty text is unknown. @return nothing for any other word
[[nodiscard]] std::optional<RestFrame> rest_frame_named(std::string_view name);

/// What a correction to another frame may need. Directions are ICRS; a frame further from the LSR needs more.
struct ObservingCircumstances {
  struct Direction {
    double right_ascension_rad;
    double declination_rad;
  };
  struct Site {  ///< geocentric, ITRS
    double x_m;
    double y_m;
    double z_m;
  };
  std::optional<Direction> direction;  ///< needed by every frame but lsrk
  std::optional<double> mjd_utc;       ///< geocentric and topocentric
  bool has_time_of_day = true;         ///< false where only a date is known; topocentric needs the time
  std::optional<Site> site;            ///< topocentric
};

/// Frequency in the LSRK per frequency in `frame`, for light that comes from the direction.
///
///     nu_LSRK / nu = D(v_L) / D(v),    D(v) = sqrt((1 + b) / (1 - b)),    b = n.v / c
///
/// v and v_L are the velocities relative to the barycentre of observers at rest in the frame and in the LSRK,
/// n points to the source: Doppler's formula for the radial part, as in Greisen et al. 2006, A&A 446, 747.
/// Left out, as is usual: the transverse Doppler shift (up to 1.5 m/s) and gravitational shifts (about 3
/// m/s).
///
/// The LSRK: the Sun moves with 20 km/s towards right ascension 18 h, declination +30 deg (1900.0),
/// [Gordon1975]; the LSRD: 16.55 km/s towards l = 53.13, b = +25.02 deg, [Delhaye1965]; keys in
/// docs/references.bib. The Earth's motion comes from the ERFA library. Gravitational shifts (about 3 m/s)
/// are left out, as is usual.
///
/// @throws InputError naming what is missing, or that no way leads from the frame to the LSRK
[[nodiscard]] double lsrk_frequency_ratio(RestFrame frame, const ObservingCircumstances& circumstances);

}  // namespace trotline
