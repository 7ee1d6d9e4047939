#include <trotline/analysis/analyse.hpp>
#include <trotline/base/files.hpp>
#include <trotline/base/text.hpp>

namespace trotline {
namespace {

constexpr std::size_t kMostTableBytes = std::size_t{256} << 20;  // as much as a reader of tables takes

}  // namespace

Result analyse(const RunDescription& run, const SpeciesLibrary& library) {
  if (run.measure) return analyse(run, library, measure(*run.measure, library));
  const Species species = library.find(run.species);
  const std::string bytes = read_file(run.table, kMostTableBytes);
  const std::string name = run.table == "-" ? "standard input" : run.table;
  Result result = analyse(species, parse_intensity_table(bytes, name), run.options);
  result.provenance.table_fingerprint = fingerprint(bytes);
  return result;
}

Result analyse(const RunDescription& run, const SpeciesLibrary& library, const SpeciesMeasurement& measured) {
  if (measured.table.rows.empty()) {
    throw InputError(Place{measured.table.file},
                     {"no line could be measured: " + listed(measured.warnings, 4), "lines of " + run.species});
  }
  Result result = analyse(library.find(run.species), measured.table, run.options);
  result.provenance.table_fingerprint = fingerprint(to_ecsv(measured.table));
  for (const auto& [name, value] : measured.table.provenance)
    result.provenance.options.emplace_back("measure." + name, value);
  return result;
}

}  // namespace trotline
