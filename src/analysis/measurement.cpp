#include <atomic>
#include <exception>
#include <mutex>
#include <set>
#include <thread>

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

std::map<std::size_t, VelocityRange> windows_by_transition(
    const Species& species, const std::vector<std::pair<std::string, VelocityRange>>& windows) {
  std::map<std::size_t, VelocityRange> found;
  for (const auto& [label, window] : windows) {
    for (const std::size_t i : named_transitions(species, {label})) found[i] = window;
  }
  return found;
}

/// Rest frequencies that a spectrum covers, for a source at this velocity.
QuantityRange covered_by(const Spectrum& spectrum, double vlsr_km_s) {
  const double factor = 1.0 / (1.0 - vlsr_km_s * 1e3 / constants::kLightMPerS);
  return {spectrum.axis.low_hz() * factor, spectrum.axis.high_hz() * factor};
}

/// The same with room for half a window.
QuantityRange band_of(const Spectrum& spectrum, const MeasurementOptions& options) {
  const QuantityRange covered = covered_by(spectrum, options.vlsr_km_s);
  const double widest_km_s = options.window_km_s.value_or(options.search_km_s.value_or(kSearchKmS));
  const double margin = widest_km_s * 1e3 / constants::kLightMPerS;
  return {covered.low * (1.0 - margin), covered.high * (1.0 + margin)};
}

std::string in_ghz(const QuantityRange& band) {
  return fmt::format("{:.6g} to {:.6g} GHz", band.low * 1e-9, band.high * 1e-9);
}

std::vector<std::string> labels_of(const std::vector<LineRequest>& requests) {
  std::vector<std::string> labels;
  for (const LineRequest& request : requests) labels.push_back(request.label);
  return labels;
}

