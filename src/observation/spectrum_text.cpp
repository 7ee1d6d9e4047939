#include <array>

#include <trotline/base/text.hpp>
#include <trotline/physics/constants.hpp>
#include <trotline/physics/quantity.hpp>

#include "raw_table.hpp"
#include "spectrum_reader.hpp"

namespace trotline {
namespace {

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();
constexpr std::size_t kLargestText = std::size_t{256} << 20;

/// The columns in which the axis may be written.
struct AxisColumn {
  const char* name;
  Dimension dimension;
};

constexpr std::array<AxisColumn, 5> kAxisColumns = {{{"frequency", Dimension::frequency},
                                                     {"velocity", Dimension::velocity},
                                                     {"velocity_optical", Dimension::velocity},
                                                     {"v_lsr", Dimension::velocity},
                                                     {"wavelength", Dimension::length}}};

const char* const kExample = "columns such as 'velocity [km/s]' and 'intensity [K]'";

/// `# key: value` in the comments before the header line.
std::map<std::string, std::string> remarks_of(std::string_view text) {
  std::map<std::string, std::string> remarks;
  while (!text.empty()) {
    const std::size_t end = std::min(text.find_first_of("\r\n"), text.size());
    const std::string_view line = trimmed(text.substr(0, end));
    text.remove_prefix(std::min(end + 1, text.size()));
    if (line.empty()) continue;
    if (line.front() != '#') break;
    const std::size_t colon = line.find(':');
    if (colon == std::string_view::npos) continue;
    remarks.emplace(lower_case(trimmed(line.substr(1, colon - 1))),
                    std::string(trimmed(line.substr(colon + 1))));
  }
  return remarks;
}

class TextSpectrum {
 public:
  TextSpectrum(std::string_view bytes, const std::string& name, const SpectrumOptions& options)
      : options_(options), name_(name), text_(raw::checked_text(bytes, name)), remarks_(remarks_of(text_)) {}

  Spectrum read() {
    table_ = parse();
    find_columns();
    spectrum_.name = name_;
    read_remarks();
    read_axis();
    read_intensity();
    return std::move(spectrum_);
  }

 private:
  [[nodiscard]] raw::Table parse() const {
    if (text_.starts_with("# %ECSV")) return raw::parse_ecsv(text_, name_);
    raw::RecordReader reader(text_, name_, 1, raw::Separator::comma);
    const auto first = reader.next_line();
    const bool commas = first && first->text.find(',') != std::string_view::npos;
    return commas ? raw::parse_csv(text_, name_) : raw::parse_words(text_, name_);
  }

  [[noreturn]] void refuse_header(const std::string& found, const std::string& expected) const {
    throw InputError(Place{name_, table_.header_line}, {found, expected});
  }

  void find_columns() {
    for (std::size_t i = 0; i < table_.columns.size(); ++i) {
      const std::string name = lower_case(table_.columns[i].name);
      const auto axis = std::find_if(kAxisColumns.begin(), kAxisColumns.end(),
                                     [&](const auto& c) { return name == c.name; });
      if (axis != kAxisColumns.end()) {
        if (axis_) refuse_header("there are two columns for the axis", kExample);
        axis_ = {*axis, i};
      } else if (name == "intensity") {
        if (intensity_) refuse_header("column 'intensity' stands there twice", "each column once");
        intensity_ = i;
      } else if (name == "mask") {
        mask_ = i;
      } else {
        spectrum_.warnings.push_back(
            fmt::format("column '{}' is not known and was passed over", printable(name)));
      }
    }
    if (!axis_) refuse_header("there is no column of frequencies, velocities or wavelengths", kExample);
    if (!intensity_) refuse_header("there is no column 'intensity'", kExample);
  }

  [[nodiscard]] std::optional<std::string> remark(const char* key) const {
    const auto found = remarks_.find(key);
    return found == remarks_.end() ? std::nullopt : std::optional(found->second);
  }

