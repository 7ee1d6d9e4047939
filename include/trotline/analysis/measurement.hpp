#pragma once

#include <functional>
#include <optional>
#include <string>
#include <utility>
#include <vector>

#include <trotline/observation/line_measurement.hpp>
#include <trotline/physics/quantity.hpp>
#include <trotline/species/species.hpp>

namespace trotline {

/// Which transitions of a species are looked for in spectra.
struct LineSelection {
  double excitation_k = 50.0;    ///< temperature at which strengths are compared [K], > 0
  double least_strength = 1e-3;  ///< weaker lines, relative to the strongest one in the bands, are left out
  std::vector<std::string> only_lines = {};  ///< labels; empty: all. Lines that are named are never too weak
  std::vector<std::string> without_lines = {};  ///< labels that are left out
  std::vector<std::pair<std::string, VelocityRange>> windows = {};  ///< by label, in place of the common one
};

/// The transitions of a species between two frequencies that are strong enough, as requests for
/// measure_lines().
///
/// The strength is that of a thin line without background, g_u A exp(-E_u/kT) / nu^2, which is proportional
/// to its integrated intensity, W = h c^3 A N_u / (8 pi k nu^2).
/// @param bands  spans of rest frequency [Hz]
/// @throws InputError when a label that is named does not exist; DomainError when the temperature is not
/// above 0
[[nodiscard]] std::vector<LineRequest> requests_for(const Species& species,
                                                    const std::vector<QuantityRange>& bands,
                                                    const LineSelection& selection);

/// What else may lie in the windows.
struct Confusion {
  std::vector<Species> species = {};  ///< their lines are marked
  std::optional<double> local_oscillator_hz =
      {};  ///< in the LSRK: marks lines of the image sideband, mirrored about it
};

/// Lines of a species measured in several spectra.
struct SpeciesMeasurement {
  IntensityTable table;                      ///< of all spectra
  std::vector<SpectrumMeasurement> spectra;  ///< one for each spectrum, in the order given
  std::vector<std::string> warnings;
};

/// How measure_species() runs; nothing here changes a number.
struct MeasurementRun {
  int threads = 1;
  std::function<void(std::size_t done, std::size_t of)> progress = {};  ///< called from one thread at a time
};

/// Spectra that are read when they are wanted, so that a large file need not be in memory whole.
struct SpectrumSource {
  std::size_t size = 0;
  std::function<Spectrum(std::size_t)> read;  ///< may be called from several threads
};

/// Measures every line of the species that the spectra cover.
///
/// Without a width of the windows each spectrum finds its own, from its strongest line; a spectrum in which no
/// line stands out takes the window of the spectrum of the same object in which one does best. Marks of blends
/// tell spectra apart. The same spectra give the same bits, whatever the number of threads.
[[nodiscard]] SpeciesMeasurement measure_species(const SpectrumSource& spectra, const Species& species,
                                                 const LineSelection& selection,
                                                 const MeasurementOptions& options,
                                                 const Confusion& confusion = {},
                                                 const MeasurementRun& run = {});

/// The same for spectra in memory.
[[nodiscard]] SpeciesMeasurement measure_species(const std::vector<Spectrum>& spectra, const Species& species,
                                                 const LineSelection& selection,
                                                 const MeasurementOptions& options,
                                                 const Confusion& confusion = {});

}  // namespace trotline