/// What least_strength alone leaves out, named; empty: nothing.
std::string weaker_lines(const Species& species, const std::vector<QuantityRange>& bands,
                         const LineSelection& selection, const std::vector<LineRequest>& wanted) {
  if (!selection.only_lines.empty()) return {};
  LineSelection all = selection;
  all.least_strength = 0.0;
  std::vector<std::string> labels = labels_of(requests_for(species, bands, all));
  const std::vector<std::string> kept = labels_of(wanted);
  const std::set<std::string> shown(kept.begin(), kept.end());
  std::erase_if(labels, [&](const std::string& label) { return shown.contains(label); });
  if (labels.empty()) return {};
  return fmt::format(
      "{} weaker line{} of {} in the bands {} left out, below {:g} of the strongest at {:g} K: {}; "
      "--least-strength or --excitation bring{} {} in",
      labels.size(), labels.size() == 1 ? "" : "s", species.name, labels.size() == 1 ? "is" : "are",
      selection.least_strength, selection.excitation_k, listed(labels, 4), labels.size() == 1 ? "s" : "",
      labels.size() == 1 ? "it" : "them");
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
  any.without_lines.clear();
  any.windows.clear();
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

/// What is asked of every spectrum.
struct Question {
  const Species& species;
  const LineSelection& selection;
  const MeasurementOptions& options;
  const Confusion& confusion;
};

/// One spectrum, measured.
struct Answer {
  SpectrumMeasurement measurement;
  IntensityTable table;
};

Answer measure_one(const Question& question, const Spectrum& spectrum, const std::vector<LineRequest>& wanted,
                   const std::optional<VelocityRange>& window) {
  const QuantityRange band = band_of(spectrum, question.options);
  std::vector<LineRequest> requests;
  for (const LineRequest& request : wanted) {
    if (!is_in({band}, request.rest_frequency_hz)) continue;
    requests.push_back(request);
    if (window && !request.window) requests.back().window = window;
  }
  for (LineRequest& other :
       neighbours_in(band, question.species, question.selection, question.options, question.confusion)) {
    requests.push_back(std::move(other));
  }
  MeasurementOptions options = question.options;
  if (window) options.window_km_s = window->high_km_s - window->low_km_s;
  Answer answer;
  answer.measurement = measure_lines(spectrum, requests, options);
  answer.table = to_intensity_table(spectrum, answer.measurement, question.options);
  answer.table.warnings.insert(answer.table.warnings.end(), spectrum.warnings.begin(),
                               spectrum.warnings.end());
  return answer;
}

/// Calls work(i) for i below `count` from several threads; the first exception, by index, is thrown on.
void for_each_index(std::size_t count, int threads, const std::function<void(std::size_t)>& work) {
  std::atomic<std::size_t> next = 0;
  std::mutex mutex;
  std::map<std::size_t, std::exception_ptr> thrown;
  const auto run = [&] {
    for (std::size_t i = next++; i < count; i = next++) {
      try {
        work(i);
      } catch (...) {
        const std::scoped_lock lock(mutex);
        thrown.emplace(i, std::current_exception());
        next = count;
      }
    }
  };
  std::vector<std::jthread> helpers;
  const auto most = static_cast<std::size_t>(std::max(1, threads));
  for (std::size_t t = 1; t < std::min(most, count); ++t) helpers.emplace_back(run);
  run();
  helpers.clear();  // waits for them
  if (!thrown.empty()) std::rethrow_exception(thrown.begin()->second);
}

class SpeciesMeasurer {
 public:
  SpeciesMeasurer(const Question& question, const SpectrumSource& spectra, const MeasurementRun& run)
      : question_(question), spectra_(spectra), run_(run), answers_(spectra.size) {}

  SpeciesMeasurement measure() {
    find_wanted();
    for_each_index(spectra_.size, run_.threads, [&](std::size_t i) {
      answers_[i] = measure_one(question_, spectra_.read(i), wanted_, std::nullopt);
      report_progress();
    });
    if (!question_.options.window_km_s) share_windows();
    return gather();
  }

 private:
  void find_wanted() {
    std::vector<QuantityRange> bands(spectra_.size);
    covered_.resize(spectra_.size);
    for_each_index(spectra_.size, run_.threads, [&](std::size_t i) {
      const Spectrum spectrum = spectra_.read(i);
      bands[i] = band_of(spectrum, question_.options);
      covered_[i] = covered_by(spectrum, question_.options.vlsr_km_s);
    });
    bands = distinct(std::move(bands));
    wanted_ = requests_for(question_.species, bands, question_.selection);
    weaker_ = weaker_lines(question_.species, bands, question_.selection, wanted_);
  }

  static std::vector<QuantityRange> distinct(std::vector<QuantityRange> bands) {
    const auto ends = [](const QuantityRange& band) { return std::pair(band.low, band.high); };
    std::sort(bands.begin(), bands.end(), [&](const auto& a, const auto& b) { return ends(a) < ends(b); });
    bands.erase(std::unique(bands.begin(), bands.end(),
                            [&](const auto& a, const auto& b) { return ends(a) == ends(b); }),
                bands.end());
    return bands;
  }

  void report_progress() {
    const std::scoped_lock lock(mutex_);
    ++done_;
    if (run_.progress) run_.progress(done_, spectra_.size);
  }

  /// Where no line stands out, the window comes from the spectrum of the same object in which one does best.
  void share_windows() {
    std::map<std::string, const SpectrumMeasurement*> best;
    for (const Answer& answer : answers_) {
      const SpectrumMeasurement& here = answer.measurement;
      const SpectrumMeasurement*& there = best[here.object.value_or("")];
      if (here.window_snr > 0.0 && (there == nullptr || here.window_snr > there->window_snr)) there = &here;
    }
    std::map<std::string, VelocityRange> windows;
    for (const auto& [object, measurement] : best) {
      if (measurement != nullptr) windows[object] = measurement->window;
    }
    for_each_index(spectra_.size, run_.threads, [&](std::size_t i) {
      const SpectrumMeasurement& here = answers_[i].measurement;
      const auto window = windows.find(here.object.value_or(""));
      if (here.window_snr > 0.0 || here.lines.empty() || window == windows.end()) return;
      answers_[i] = measure_one(question_, spectra_.read(i), wanted_, window->second);
      answers_[i].measurement.window = window->second;
    });
  }

  /// A blend is one measurement in one spectrum: another spectrum's gets another mark.
  void tell_blends_apart() {
    if (answers_.size() < 2) return;
    for (std::size_t i = 0; i < answers_.size(); ++i) {
      const std::string suffix = fmt::format(", spectrum {}", i + 1);
      for (LineMeasurement& line : answers_[i].measurement.lines) {
        if (!line.blend.empty()) line.blend += suffix;
      }
      for (IntensityRow& row : answers_[i].table.rows) {
        if (row.blend) *row.blend += suffix;
      }
    }
  }

  SpeciesMeasurement gather() {
    tell_blends_apart();
    SpeciesMeasurement result;
    if (std::string text = without_lines(); !text.empty()) result.warnings.push_back(std::move(text));
    if (!weaker_.empty()) result.warnings.push_back(weaker_);
    for (Answer& answer : answers_) {
      for (IntensityRow& row : answer.table.rows) {
        row.line_number = result.table.rows.size() + 1;
        result.table.rows.push_back(std::move(row));
      }
      for (std::string& warning : answer.table.warnings) add_warning(std::move(warning), result.warnings);
      result.spectra.push_back(std::move(answer.measurement));
    }
    result.table.warnings = result.warnings;
    return result;
  }

  static bool has_line(const Answer& answer) {
    return std::any_of(answer.measurement.lines.begin(), answer.measurement.lines.end(),
                       [](const LineMeasurement& line) { return line.status != LineStatus::not_covered; });
  }

  /// Names the spectra in which no line lies, with what they cover; empty: there are none.
  [[nodiscard]] std::string without_lines() const {
    std::vector<std::string> names;
    for (std::size_t i = 0; i < answers_.size(); ++i) {
      if (has_line(answers_[i])) continue;
      names.push_back(fmt::format("{} ({})", answers_[i].measurement.spectrum, in_ghz(covered_[i])));
    }
    if (names.empty()) return {};
    const bool all = names.size() == answers_.size();
    const bool chosen = !question_.selection.only_lines.empty() || !question_.selection.without_lines.empty();
    return fmt::format("no {}line of {} lies in {}; rest frequencies covered at V_LSR {:g} km/s: {}",
                       chosen ? "chosen " : "", question_.species.name, all ? "the spectra" : "some spectra",
                       question_.options.vlsr_km_s, listed(names, 4));
  }

  static void add_warning(std::string warning, std::vector<std::string>& warnings) {
    if (std::find(warnings.begin(), warnings.end(), warning) == warnings.end())
      warnings.push_back(std::move(warning));
  }

  Question question_;
  const SpectrumSource& spectra_;
  const MeasurementRun& run_;
  std::vector<LineRequest> wanted_;
  std::vector<QuantityRange> covered_;  ///< rest frequencies of each spectrum [Hz]
  std::string weaker_;
  std::vector<Answer> answers_;
  std::mutex mutex_;
  std::size_t done_ = 0;
};

}  // namespace