  [[nodiscard]] std::optional<double> quantity(const char* key, Dimension dimension) const {
    const auto text = remark(key);
    if (!text) return std::nullopt;
    try {
      const double value = parse_quantity(*text, dimension);
      if (value > 0.0) return value;
    } catch (const InputError& error) {
      throw InputError(Place{name_}, {fmt::format("the comment '{}': {}", key, error.complaint().found),
                                      error.complaint().expected});
    }
    throw InputError(Place{name_}, {fmt::format("the comment '{}' is not above 0", key),
                                    std::string(example_of(dimension))});
  }

  void read_remarks() {
    spectrum_.object = remark("object");
    spectrum_.beam_fwhm_rad = quantity("beam_fwhm", Dimension::angle);
    spectrum_.resolution_hz = quantity("resolution", Dimension::frequency);
    spectrum_.forward_efficiency = quantity("forward_efficiency", Dimension::dimensionless);
    spectrum_.main_beam_efficiency = quantity("main_beam_efficiency", Dimension::dimensionless);
    spectrum_.rest_frequency_hz = options_.axis.rest_frequency_hz;
    if (!spectrum_.rest_frequency_hz)
      spectrum_.rest_frequency_hz = quantity("rest_frequency", Dimension::frequency);
    if (const auto scale = remark("scale")) {
      const std::string word = lower_case(*scale);
      if (word != "tmb" && word != "ta*") {
        throw InputError(Place{name_},
                         {fmt::format("the comment 'scale' is '{}'", printable(*scale)), "Tmb or TA*"});
      }
      stated_scale_ = word == "tmb" ? IntensityScale::main_beam : IntensityScale::antenna;
    }
  }

  /// Text says its frame in the name of the column, in a comment, or not at all; only the LSR can be used
  /// then.
  void require_lsr() {
    if (std::string_view(axis_->first.name) == "v_lsr") return;
    const auto written = remark("frame");
    const auto frame = written ? rest_frame_named(*written) : options_.axis.frame;
    if (frame == RestFrame::lsrk) return;
    throw InputError(Place{name_, table_.header_line},
                     {written ? fmt::format("the frame is '{}'", printable(*written))
                              : "the frame of the axis is not given",
                      "a comment '# frame: LSRK' before the header line, or a column 'v_lsr [km/s]'",
                      written ? "text does not hold what a correction needs"
                              : "when you know it, --frame states it, as --frame LSRK"});
  }

  [[nodiscard]] double axis_scale() const {
    const raw::Column& column = table_.columns[axis_->second];
    if (!column.unit) {
      refuse_header(fmt::format("column '{}' has no unit", axis_->first.name),
                    fmt::format("the unit of {}, as in '{} [...]'", name_of(axis_->first.dimension),
                                axis_->first.name));
    }
    try {
      return unit_scale(*column.unit, axis_->first.dimension);
    } catch (const InputError& error) {
      refuse_header(fmt::format("column '{}': {}", axis_->first.name, error.complaint().found),
                    error.complaint().expected);
    }
  }

  [[nodiscard]] double cell(const raw::Row& row, std::size_t column, bool may_lack) const {
    const std::string& text = row.cells[column];
    if (may_lack && text.empty()) return kNaN;
    const auto value = parse_number(text);
    if (!value || (!may_lack && !std::isfinite(*value))) {
      throw InputError(
          Place{name_, row.line},
          {fmt::format("column '{}' holds '{}'", printable(table_.columns[column].name), printable(text)),
           may_lack ? "a number, nan or an empty cell" : "a finite number"});
    }
    return *value;
  }

  [[nodiscard]] double frequency_of(double value) const {
    const std::string_view kind = axis_->first.name;
    if (kind == "frequency") return value;
    if (kind == "wavelength") return constants::kLightMPerS / value;
    const double beta = value / constants::kLightMPerS;
    return *spectrum_.rest_frequency_hz * (kind == "velocity_optical" ? 1.0 / (1.0 + beta) : 1.0 - beta);
  }

