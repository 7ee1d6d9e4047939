#pragma once

#include <string>
#include <vector>

#include <trotline/species/species.hpp>

namespace trotline {

/// The species files that can be found by name, in one or more folders; the first folder that has a name
/// wins. A species file is NAME.yaml, and the name inside must agree with the file's.
class SpeciesLibrary {
 public:
  /// @param folders  in the order in which they are searched; folders that do not exist are passed over
  explicit SpeciesLibrary(std::vector<std::string> folders);

  /// The folders that the program searches: those of the environment variable TROTLINE_SPECIES_PATH
  /// (separated by ':'), configs/species beside the build's sources or the program, share/trotline/species
  /// of the installation.
  [[nodiscard]] static std::vector<std::string> standard_folders();

  /// Species by name in any case, or by the path of a species file (anything with '/' or ending in .yaml).
  /// @throws InputError  with the nearest names when there is no such species; as read_species_file
  [[nodiscard]] Species find(const std::string& name_or_path) const;

  /// All names, sorted without regard to case.
  [[nodiscard]] std::vector<std::string> names() const;

 private:
  std::vector<std::string> folders_;
};

}  // namespace trotline
