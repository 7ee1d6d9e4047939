#include <set>

#include <trotline/analysis/measurement.hpp>
#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/physics/constants.hpp>

namespace trotline {
namespace {

/// Proportional to the intensity of a thin line. Frequencies in GHz keep the numbers near one.
double strength(const Species& species, const Transition& transition, double excitation_k) {
  const Level& upper = species.levels[transition.upper];
  const double ghz = transition.frequency_hz * 1e-9;
  return upper.degeneracy * transition.einstein_a_per_s * std::exp(-upper.energy_k / excitation_k) /
         (ghz * ghz);
}

bool is_in(const std::vector<QuantityRange>& bands, double frequency_hz) {
  return std::any_of(bands.begin(), bands.end(), [&](const QuantityRange& band) {
    return frequency_hz >= band.low && frequency_hz <= band.high;
  });
}

/// Indices of the transitions that are named; all others may come too when none is.
std::set<std::size_t> named_transitions(const Species& species, const std::vector<std::string>& labels) {
  std::set<std::size_t> named;
  for (const std::string& label : labels) {
    const auto found = transitions_labelled(species, label);
    if (found.empty()) {
      throw InputError(
          {fmt::format("{} has no transition '{}'", species.name, printable(label)),
           "a label such as " + (species.transitions.empty()
                                     ? std::string("those of the species file")
                                     : "'" + transition_label(species, species.transitions.front()) + "'")});
    }
    named.insert(found.begin(), found.end());
  }
  return named;
}

LineRequest request_of(const Species& species, const Transition& transition) {
  LineRequest request;
  request.label = transition_label(species, transition);
  request.rest_frequency_hz = transition.frequency_hz;
  request.tag = species.name;
  return request;
}

/// Rest frequencies that a spectrum covers, for a source at this velocity, with room for half a window.
QuantityRange band_of(const Spectrum& spectrum, const MeasurementOptions& options) {
  const double factor = 1.0 / (1.0 - options.vlsr_km_s * 1e3 / constants::kLightMPerS);
  const double margin = options.window_km_s.value_or(options.search_km_s) * 1e3 / constants::kLightMPerS;
  return {spectrum.axis.low_hz() * factor * (1.0 - margin),
          spectrum.axis.high_hz() * factor * (1.0 + margin)};
}

std::vector<LineRequest> as_neighbours(std::vector<LineRequest> requests) {
  for (LineRequest& request : requests) request.measure = false;
  return requests;
}

/// A line of the image sideband appears mirrored about the local oscillator: the rest frequency that a line
/// of the signal band would need to appear there.
std::vector<LineRequest> mirrored(std::vector<LineRequest> requests, double oscillator_hz, double vlsr_km_s) {
  const double doppler = 1.0 - vlsr_km_s * 1e3 / constants::kLightMPerS;
  std::vector<LineRequest> images;
  for (LineRequest& request : requests) {
    const double apparent = 2.0 * oscillator_hz / doppler - request.rest_frequency_hz;
    if (!(apparent > 0.0)) continue;
    request.rest_frequency_hz = apparent;
    request.label += " (image sideband)";
    images.push_back(std::move(request));
  }
  return images;
}

/// Lines of other species and of the image sideband that fall into a band.
std::vector<LineRequest> neighbours_in(const QuantityRange& band, const Species& species,
                                       const LineSelection& selection, const MeasurementOptions& options,
                                       const Confusion& confusion) {
  LineSelection any = selection;
  any.only_lines.clear();
  std::vector<LineRequest> found;
  const auto add = [&](std::vector<LineRequest> requests) {
    for (LineRequest& request : as_neighbours(std::move(requests))) found.push_back(std::move(request));
  };
  for (const Species& other : confusion.species) add(requests_for(other, {band}, any));
  if (!confusion.local_oscillator_hz) return found;
  const double doppler = 1.0 - options.vlsr_km_s * 1e3 / constants::kLightMPerS;
  const double twice = 2.0 * *confusion.local_oscillator_hz / doppler;
  const QuantityRange image{twice - band.high, twice - band.low};
  add(mirrored(requests_for(species, {image}, any), *confusion.local_oscillator_hz, options.vlsr_km_s));
  for (const Species& other : confusion.species) {
    add(mirrored(requests_for(other, {image}, any), *confusion.local_oscillator_hz, options.vlsr_km_s));
  }
  return found;
}

}  // namespace

std::vector<LineRequest> requests_for(const Species& species, const std::vector<QuantityRange>& bands,
                                      const LineSelection& selection) {
  if (!(selection.excitation_k > 0.0 && std::isfinite(selection.excitation_k))) {
    throw DomainError("excitation_k", selection.excitation_k, "finite and above 0");
  }
  const std::set<std::size_t> named = named_transitions(species, selection.only_lines);
  double strongest = 0.0;
  for (const Transition& transition : species.transitions) {
    if (is_in(bands, transition.frequency_hz)) {
      strongest = std::max(strongest, strength(species, transition, selection.excitation_k));
    }
  }
  std::vector<LineRequest> requests;
  for (std::size_t i = 0; i < species.transitions.size(); ++i) {
    const Transition& transition = species.transitions[i];
    if (!is_in(bands, transition.frequency_hz)) continue;
    const bool wanted = named.empty() ? strength(species, transition, selection.excitation_k) >=
                                            selection.least_strength * strongest
                                      : named.contains(i);
    if (wanted) requests.push_back(request_of(species, transition));
  }
  return requests;
}

SpeciesMeasurement measure_species(const std::vector<Spectrum>& spectra, const Species& species,
                                   const LineSelection& selection, const MeasurementOptions& options,
                                   const Confusion& confusion) {
  std::vector<QuantityRange> bands;
  for (const Spectrum& spectrum : spectra) bands.push_back(band_of(spectrum, options));
  const std::vector<LineRequest> wanted = requests_for(species, bands, selection);
  SpeciesMeasurement result;
  if (wanted.empty()) {
    result.warnings.push_back(fmt::format("no line of {} lies in the spectra", species.name));
  }
  for (std::size_t i = 0; i < spectra.size(); ++i) {
    std::vector<LineRequest> requests;
    for (const LineRequest& request : wanted) {
      if (is_in({bands[i]}, request.rest_frequency_hz)) requests.push_back(request);
    }
    for (LineRequest& other : neighbours_in(bands[i], species, selection, options, confusion))
      requests.push_back(std::move(other));
    result.spectra.push_back(measure_lines(spectra[i], requests, options));
    const IntensityTable table = to_intensity_table(spectra[i], result.spectra.back(), options);
    result.table.rows.insert(result.table.rows.end(), table.rows.begin(), table.rows.end());
    result.warnings.insert(result.warnings.end(), table.warnings.begin(), table.warnings.end());
    result.warnings.insert(result.warnings.end(), spectra[i].warnings.begin(), spectra[i].warnings.end());
  }
  for (std::size_t i = 0; i < result.table.rows.size(); ++i) result.table.rows[i].line_number = i + 1;
  result.table.warnings = result.warnings;
  return result;
}

}  // namespace trotline
