#pragma once

#include <functional>
#include <optional>
#include <string>
#include <utility>
#include <vector>

#include <trotline/analysis/measurement.hpp>
#include <trotline/species/library.hpp>

namespace trotline {

/// A file of spectra, and what a person knows of it that counts in place of its header.
struct SpectrumInput {
  std::string path;         ///< or "-" for standard input
  SpectrumOptions reading;  ///< what the header lacks
  std::optional<double> beam_fwhm_rad;
  std::optional<double> forward_efficiency;
  std::optional<double> main_beam_efficiency;
  std::optional<double> resolution_hz;    ///< FWHM; or the next
  std::optional<double> resolution_km_s;  ///< FWHM, at the middle of the band
  std::optional<double> noise;            ///< of one channel [K], or [Jy/beam] where the next is true
  bool noise_is_flux = false;
  std::optional<double> calibration_error;
};

/// Everything that a person may set about the measurement of a species' lines. Units of the members as named.
struct MeasureDescription {
  std::vector<SpectrumInput> inputs;
  std::string species;                     ///< name, or path of a species file
  std::vector<std::string> other_species;  ///< whose lines are marked
  std::optional<double> vlsr_km_s;         ///< has to be given
  LineSelection selection;
  MeasurementOptions options;
  std::optional<double> local_oscillator_hz;  ///< in the LSRK
};

/// One option: the same word serves the command line (--two-words), the run description (two_words) and the
/// provenance.
struct MeasureOption {
  std::string key;      ///< two_words
  std::string example;  ///< a valid value
  /// Sets it for all files. @throws InputError on a value that is none
  std::function<void(MeasureDescription&, const std::string&)> set;
  /// Sets it for one file; empty where all files share it.
  std::function<void(SpectrumInput&, const std::string&)> set_file;
  /// The value in force, as text; for an option of files one value, or one a file separated by commas.
  std::function<std::string(const MeasureDescription&)> show;
};

/// All options, in the order in which they are documented.
[[nodiscard]] const std::vector<MeasureOption>& measure_option_table();

/// Sets one option from text. An option of files takes one value for all of them, or one for each, separated
/// by commas in the order of the files, which must be there before.
/// @throws InputError when there is no such key (with the nearest one), or when the value is wrong (naming
/// key, value and an example)
void set_measure_option(MeasureDescription& description, const std::string& key, const std::string& value);

/// Sets one option of one file. @throws InputError as set_measure_option, and for options that all files
/// share
void set_input_option(SpectrumInput& input, const std::string& key, const std::string& value);

/// Every option with its value in force, for provenance.
[[nodiscard]] std::vector<std::pair<std::string, std::string>> shown(const MeasureDescription& description);

/// Opens the files of a description and measures every line of its species in all spectra; the table carries
/// the options in force as its provenance.
/// @throws InputError  V_LSR not given, no file, a file twice on standard input; as SpeciesLibrary::find,
///         SpectrumFile and measure_species; a stated noise in another unit than the spectrum
[[nodiscard]] SpeciesMeasurement measure(const MeasureDescription& description,
                                         const SpeciesLibrary& library, const MeasurementRun& run = {});

/// The same for a species that is at hand; the names of species in the description do not count.
/// @throws InputError  as above, but for species that are not found
[[nodiscard]] SpeciesMeasurement measure(const MeasureDescription& description, const Species& species,
                                         const Confusion& confusion, const MeasurementRun& run = {});

}  // namespace trotline
