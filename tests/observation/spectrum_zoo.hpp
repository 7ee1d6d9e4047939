// One invented source, written into files of many conventions.
//
// The line is a Gaussian in radio V_LSR on a straight baseline. Each file samples it at the centres of its
// channels, whose frequencies are computed here from the definitions of the conventions (Greisen et al. 2006,
// A&A 446, 747, tables 1 and 3), not by the code under test.
#pragma once

#include <zlib.h>

#include <cmath>
#include <functional>
#include <map>
#include <numbers>
#include <string>
#include <vector>

#include "fits_builder.hpp"

namespace trotline::zoo {

inline constexpr double kLight = 299792458.0;
inline constexpr double kRestHz = 110.201354e9;
inline constexpr double kVlsrKmS = 7.4;
inline constexpr double kFwhmKmS = 2.3;
inline constexpr double kPeakK = 1.7;
inline constexpr int kChannels = 1024;
inline constexpr double kStepKmS = 0.1;

/// sqrt(pi / (4 ln 2)) times peak times width: the area of a Gaussian [K km/s].
inline double true_area() {
  return std::sqrt(std::numbers::pi / (4.0 * std::numbers::ln2)) * kPeakK * kFwhmKmS;
}

/// Brightness [K] at a frequency in the LSR; the baseline is straight in frequency.
inline double brightness(double frequency_hz) {
  const double velocity = kLight * 1e-3 * (1.0 - frequency_hz / kRestHz);
  const double x = (velocity - kVlsrKmS) / kFwhmKmS;
  return kPeakK * std::exp(-4.0 * std::numbers::ln2 * x * x) + 0.2 + 3e-3 * velocity;
}

using ToFrequency = std::function<double(double)>;  ///< from the value of the axis in SI

/// A linear axis about the line.
struct Axis {
  std::string type;
  std::string unit;
  double per_si = 1.0;  ///< units of CUNIT in one of SI
  ToFrequency frequency;
  std::function<double(double)> value;  ///< the inverse
  bool reversed = false;
  std::map<std::string, std::string> keywords = {};
  double frame_ratio = 1.0;  ///< LSR frequency over frequency in the file

  /// Centre and step such that the line lies at channel 530 or so.
  [[nodiscard]] double centre() const { return value(lsr(kVlsrKmS) / frame_ratio); }
  [[nodiscard]] double step() const {
    const double forward = value(lsr(kVlsrKmS + kStepKmS) / frame_ratio) - centre();
    return reversed ? -forward : forward;
  }
  static double lsr(double velocity_km_s) { return kRestHz * (1.0 - velocity_km_s * 1e3 / kLight); }
  static constexpr double kReferencePixel = 530.25;

