#include <trotline/analysis/analyse.hpp>
#include <trotline/base/files.hpp>
#include <trotline/base/text.hpp>

namespace trotline {

Result analyse(const RunDescription& run, const SpeciesLibrary& library) {
  const Species species = library.find(run.species);
  const std::string bytes = read_file(run.table);
  const std::string name = run.table == "-" ? "standard input" : run.table;
  Result result = analyse(species, parse_intensity_table(bytes, name), run.options);
  result.provenance.table_fingerprint = fingerprint(bytes);
  return result;
}

}  // namespace trotline
