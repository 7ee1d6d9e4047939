#include <fmt/format.h>

#include <nlohmann/json.hpp>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/base/text.hpp>
#include <trotline/physics/angle.hpp>
#include <trotline/report/model_file.hpp>

namespace trotline {
namespace {

using Json = nlohmann::json;


Json document(const std::string& path) {
  constexpr std::size_t kMostBytes = std::size_t{1} << 28;
  Json json = Json::parse(read_file(path, kMostBytes), nullptr, false);
  if (!json.is_object() || !json.contains("species") || !json["species"].is_string()) {
    throw InputError(Place{path}, {"is no result of a fit", "the file result.json that 'trotline fit' writes"});
  }
  return json;
}

double number_at(const Json& json, const std::string& pointer, double missing) {
  const Json::json_pointer at(pointer);
  return json.contains(at) && json[at].is_number() ? json[at].get<double>() : missing;
}

double needed(const Json& json, const std::string& pointer, const std::string& path) {
  const double value = number_at(json, pointer, 0.0);
  if (value > 0.0) return value;
  throw InputError(Place{path}, {fmt::format("'{}' is not known in this result", pointer.substr(1)),
                                 "a fit that gave a temperature and a column density"});
}

SourceShape shape_of(const Json& json) {
  const Json::json_pointer at("/provenance/options/source_shape");
  return json.contains(at) && json[at] == "disc" ? SourceShape::disc : SourceShape::gaussian;
}

/// By name; a species that only its file knows by the file.
Species species_of(const Json& json, const SpeciesLibrary& library) {
  const Json::json_pointer file("/provenance/species_file");
  try {
    return library.find(json["species"].get<std::string>());
  } catch (const InputError&) {
    if (!json.contains(file) || !json[file].is_string()) throw;
    return library.find(json[file].get<std::string>());
  }
}

}  // namespace

PredictedSource read_model_file(const std::string& path, const SpeciesLibrary& library) {
  const Json json = document(path);
  PredictedSource source;
  source.species = species_of(json, library);
  source.temperature_k = needed(json, "/temperature_k/value", path);
  source.column_density_cm2 = needed(json, "/column_density_cm2/value", path);
  source.source_size_rad = number_at(json, "/source_size_arcsec", 0.0) * kRadPerArcsec;
  source.shape = shape_of(json);
  source.background_k = number_at(json, "/background_k", 0.0);
  return source;
}

}  // namespace trotline