std::vector<LineRequest> requests_for(const Species& species, const std::vector<QuantityRange>& bands,
                                      const LineSelection& selection) {
  if (!(selection.excitation_k > 0.0 && std::isfinite(selection.excitation_k))) {
    throw DomainError("excitation_k", selection.excitation_k, "finite and above 0");
  }
  const std::set<std::size_t> named = named_transitions(species, selection.only_lines);
  const std::set<std::size_t> unwanted = named_transitions(species, selection.without_lines);
  const auto windows = windows_by_transition(species, selection.windows);
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
    if (!wanted || unwanted.contains(i)) continue;
    requests.push_back(request_of(species, transition));
    if (const auto window = windows.find(i); window != windows.end()) requests.back().window = window->second;
  }
  return requests;
}

SpeciesMeasurement measure_species(const SpectrumSource& spectra, const Species& species,
                                   const LineSelection& selection, const MeasurementOptions& options,
                                   const Confusion& confusion, const MeasurementRun& run) {
  return SpeciesMeasurer({species, selection, options, confusion}, spectra, run).measure();
}

SpeciesMeasurement measure_species(const std::vector<Spectrum>& spectra, const Species& species,
                                   const LineSelection& selection, const MeasurementOptions& options,
                                   const Confusion& confusion) {
  const SpectrumSource source{spectra.size(), [&](std::size_t i) { return spectra[i]; }};
  return measure_species(source, species, selection, options, confusion);
}

}  // namespace trotline
