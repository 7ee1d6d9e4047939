#include <array>

#include <trotline/base/files.hpp>
#include <trotline/base/text.hpp>
#include <trotline/observation/spectrum.hpp>
#include <trotline/physics/quantity.hpp>

#include "spectrum_reader.hpp"

namespace trotline {
namespace {

constexpr double kRadPerDeg = 3.14159265358979323846 / 180.0;

std::unique_ptr<SpectrumFile::Reader> make_reader(std::string bytes, std::string name,
                                                  SpectrumOptions options) {
  if (bytes.starts_with("\x1F\x8B")) bytes = gunzip(bytes, name);
  if (bytes.starts_with("SIMPLE"))
    return make_fits_reader(std::move(bytes), std::move(name), std::move(options));
  return make_text_reader(bytes, name, options);
}

/// "K (Ta*)" without what stands in parentheses.
std::string without_remark(const std::string& text) {
  const std::size_t open = text.find('(');
  if (open == std::string::npos || open == 0 || text.find("beam") != std::string::npos) return text;
  return std::string(trimmed(text.substr(0, open)));
}

std::optional<IntensityScale> scale_in_remark(const std::string& text) {
  const std::string lower = lower_case(text);
  if (lower.find("mb") != std::string::npos) return IntensityScale::main_beam;
  if (lower.find("ta*") != std::string::npos || lower.find("t_a") != std::string::npos)
    return IntensityScale::antenna;
  return std::nullopt;
}

std::optional<double> fraction(const HeaderCards& cards, const char* keyword, Spectrum& spectrum) {
  const auto value = cards.number(keyword);
  if (!value) return std::nullopt;
  if (*value > 0.0 && *value <= 1.0) return value;
  if (*value != 0.0) {  // 0 is what writers put where they do not know
    spectrum.warnings.push_back(fmt::format("keyword {} is {}: no efficiency, passed over", keyword, *value));
  }
  return std::nullopt;
}

}  // namespace

SpectrumFile::SpectrumFile(const std::string& path, SpectrumOptions options)
    : SpectrumFile(read_file(path), path == "-" ? "standard input" : path, std::move(options)) {}

SpectrumFile::SpectrumFile(std::string bytes, std::string name, SpectrumOptions options)
    : reader_(make_reader(std::move(bytes), std::move(name), std::move(options))) {}

SpectrumFile::~SpectrumFile() = default;
SpectrumFile::SpectrumFile(SpectrumFile&&) noexcept = default;
SpectrumFile& SpectrumFile::operator=(SpectrumFile&&) noexcept = default;

std::size_t SpectrumFile::size() const { return reader_->size(); }

const std::vector<std::string>& SpectrumFile::warnings() const { return reader_->warnings; }

Spectrum SpectrumFile::read(std::size_t index) const {
  if (index >= size()) throw DomainError("index", static_cast<double>(index), "below the number of spectra");
  return reader_->read(index);
}

std::vector<Spectrum> read_spectra(const std::string& path, const SpectrumOptions& options) {
  const SpectrumFile file(path, options);
  std::vector<Spectrum> spectra;
  for (std::size_t i = 0; i < file.size(); ++i) spectra.push_back(file.read(i));
  return spectra;
}

IntensityUnit parse_intensity_unit(const std::string& text, const std::string& where) {
  const std::string bare = without_remark(text);
  const std::string lower = lower_case(bare);
  if (lower == "k" || lower == "kelvin") return {1.0, scale_in_remark(text)};
  if (is_unit_of(bare, Dimension::temperature)) {
    return {unit_scale(bare, Dimension::temperature), scale_in_remark(text)};
  }
  for (const auto& [name, factor] : {std::pair("jy/beam", 1.0), std::pair("mjy/beam", 1e-3)}) {
    if (lower == name) return {factor, IntensityScale::flux_per_beam};
  }
  const std::string with_velocity = bare + " m/s";  // the dimension that is known contains a velocity
  if (is_unit_of(with_velocity, Dimension::flux_times_velocity)) {
    return {unit_scale(with_velocity, Dimension::flux_times_velocity), IntensityScale::flux_per_beam};
  }
  throw InputError(Place{where},
                   {fmt::format("the unit of the intensities is '{}'", printable(text)),
                    "K, mK, Jy/beam or another unit of brightness temperature or flux per beam"});
}

void apply_unit(const std::optional<std::string>& unit, const SpectrumOptions& options,
                const std::string& where, Spectrum& spectrum) {
  const auto& text = unit ? unit : options.intensity_unit;
  if (!text) {
    throw InputError(Place{where},
                     {"the unit of the intensities (BUNIT) is missing", "a unit such as K or Jy/beam",
                      "when you know the unit, --unit states it, as --unit K"});
  }
  const IntensityUnit found = parse_intensity_unit(*text, where);
  if (found.factor != 1.0) spectrum.intensity *= found.factor;
  const bool is_flux = found.scale == IntensityScale::flux_per_beam;
  if (is_flux && options.scale && *options.scale != IntensityScale::flux_per_beam) {
    throw InputError(Place{where}, {fmt::format("the unit of the intensities is '{}'", printable(*text)),
                                    "a temperature, as the scale that was stated asks"});
  }
  if (is_flux) {
    spectrum.scale = IntensityScale::flux_per_beam;
  } else {
    spectrum.scale = options.scale.value_or(found.scale.value_or(IntensityScale::main_beam));
  }
}

void read_common_keywords(const HeaderCards& cards, Spectrum& spectrum) {
  spectrum.object = cards.text("OBJECT");
  const auto major = cards.number("BMAJ");
  const auto minor = cards.number("BMIN");
  if (major && *major > 0.0) {
    const double other = minor && *minor > 0.0 ? *minor : *major;
    spectrum.beam_fwhm_rad = std::sqrt(*major * other) * kRadPerDeg;
  }
  spectrum.forward_efficiency = fraction(cards, "FORWEFF", spectrum);
  spectrum.main_beam_efficiency = fraction(cards, "BEAMEFF", spectrum);
  const auto resolution = cards.number("FREQRES");
  if (resolution && *resolution != 0.0) spectrum.resolution_hz = std::abs(*resolution);
}

void make_holes_of_infinities(Eigen::ArrayXd& intensity) {
  for (double& value : intensity) {
    if (std::isinf(value)) value = std::numeric_limits<double>::quiet_NaN();
  }
}

}  // namespace trotline
