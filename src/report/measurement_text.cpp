#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include <trotline/base/text.hpp>
#include <trotline/report/display_text.hpp>
#include <trotline/report/measurement_report.hpp>
#include <trotline/report/rounding.hpp>
#include <trotline/report/text_table.hpp>
#include <trotline/report/typeset.hpp>

namespace trotline {
namespace {

constexpr std::size_t kMostTables = 12;  ///< spectra that are shown in full
constexpr std::size_t kMostWarnings = 20;

class MeasurementPage {
 public:
  explicit MeasurementPage(const TerminalOptions& options)
      : width_(std::max<std::size_t>(options.width, 40)), unicode_(options.unicode), colour_(options.colour) {}

  std::string of(const SpeciesMeasurement& measurement) {
    const std::size_t tables = std::min(measurement.spectra.size(), kMostTables);
    for (std::size_t i = 0; i < tables; ++i) add_spectrum(measurement.spectra[i]);
    if (tables < measurement.spectra.size()) {
      text_ += fmt::format("... and {} more spectra\n\n", measurement.spectra.size() - tables);
    }
    add_warnings(measurement.warnings);
    return text_;
  }

 private:
  [[nodiscard]] Glyphs glyphs() const { return unicode_ ? Glyphs::unicode : Glyphs::ascii; }

  [[nodiscard]] std::string bold(const std::string& text) const {
    return colour_ ? "\x1b[1m" + text + "\x1b[0m" : text;
  }

  void add_spectrum(const SpectrumMeasurement& spectrum) {
    const std::string object = spectrum.object ? " toward " + *spectrum.object : "";
    text_ += bold(shortened(display_text(spectrum.spectrum + object), width_, !unicode_)) + "\n";
    text_ += shortened(window_text(spectrum), width_, !unicode_) + "\n";
    std::vector<const LineMeasurement*> measured;
    for (const LineMeasurement& line : spectrum.lines) {
      if (line.status == LineStatus::measured) measured.push_back(&line);
    }
    if (!measured.empty()) {
      for (const std::string& line : text_table(columns_of(spectrum, measured), width_, glyphs()))
        text_ += line + "\n";
    }
    for (const LineMeasurement& line : spectrum.lines) {
      if (line.status == LineStatus::not_measured)
        add_wrapped("  ", label_of(line) + " not measured: " + line.trouble);
    }
    text_ += "\n";
  }

  [[nodiscard]] std::string window_text(const SpectrumMeasurement& spectrum) const {
    std::string text =
        fmt::format("  window {} to {} km/s", fixed_decimals(spectrum.window.low_km_s, 2, glyphs()),
                    fixed_decimals(spectrum.window.high_km_s, 2, glyphs()));
    if (spectrum.window_snr > 0.0) text += fmt::format(", found from a line of S/N {:.0f}", spectrum.window_snr);
    const double each = spectrum.correlation.channels_per_independent_one();
    return text + fmt::format("; one channel in {:.1f} is independent", std::max(1.0, each));
  }

  [[nodiscard]] std::string label_of(const LineMeasurement& line) const {
    const std::string text = display_text(line.label);
    return unicode_ ? typeset_transition(text) : text;
  }

  [[nodiscard]] std::vector<TextColumn> columns_of(const SpectrumMeasurement& spectrum,
                                                   const std::vector<const LineMeasurement*>& lines) const {
    const bool flux = spectrum.scale == IntensityScale::flux_per_beam;
    const std::string unit = flux ? "Jy/beam" : "K";
    TextColumn label{"line", {}, false};
    TextColumn frequency{"MHz", {}};
    TextColumn intensity{"W (" + unit + " km/s)", {}};
    TextColumn velocity{"V (km/s)", {}};
    TextColumn width{"FWHM (km/s)", {}};
    TextColumn rms{"rms (m" + unit + ")", {}};
    TextColumn remarks{"remarks", {}, false};
    for (const LineMeasurement* line : lines) {
      label.cells.push_back(label_of(*line));
      frequency.cells.push_back(fmt::format("{:.3f}", line->rest_frequency_hz * 1e-6));
      intensity.cells.push_back(value_with_error(line->intensity, line->sigma(), glyphs()));
      velocity.cells.push_back(line->gaussian ? rounded(line->gaussian->velocity_km_s) : "");
      width.cells.push_back(line->gaussian ? rounded(line->gaussian->fwhm_km_s) : "");
      rms.cells.push_back(significant(line->rms * 1e3, 3, glyphs()));
      remarks.cells.push_back(remarks_of(*line));
    }
    return {label, frequency, intensity, velocity, width, rms, remarks};
  }

  [[nodiscard]] std::string rounded(const Measured& measured) const {
    return value_with_error(measured.value, measured.sigma, glyphs());
  }

  [[nodiscard]] std::string remarks_of(const LineMeasurement& line) const {
    std::vector<std::string> remarks;
    if (!line.detected) {
      remarks.push_back("not detected, < " + significant(line.limit, 2, glyphs()));
    }
    if (!line.blend.empty()) remarks.push_back("blend " + display_text(line.blend));
    if (!line.fitted_with.empty()) remarks.push_back("fitted with " + display_text(listed(line.fitted_with, 3)));
    for (const LineFlag flag : line.flags) remarks.emplace_back(name_of(flag));
    if (!line.is_trusted()) remarks.emplace_back("left out");
    return fmt::format("{}", fmt::join(remarks, ", "));
  }

  void add_warnings(const std::vector<std::string>& warnings) {
    for (std::size_t i = 0; i < std::min(warnings.size(), kMostWarnings); ++i)
      add_wrapped("! ", display_text(warnings[i]));
    if (warnings.size() > kMostWarnings)
      text_ += fmt::format("! and {} more warnings\n", warnings.size() - kMostWarnings);
  }

  void add_wrapped(const std::string& mark, const std::string& text) {
    std::string start = mark;
    for (const std::string& piece : wrapped(display_text(text), width_ - mark.size())) {
      text_ += start + piece + "\n";
      start.assign(mark.size(), ' ');
    }
  }

  std::size_t width_;
  bool unicode_;
  bool colour_;
  std::string text_;
};

}  // namespace

std::string measurement_text(const SpeciesMeasurement& measurement, const TerminalOptions& options) {
  return MeasurementPage(options).of(measurement);
}

}  // namespace trotline
