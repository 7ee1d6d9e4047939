#pragma once

#include <string>

#include <trotline/analysis/result.hpp>
#include <trotline/analysis/run_description.hpp>
#include <trotline/analysis/run_options.hpp>
#include <trotline/observation/intensity_table.hpp>
#include <trotline/species/library.hpp>
#include <trotline/species/species.hpp>

namespace trotline {

/// Analyses one source and one species: the single path that every verb and binding shares.
///
/// Rows are matched to transitions, brought to the main-beam scale, corrected for beam filling and fitted by
/// the method of the options. Rows that are limits are compared with the model, not fitted by the straight
/// line. Data that cannot answer give a Result with a status other than `done` and what can be said.
/// @throws InputError  as match_rows, and where a row lacks what the options ask of it (a beam, an efficiency)
[[nodiscard]] Result analyse(const Species& species, const IntensityTable& table, const RunOptions& options);

/// Reads the species and the table of a description and analyses them; the table's fingerprint goes into the
/// provenance. Where the description measures spectra, their lines make the table.
/// @throws InputError as SpeciesLibrary::find, read_intensity_table, measure and analyse
[[nodiscard]] Result analyse(const RunDescription& run, const SpeciesLibrary& library);

/// The same for lines that were measured already by what `run.measure` says: how goes into the provenance.
[[nodiscard]] Result analyse(const RunDescription& run, const SpeciesLibrary& library,
                             const SpeciesMeasurement& measured);

}  // namespace trotline