  [[nodiscard]] std::vector<double> samples(double factor = 1.0) const {
    std::vector<double> values;
    for (int i = 1; i <= kChannels; ++i) {
      values.push_back(factor *
                       brightness(frame_ratio * frequency(centre() + (i - kReferencePixel) * step())));
    }
    return values;
  }
};

inline Axis freq() {
  return {"FREQ", "Hz", 1.0, [](double s) { return s; }, [](double f) { return f; }};
}
inline Axis vrad() {
  return {"VRAD", "m/s", 1.0, [](double s) { return kRestHz * (1 - s / kLight); },
          [](double f) { return kLight * (1 - f / kRestHz); }};
}
inline Axis vopt() {
  return {"VOPT", "m/s", 1.0, [](double s) { return kRestHz / (1 + s / kLight); },
          [](double f) { return kLight * (kRestHz / f - 1); }};
}
inline Axis velo() {
  return {"VELO", "m/s", 1.0,
          [](double s) { return kRestHz * std::sqrt((1 - s / kLight) / (1 + s / kLight)); },
          [](double f) { return kLight * (kRestHz * kRestHz - f * f) / (kRestHz * kRestHz + f * f); }};
}
inline Axis zopt() {
  return {"ZOPT", "", 1.0, [](double s) { return kRestHz / (1 + s); },
          [](double f) { return kRestHz / f - 1; }};
}
inline Axis beta() {
  Axis axis = velo();
  return {"BETA", "", 1.0, [axis](double s) { return axis.frequency(s * kLight); },
          [axis](double f) { return axis.value(f) / kLight; }};
}
inline Axis wave() {
  return {"WAVE", "m", 1.0, [](double s) { return kLight / s; }, [](double f) { return kLight / f; }};
}
inline Axis wavn() {
  return {"WAVN", "m-1", 1.0, [](double s) { return kLight * s; }, [](double f) { return f / kLight; }};
}
inline Axis ener() {
  constexpr double kPlanck = 6.62607015e-34;
  return {"ENER", "J", 1.0, [](double s) { return s / kPlanck; }, [](double f) { return f * kPlanck; }};
}
inline Axis afrq() {
  return {"AFRQ", "rad/s", 1.0, [](double s) { return s / (2 * std::numbers::pi); },
          [](double f) { return f * 2 * std::numbers::pi; }};
}

inline Axis with(Axis axis, const std::string& type, const std::map<std::string, std::string>& keywords) {
  axis.type = type;
  axis.keywords = keywords;
  return axis;
}
inline Axis in_unit(Axis axis, const std::string& unit, double per_si) {
  axis.unit = unit;
  axis.per_si = per_si;
  return axis;
}
inline Axis reversed(Axis axis) {
  axis.reversed = true;
  return axis;
}

/// A grid linear in wavelength, frequency or velocity (P) but labelled in another quantity: CTYPE such as
/// VOPT-F2W has the value and the derivative of the label at the reference pixel.
inline Axis on_grid(const Axis& label, const Axis& grid, const std::string& type) {
  Axis axis = label;
  axis.type = type;
  const double f0 = Axis::lsr(kVlsrKmS);
  const double s0 = label.value(f0);
  const double p0 = grid.value(f0);
  const double h = 1e-6 * f0;
  const double slope =
      (label.value(f0 + h) - label.value(f0 - h)) / (grid.value(f0 + h) - grid.value(f0 - h));
  axis.frequency = [=](double s) { return grid.frequency(p0 + (s - s0) / slope); };
  axis.value = [=](double f) { return s0 + slope * (grid.value(f) - p0); };
  return axis;
}

inline void axis_keywords(FitsBuilder& fits, const Axis& axis, int number = 1, bool with_frame = true) {
  const std::string n = std::to_string(number);
  fits.key("CTYPE" + n, axis.type);
  fits.key("CRVAL" + n, axis.centre() * axis.per_si);
  fits.key("CDELT" + n, axis.step() * axis.per_si);
  fits.key("CRPIX" + n, Axis::kReferencePixel);
  if (!axis.unit.empty()) fits.key("CUNIT" + n, axis.unit);
  fits.key("RESTFRQ", kRestHz);
  if (axis.keywords.empty() && with_frame) fits.key("SPECSYS", std::string("LSRK"));
  for (const auto& [key, value] : axis.keywords) {
    if (value.empty()) continue;
    if (value.find_first_not_of("0123456789.-+e") == std::string::npos) {
      fits.key(key, std::stod(value));
    } else {
      fits.key(key, value);
    }
  }
}

struct Layout {
  int code = FLOAT_IMG;
  std::vector<long> lengths = {kChannels};
  int axis_number = 1;
  std::string unit = "K";
  double factor = 1.0;  ///< from K to the unit
  double scale = 0.0;   ///< BSCALE of scaled integers
  double zero = 0.0;    ///< BZERO
  int compression = 0;
};

/// Appends the spectrum as an image to a file.
inline void add_image(FitsBuilder& fits, const Axis& axis, const Layout& layout = {}) {
  if (layout.compression != 0) {
    fits.run([&](int* status) {
      fits_set_compression_type(fits.handle(), layout.compression, status);
      if (layout.code < 0)
        fits_set_quantize_level(fits.handle(), 0.0F, status);  // floating-point values without loss
    });
  }
  fits.image(layout.code, layout.lengths);
  axis_keywords(fits, axis, layout.axis_number);
  fits.key("BUNIT", layout.unit);
  fits.key("OBJECT", std::string("Invented Pond"));
  fits.key("BMAJ", 0.006);
  fits.key("BMIN", 0.006);
  std::vector<double> values = axis.samples(layout.factor);
  if (layout.compression != 0 && layout.code > 0) {  // the scale comes behind the whole numbers
    for (double& value : values) value = (value - layout.zero) / layout.scale;
    fits.whole_pixels(values);
  }
  if (layout.scale != 0.0) {
    fits.key("BSCALE", layout.scale);
    fits.key("BZERO", layout.zero);
    fits.rescan();
  }
  if (layout.compression == 0 || layout.code == DOUBLE_IMG) fits.pixels(values);
  if (layout.compression != 0 && layout.code == FLOAT_IMG) fits.float_pixels(values);
}

inline std::string image(const Axis& axis, const Layout& layout = {}) {
  FitsBuilder fits;
  add_image(fits, axis, layout);
  return fits.bytes();
}

/// Rows of a table; the axis of each row in columns where `in_columns`.
inline std::string table(const Axis& axis, int rows, const std::string& form, bool in_columns,
                         const std::string& data = "DATA", double scale = 0.0) {
  FitsBuilder fits;
  std::vector<FitsBuilder::Column> columns = {{data, std::to_string(kChannels) + form, "K"},
                                              {"OBJECT", "16A", ""}};
  if (in_columns) {
    for (const char* name : {"CRVAL1", "CDELT1", "CRPIX1", "RESTFREQ"}) columns.push_back({name, "1D", ""});
    columns.push_back({"CTYPE1", "8A", ""});
  }
  fits.table(columns);
  if (scale != 0.0) {
    fits.key("TSCAL1", scale);
    fits.rescan();
  }
  if (!in_columns) axis_keywords(fits, axis);
  if (in_columns) {
    if (!axis.unit.empty()) fits.key("CUNIT1", axis.unit);
    if (axis.keywords.empty()) fits.key("SPECSYS", std::string("LSRK"));
    for (const auto& [key, value] : axis.keywords) {
      if (!value.empty()) fits.key(key, value);
    }
  }
  for (int row = 1; row <= rows; ++row) {
    fits.put(1, row, axis.samples());
    fits.put(2, row, std::string("pond ") + std::to_string(row));
    if (!in_columns) continue;
    const double shift = row - 1.0;  // each row has another reference channel
    fits.put(3, row, (axis.centre() + shift * axis.step()) * axis.per_si);
    fits.put(4, row, axis.step() * axis.per_si);
    fits.put(5, row, Axis::kReferencePixel + shift);
    fits.put(6, row, kRestHz);
    fits.put(7, row, axis.type);
  }
  return fits.bytes();
}

inline std::string gzipped(const std::string& bytes) {
  z_stream stream = {};
  constexpr int kGzip = 16;
  deflateInit2(&stream, Z_BEST_SPEED, Z_DEFLATED, MAX_WBITS + kGzip, 8, Z_DEFAULT_STRATEGY);
  std::string packed(deflateBound(&stream, bytes.size()), '\0');
  stream.next_in = reinterpret_cast<Bytef*>(const_cast<char*>(bytes.data()));
  stream.avail_in = static_cast<uInt>(bytes.size());
  stream.next_out = reinterpret_cast<Bytef*>(packed.data());
  stream.avail_out = static_cast<uInt>(packed.size());
  deflate(&stream, Z_FINISH);
  packed.resize(stream.total_out);
  deflateEnd(&stream);
  return packed;
}

inline std::string digits(double value) {
  char text[40];
  std::snprintf(text, sizeof text, "%.17g", value);
  return text;
}

/// A text spectrum: comments, header line, two columns.
inline std::string text(const std::string& head, const std::string& separator, const Axis& axis) {
  std::string out = head;
  const std::vector<double> values = axis.samples();
  for (int i = 1; i <= kChannels; ++i) {
    out += digits((axis.centre() + (i - Axis::kReferencePixel) * axis.step()) * axis.per_si) + separator +
           digits(values[static_cast<std::size_t>(i - 1)]) + "\n";
  }
  return out;
}

struct Specimen {
  std::string name;
  std::string bytes;
  std::size_t spectra = 1;
  double per_kelvin = 1.0;  ///< intensities in the file's own scale, per K
  double tolerance = 1e-6;  ///< relative, of the area
};

/// All files. Tolerances other than 1e-6 are for layouts whose own digits are coarser.
inline std::vector<Specimen> specimens() {
  std::vector<Specimen> all;
  const auto add = [&](const std::string& name, std::string bytes, std::size_t spectra = 1) {
    all.push_back({name, std::move(bytes), spectra});
  };
  const auto both = [&](const std::string& name, const Axis& axis) {
    add(name + "_up", image(axis));
    add(name + "_down", image(reversed(axis), {.code = DOUBLE_IMG}));
  };
  both("freq", freq());
  both("freq_ghz", in_unit(freq(), "GHz", 1e-9));
  both("vrad", vrad());
  both("vrad_kms", in_unit(vrad(), "km/s", 1e-3));
  both("vopt", vopt());
  both("velo", velo());
  both("zopt", zopt());
  both("beta", beta());
  both("wave", wave());
  both("wave_mm", in_unit(wave(), "mm", 1e3));
  both("wavn", wavn());
  both("ener", ener());
  both("afrq", afrq());
  both("vopt_f2w", on_grid(vopt(), freq(), "VOPT-F2W"));
  both("vrad_w2f", on_grid(vrad(), wave(), "VRAD-W2F"));
  both("velo_f2v", on_grid(velo(), freq(), "VELO-F2V"));
  both("freq_lsr", with(freq(), "FREQ-LSR", {{"VELREF", ""}}));
  both("velo_lsr_radio", with(vrad(), "VELO-LSR", {{"VELREF", "257"}}));
  both("velo_lsr_optical", with(vopt(), "VELO-LSR", {{"VELREF", "1"}}));
  both("felo_lsr", with(on_grid(vopt(), freq(), "x"), "FELO-LSR", {{"VELREF", "1"}}));
  both("freq_velref", with(freq(), "FREQ", {{"VELREF", "257"}}));
  add("int32", image(vrad(), {.code = LONG_IMG, .scale = 1e-9, .zero = 1.0}));
  // Every channel, and the baseline below the line, may be wrong by half a step: twice 2.5e-5 K over 12 km/s.
  const double worst = 2.0 * 2.5e-5 * 12.0 / true_area();
  all.push_back({"int16", image(vrad(), {.code = SHORT_IMG, .scale = 5e-5, .zero = 1.0}), 1, 1.0, worst});
  add("1x1xN", image(freq(), {.lengths = {1, 1, kChannels}, .axis_number = 3}));
  add("Nx1x1x1", image(vrad(), {.code = DOUBLE_IMG, .lengths = {kChannels, 1, 1, 1}}));
  add("1xN", image(vopt(), {.lengths = {1, kChannels}, .axis_number = 2}));
  add("millikelvin", image(freq(), {.unit = "mK", .factor = 1e3}));
  add("antenna", image(freq(), {.unit = "K (Ta*)"}));
  all.push_back({"jansky", image(freq(), {.unit = "JY/BEAM", .factor = 0.02}), 1, 0.02});
  add("gzip", gzipped(image(vrad())));
  add("tile_gzip", image(freq(), {.compression = GZIP_1}));
  add("tile_gzip2", image(vrad(), {.code = DOUBLE_IMG, .compression = GZIP_2}));
  add("tile_rice", image(freq(), {.code = LONG_IMG, .scale = 1e-9, .zero = 1.0, .compression = RICE_1}));
  add("table_keywords", table(vrad(), 1, "E", false));
  add("table_columns", table(in_unit(vrad(), "km/s", 1e-3), 3, "D", true), 3);
  add("table_frequency", table(reversed(freq()), 2, "E", true, "SPECTRUM"), 2);
  add("table_scaled", table(freq(), 1, "J", false, "SERIES", 1e-9));
  add("table_veldef", table(with(vrad(), "VELO-LSR", {{"VELDEF", "RADI-LSR"}}), 2, "E", true), 2);
  FitsBuilder bands;
  bands.image(BYTE_IMG, {});
  add_image(bands, freq());
  add_image(bands, reversed(vrad()), {.code = DOUBLE_IMG});
  add("extensions", bands.bytes(), 2);
  add("text_velocity", text("# rest_frequency: 110.201354 GHz\nv_lsr [km/s]  intensity [K]\n", "  ",
                            in_unit(vrad(), "", 1e-3)));
  add("text_csv",
      text("# frame: LSRK\nfrequency [MHz],intensity [K]\n", ",", in_unit(reversed(freq()), "", 1e-6)));
  add("text_ecsv", text("# %ECSV 1.0\n# ---\n# datatype:\n# - {name: v_lsr, unit: m/s, datatype: float64}\n"
                        "# - {name: intensity, unit: K, datatype: float64}\n# meta:\n#   rest_frequency: "
                        "110.201354 GHz\nv_lsr intensity\n",
                        " ", vrad()));
  return all;
}

}  // namespace trotline::zoo
