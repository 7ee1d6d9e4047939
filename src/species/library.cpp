#include <fmt/format.h>

#include <algorithm>
#include <cstdlib>
#include <filesystem>

#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/species/library.hpp>
#include <trotline/species/species_file.hpp>

namespace trotline {
namespace fs = std::filesystem;
namespace {

constexpr std::string_view kExtension = ".yaml";

bool is_path(const std::string& name) {
  return name.find('/') != std::string::npos || lower_case(name).ends_with(kExtension);
}

/// The species files of a folder, sorted; none where it cannot be read.
std::vector<fs::path> files_in(const std::string& folder) {
  std::vector<fs::path> files;
  std::error_code error;
  for (const auto& entry : fs::directory_iterator(folder, error)) {
    if (entry.path().extension() == kExtension) files.push_back(entry.path());
  }
  std::sort(files.begin(), files.end());
  return files;
}

/// The file of that name, or else the first whose name differs in case alone.
fs::path file_named(const std::string& folder, const std::string& name) {
  fs::path nearest;
  for (const fs::path& file : files_in(folder)) {
    const std::string stem = file.stem().string();
    if (stem == name) return file;
    if (nearest.empty() && lower_case(stem) == lower_case(name)) nearest = file;
  }
  return nearest;
}

Species read_named(const fs::path& file) {
  Species species = read_species_file(file.string());
  if (species.name != file.stem().string()) {
    throw InputError({file.string()}, {fmt::format("the species in this file is called '{}'", species.name),
                                       fmt::format("'{}', as the file is named", file.stem().string())});
  }
  return species;
}

void add_path_list(const char* list, std::vector<std::string>& folders) {
  std::string_view rest = list;
  while (!rest.empty()) {
    const std::size_t end = std::min(rest.find(':'), rest.size());
    if (end > 0) folders.emplace_back(rest.substr(0, end));
    rest.remove_prefix(std::min(end + 1, rest.size()));
  }
}

}  // namespace

SpeciesLibrary::SpeciesLibrary(std::vector<std::string> folders) : folders_(std::move(folders)) {}

std::vector<std::string> SpeciesLibrary::standard_folders() {
  std::vector<std::string> folders;
  if (const char* const chosen = std::getenv("TROTLINE_SPECIES_PATH")) add_path_list(chosen, folders);
  folders.emplace_back(TROTLINE_SOURCE_SPECIES_DIR);
  std::error_code error;
  const fs::path program = fs::read_symlink("/proc/self/exe", error);
  if (!error) {
    const fs::path beside = program.parent_path();
    folders.push_back((beside / "configs" / "species").string());
    folders.push_back((beside.parent_path() / "share" / "trotline" / "species").string());
  }
  folders.emplace_back(TROTLINE_INSTALLED_SPECIES_DIR);
  return folders;
}

Species SpeciesLibrary::find(const std::string& name_or_path) const {
  if (is_path(name_or_path)) return read_species_file(name_or_path);
  for (const std::string& folder : folders_) {
    const fs::path file = file_named(folder, name_or_path);
    if (!file.empty()) return read_named(file);
  }
  const auto known = names();
  const std::string expected =
      known.empty() ? fmt::format("a species file in one of {}", listed(folders_))
                    : fmt::format("one of {}, or the path of a species file", listed(known, 40));
  throw InputError({fmt::format("there is no species '{}'", printable(name_or_path)), expected,
                    did_you_mean(name_or_path, known)});
}

std::vector<std::string> SpeciesLibrary::names() const {
  std::vector<std::string> names;
  for (const std::string& folder : folders_) {
    for (const fs::path& file : files_in(folder)) names.push_back(file.stem().string());
  }
  std::sort(names.begin(), names.end(), [](const std::string& a, const std::string& b) {
    const auto [x, y] = std::pair(lower_case(a), lower_case(b));
    return x != y ? x < y : a < b;
  });
  names.erase(std::unique(names.begin(), names.end()), names.end());
  return names;
}

}  // namespace trotline
