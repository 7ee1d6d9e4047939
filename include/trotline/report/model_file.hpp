#pragma once

#include <string>

#include <trotline/analysis/predicted_spectrum.hpp>
#include <trotline/species/library.hpp>

namespace trotline {

/// The source that a result.json describes: species, temperature, column density, size and background.
/// @throws InputError naming the file: no result of the program, or one without temperature and column density;
///         as SpeciesLibrary::find
[[nodiscard]] PredictedSource read_model_file(const std::string& path, const SpeciesLibrary& library);

}  // namespace trotline
