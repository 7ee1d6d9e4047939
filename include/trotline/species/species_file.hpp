#pragma once

#include <string>

#include <trotline/species/species.hpp>

namespace trotline {

/// Reads a species file (YAML; the format is described in docs/species-files.md).
/// @throws InputError with file, line and column of the first thing that is wrong
[[nodiscard]] Species read_species_file(const std::string& path);

/// The same from text. @param name  stands for the file name in messages and in Species::file; relative
/// paths in the text (to a line list) are taken from the folder of `name`
[[nodiscard]] Species parse_species(const std::string& text, const std::string& name);

}  // namespace trotline
