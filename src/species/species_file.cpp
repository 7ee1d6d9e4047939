#include <fmt/format.h>

#include <algorithm>
#include <array>

#include <trotline/base/files.hpp>
#include <trotline/base/text.hpp>
#include <trotline/species/species_file.hpp>

#include "species_kinds.hpp"

namespace trotline {
namespace {

/// A kind of species file and what reads it.
struct KindOfFile {
  SpeciesKind kind;
  void (*read)(const FileMap& file, Species& species);
};

constexpr std::array kKinds = {
    KindOfFile{SpeciesKind::linear, read_linear},
    KindOfFile{SpeciesKind::symmetric, read_symmetric},
    KindOfFile{SpeciesKind::asymmetric, read_asymmetric},
    KindOfFile{SpeciesKind::triplet_sigma, read_triplet_sigma},
    KindOfFile{SpeciesKind::inversion, read_inversion},
    KindOfFile{SpeciesKind::structure, read_structure},
    KindOfFile{SpeciesKind::levels, read_levels},
    KindOfFile{SpeciesKind::line_list, read_line_list},
};

const KindOfFile& find_kind(const FileMap& file) {
  const std::string written = file.text("kind");
  const auto kind = std::find_if(kKinds.begin(), kKinds.end(), [&](const KindOfFile& candidate) {
    return name_of(candidate.kind) == written;
  });
  if (kind != kKinds.end()) return *kind;
  std::vector<std::string> names;
  for (const KindOfFile& candidate : kKinds) names.emplace_back(name_of(candidate.kind));
  file.refuse("kind", {fmt::format("the kind '{}' is not known", printable(written)),
                       fmt::format("one of {}", listed(names)), did_you_mean(written, names)});
}

/// A name is also a file's and a word on a command line, so it is plain ASCII.
std::string read_name(const FileMap& file) {
  constexpr std::string_view kAllowed =
      "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+-_.,()=";
  constexpr std::size_t kLongest = 60;
  std::string name = file.text("name");
  if (name.find_first_not_of(kAllowed) != std::string::npos || name.size() > kLongest ||
      name.front() == '-' || name.front() == '.') {
    file.refuse("name", {fmt::format("the name '{}' cannot be typed everywhere", printable(name)),
                         "at most 60 letters, digits and + - _ . , ( ) =, e.g. 'c-C3H2'"});
  }
  return name;
}

/// What people write as it is printed: any script, but on one line.
std::string read_print_text(const FileMap& file, const std::string& key, const std::string& otherwise) {
  return printable(file.optional_text(key, otherwise));
}

YAML::Node load(const std::string& text, const std::string& name) {
  if (!is_utf8(text)) throw InputError({name}, {"the file is not UTF-8 text", "a species file in YAML"});
  try {
    const std::vector<YAML::Node> documents = YAML::LoadAll(text);
    if (documents.empty() || documents.front().IsNull()) {
      throw InputError({name}, {"the file holds nothing", "a species file in YAML"});
    }
    if (documents.size() > 1) throw InputError({name}, {"the file holds several YAML documents", "one"});
    return documents.front();
  } catch (const YAML::Exception& error) {
    const auto line = static_cast<std::size_t>(std::max(error.mark.line, -1) + 1);
    const auto column = static_cast<std::size_t>(std::max(error.mark.column, -1) + 1);
    throw InputError({name, line, column},
                     {"this is no YAML: " + printable(error.msg), "a species file in YAML"});
  }
}

}  // namespace

Species parse_species(const std::string& text, const std::string& name) {
  const FileMap file(load(text, name), "", name);
  Species species;
  species.file = name;
  species.file_fingerprint = fingerprint(text);
  species.name = read_name(file);
  species.formula = read_print_text(file, "formula", species.name);
  species.note = read_print_text(file, "note", "");
  const KindOfFile& kind = find_kind(file);
  species.kind = kind.kind;
  kind.read(file, species);
  file.finish();
  return species;
}

Species read_species_file(const std::string& path) {
  constexpr std::size_t kLargestFile = std::size_t{1} << 26;
  return parse_species(read_file(path, kLargestFile), path);
}

}  // namespace trotline