  void read_axis() {
    require_lsr();
    const bool is_velocity = axis_->first.dimension == Dimension::velocity;
    if (is_velocity && !spectrum_.rest_frequency_hz) {
      refuse_header("the axis is a velocity and its rest frequency is not given",
                    "a comment such as '# rest_frequency: 115.2712 GHz' before the header line");
    }
    const double scale = axis_scale();
    if (table_.rows.size() < 2)
      refuse_header(fmt::format("the spectrum has {} channels", table_.rows.size()), "two or more");
    Eigen::ArrayXd frequency(static_cast<Eigen::Index>(table_.rows.size()));
    for (Eigen::Index i = 0; i < frequency.size(); ++i) {
      const raw::Row& row = table_.rows[static_cast<std::size_t>(i)];
      frequency(i) = frequency_of(cell(row, axis_->second, false) * scale);
      require_steady(frequency, i, row.line);
    }
    spectrum_.axis = SpectralAxis(std::move(frequency));
    spectrum_.axis_type = axis_->first.name;
  }

  void require_steady(const Eigen::ArrayXd& frequency, Eigen::Index i, std::size_t line) const {
    const bool possible = std::isfinite(frequency(i)) && frequency(i) > 0.0;
    const bool steady =
        i == 0 || (i == 1 ? frequency(1) != frequency(0)
                          : (frequency(i) > frequency(i - 1)) == (frequency(1) > frequency(0)) &&
                                frequency(i) != frequency(i - 1));
    if (possible && steady) return;
    throw InputError(Place{name_, line}, {fmt::format("column '{}' {}", axis_->first.name,
                                                      possible ? "does not go on in the same sense"
                                                               : "gives no frequency above 0"),
                                          "channels that rise or fall steadily"});
  }

  void read_intensity() {
    spectrum_.intensity.resize(static_cast<Eigen::Index>(table_.rows.size()));
    for (std::size_t i = 0; i < table_.rows.size(); ++i) {
      const raw::Row& row = table_.rows[i];
      double value = cell(row, *intensity_, true);
      if (mask_ && is_masked(row)) value = kNaN;
      spectrum_.intensity(static_cast<Eigen::Index>(i)) = value;
    }
    make_holes_of_infinities(spectrum_.intensity);
    SpectrumOptions options = options_;
    if (!options.scale) options.scale = stated_scale_;
    apply_unit(table_.columns[*intensity_].unit, options, name_, spectrum_);
  }

  [[nodiscard]] bool is_masked(const raw::Row& row) const {
    const std::string word = lower_case(row.cells[*mask_]);
    if (word.empty() || word == "false" || word == "0" || word == "f" || word == "no") return false;
    if (word == "true" || word == "1" || word == "t" || word == "yes") return true;
    throw InputError(Place{name_, row.line},
                     {fmt::format("column 'mask' holds '{}'", printable(word)), "true or false"});
  }

  const SpectrumOptions& options_;
  const std::string& name_;
  std::string_view text_;
  std::map<std::string, std::string> remarks_;
  raw::Table table_;
  std::optional<std::pair<AxisColumn, std::size_t>> axis_;
  std::optional<std::size_t> intensity_;
  std::optional<std::size_t> mask_;
  std::optional<IntensityScale> stated_scale_;
  Spectrum spectrum_;
};

class TextReader : public SpectrumFile::Reader {
 public:
  explicit TextReader(Spectrum spectrum) : spectrum_(std::move(spectrum)) {}
  [[nodiscard]] std::size_t size() const override { return 1; }
  [[nodiscard]] Spectrum read(std::size_t) override { return spectrum_; }

 private:
  const Spectrum spectrum_;
};

}  // namespace

std::unique_ptr<SpectrumFile::Reader> make_text_reader(std::string_view bytes, const std::string& name,
                                                       const SpectrumOptions& options) {
  if (bytes.size() > kLargestText) {
    throw InputError(Place{name}, {"a text spectrum of more than 256 MiB", "a smaller file, or FITS"});
  }
  return std::make_unique<TextReader>(TextSpectrum(bytes, name, options).read());
}

}  // namespace trotline
