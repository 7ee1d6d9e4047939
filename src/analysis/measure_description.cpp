#include <trotline/analysis/measure_description.hpp>
#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/base/version.hpp>
#include <trotline/physics/constants.hpp>

namespace trotline {
namespace {

void state_noise(const SpectrumInput& input, Spectrum& spectrum) {
  if (!input.noise) return;
  if (input.noise_is_flux != (spectrum.scale == IntensityScale::flux_per_beam)) {
    const char* unit = input.noise_is_flux ? "K" : "Jy/beam";
    throw InputError(Place{spectrum.name}, {fmt::format("the spectrum is in {}, the stated noise is not", unit),
                                            "the noise of one channel in the unit of the spectrum"});
  }
  spectrum.noise_sigma = input.noise;
}

/// What a person states counts in place of what the header says.
void lay_over(const SpectrumInput& input, Spectrum& spectrum) {
  if (input.beam_fwhm_rad) spectrum.beam_fwhm_rad = input.beam_fwhm_rad;
  if (input.forward_efficiency) spectrum.forward_efficiency = input.forward_efficiency;
  if (input.main_beam_efficiency) spectrum.main_beam_efficiency = input.main_beam_efficiency;
  if (input.calibration_error) spectrum.calibration_error = input.calibration_error;
  if (input.resolution_hz) spectrum.resolution_hz = input.resolution_hz;
  if (input.resolution_km_s) {
    const double middle_hz = 0.5 * (spectrum.axis.low_hz() + spectrum.axis.high_hz());
    spectrum.resolution_hz = middle_hz * *input.resolution_km_s * 1e3 / constants::kLightMPerS;
  }
  state_noise(input, spectrum);
}

/// The spectra of all files, one after the other.
class InputFiles {
 public:
  explicit InputFiles(const std::vector<SpectrumInput>& inputs) : inputs_(inputs) {
    for (std::size_t i = 0; i < inputs.size(); ++i) {
      files_.emplace_back(inputs[i].path, inputs[i].reading);
      for (std::size_t k = 0; k < files_.back().size(); ++k) spectra_.push_back({i, k});
    }
  }

  [[nodiscard]] SpectrumSource source() const {
    return {spectra_.size(), [this](std::size_t i) { return read(i); }};
  }

  [[nodiscard]] std::vector<std::string> warnings() const {
    std::vector<std::string> all;
    for (std::size_t i = 0; i < files_.size(); ++i) {
      for (const std::string& warning : files_[i].warnings()) all.push_back(inputs_[i].path + ", " + warning);
    }
    return all;
  }

 private:
  struct At {
    std::size_t file;
    std::size_t index;
  };

  [[nodiscard]] Spectrum read(std::size_t i) const {
    const At& at = spectra_[i];
    Spectrum spectrum = files_[at.file].read(at.index);
    lay_over(inputs_[at.file], spectrum);
    return spectrum;
  }

  const std::vector<SpectrumInput>& inputs_;
  std::vector<SpectrumFile> files_;
  std::vector<At> spectra_;
};

void check(const MeasureDescription& description) {
  if (!description.vlsr_km_s) {
    throw InputError({"the source's V_LSR is not given", "vlsr, such as '5.2 km/s'"});
  }
  if (description.inputs.empty()) throw InputError({"no file of spectra is given", "one file or more"});
  const auto on_standard_input = std::count_if(description.inputs.begin(), description.inputs.end(),
                                               [](const SpectrumInput& input) { return input.path == "-"; });
  if (on_standard_input > 1)
    throw InputError({"standard input is given twice", "'-' once at most among the files"});
}

std::vector<std::pair<std::string, std::string>> provenance_of(const MeasureDescription& description,
                                                               const Species& species) {
  std::vector<std::string> files;
  for (const SpectrumInput& input : description.inputs) files.push_back(input.path);
  std::vector<std::pair<std::string, std::string>> pairs = {
      {"made_by", fmt::format("trotline {} measure", version())},
      {"spectra", listed(files, files.size())},
      {"species_file", species.file},
      {"species_fingerprint", species.file_fingerprint}};
  for (auto& pair : shown(description)) pairs.push_back(std::move(pair));
  return pairs;
}

}  // namespace

SpeciesMeasurement measure(const MeasureDescription& description, const SpeciesLibrary& library,
                           const MeasurementRun& run) {
  check(description);
  const Species species = library.find(description.species);
  Confusion confusion;
  for (const std::string& name : description.other_species) confusion.species.push_back(library.find(name));
  confusion.local_oscillator_hz = description.local_oscillator_hz;
  return measure(description, species, confusion, run);
}

SpeciesMeasurement measure(const MeasureDescription& description, const Species& species,
                           const Confusion& confusion, const MeasurementRun& run) {
  check(description);
  MeasurementOptions options = description.options;
  options.vlsr_km_s = *description.vlsr_km_s;
  const InputFiles files(description.inputs);
  SpeciesMeasurement result =
      measure_species(files.source(), species, description.selection, options, confusion, run);
  for (std::string& warning : files.warnings()) result.warnings.push_back(std::move(warning));
  result.table.warnings = result.warnings;
  result.table.file = description.inputs.size() == 1 ? description.inputs[0].path : "measured spectra";
  result.table.provenance = provenance_of(description, species);
  return result;
}

}  // namespace trotline
