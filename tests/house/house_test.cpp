// The rules of the house, read off the sources themselves.

#include <gtest/gtest.h>

#include <filesystem>
#include <fstream>
#include <map>
#include <regex>
#include <set>
#include <string>
#include <vector>

namespace {

namespace fs = std::filesystem;

/// What each room may look at: the rooms on its left.
const std::map<std::string, std::set<std::string>> kLeft = {
    {"base", {}},
    {"physics", {"base"}},
    {"rotor", {"base", "physics"}},
    {"species", {"base", "physics", "rotor"}},
    {"observation", {"base", "physics"}},
    {"excitation", {"base", "physics", "rotor", "species", "observation"}},
    {"inference", {"base", "physics", "rotor", "species", "observation", "excitation"}},
    {"analysis", {"base", "physics", "rotor", "species", "observation", "excitation", "inference"}},
    {"report", {"base", "physics", "rotor", "species", "observation", "excitation", "inference", "analysis"}},
    {"survey",
     {"base", "physics", "rotor", "species", "observation", "excitation", "inference", "analysis", "report"}},
    {"cli",
     {"base", "physics", "rotor", "species", "observation", "excitation", "inference", "analysis", "report",
      "survey"}},
};

/// In which rooms a library's name may appear.
const std::vector<std::pair<std::string, std::set<std::string>>> kLibraries = {
    {"CLI/", {"cli"}},
    {"fitsio", {"observation"}},
    {"wcslib/", {"physics", "observation"}},
    {"nlohmann/", {"report", "survey"}},
    {"sqlite", {"survey"}},
    {"kainjow/", {"report"}},
    {"yaml-cpp/", {"species", "observation", "analysis", "report", "survey"}},
    {"tbb/", {"survey"}},
    {"oneapi/", {"survey"}},
    {"ceres/", {"inference", "observation"}},
    {"erfa", {"observation"}},
    {"zlib", {"observation"}},
    {"gtest", {}},
    {"benchmark/", {}},
};

struct Include {
  fs::path file;
  std::string room;
  std::string header;
};

std::vector<Include> includes_below(const std::string& folder) {
  static const std::regex kInclude(R"(^\s*#\s*include\s*[<"]([^>"]+)[>"])");
  std::vector<Include> includes;
  for (const auto& [room, left] : kLeft) {
    const fs::path base = fs::path(TROTLINE_SOURCE_DIR) / folder / room;
    if (!fs::exists(base)) continue;
    for (const auto& entry : fs::recursive_directory_iterator(base)) {
      if (entry.path().extension() != ".hpp" && entry.path().extension() != ".cpp") continue;
      std::ifstream file(entry.path());
      for (std::string line; std::getline(file, line);) {
        std::smatch match;
        if (std::regex_search(line, match, kInclude)) includes.push_back({entry.path(), room, match[1]});
      }
    }
  }
  return includes;
}

std::string room_of(const std::string& header) {
  const std::string prefix = "trotline/";
  if (!header.starts_with(prefix)) return {};
  return header.substr(prefix.size(), header.find('/', prefix.size()) - prefix.size());
}

TEST(House, NoRoomLooksToItsRight) {
  int seen = 0;
  for (const std::string folder : {"include/trotline", "src"}) {
    for (const Include& include : includes_below(folder)) {
      const std::string target = room_of(include.header);
      if (target.empty() || target == include.room) continue;
      ++seen;
      EXPECT_TRUE(kLeft.at(include.room).contains(target)) << include.file << " includes " << include.header;
    }
  }
  EXPECT_GT(seen, 50);
}

TEST(House, EigenIsTheOnlyLibraryInPublicHeaders) {
  static const std::regex kStandard(R"([a-z_]+)");
  for (const Include& include : includes_below("include/trotline")) {
    const bool allowed = std::regex_match(include.header, kStandard) ||
                         include.header.starts_with("trotline/") || include.header.starts_with("Eigen/");
    EXPECT_TRUE(allowed) << include.file << " includes " << include.header;
  }
}

TEST(House, LibrariesKeepToTheirRooms) {
  for (const Include& include : includes_below("src")) {
    for (const auto& [library, rooms] : kLibraries) {
      if (include.header.starts_with(library)) {
        EXPECT_TRUE(rooms.contains(include.room)) << include.file << " includes " << include.header;
      }
    }
  }
}

TEST(House, TopLevelHoldsWhatTheMapSays) {
  const std::set<std::string> allowed = {"CMakeLists.txt",
                                         "CMakePresets.json",
                                         "README.md",
                                         "DEVELOPERS.md",
                                         "LICENSE",
                                         "bootstrap",
                                         "src",
                                         "include",
                                         "tests",
                                         "configs",
                                         "demo_observations",
                                         "docs",
                                         "build"};
  for (const auto& entry : fs::directory_iterator(TROTLINE_SOURCE_DIR)) {
    const std::string name = entry.path().filename().string();
    EXPECT_TRUE(name.starts_with(".") || allowed.contains(name)) << name;
  }
}

/// "[Wilks1938]" in a comment is a key of docs/references.bib.
TEST(House, EveryCitationHasItsReference) {
  static const std::regex kKey(R"(\[([A-Z][A-Za-z]+[0-9]{4}[a-z]?)\])");
  std::ifstream file(fs::path(TROTLINE_SOURCE_DIR) / "docs/references.bib");
  const std::string references((std::istreambuf_iterator<char>(file)), std::istreambuf_iterator<char>());
  int cited = 0;
  for (const char* folder : {"include", "src"}) {
    for (const auto& entry : fs::recursive_directory_iterator(fs::path(TROTLINE_SOURCE_DIR) / folder)) {
      if (entry.path().extension() != ".hpp" && entry.path().extension() != ".cpp") continue;
      std::ifstream source(entry.path());
      for (std::string line; std::getline(source, line);) {
        for (std::sregex_iterator i(line.begin(), line.end(), kKey), end; i != end; ++i) {
          ++cited;
          EXPECT_NE(references.find("{" + (*i)[1].str() + ","), std::string::npos)
              << entry.path() << " cites " << (*i)[1];
        }
      }
    }
  }
  EXPECT_GT(cited, 5);
}

TEST(House, EveryRoomHasTests) {
  for (const auto& [room, left] : kLeft) {
    const fs::path headers = fs::path(TROTLINE_SOURCE_DIR) / "include/trotline" / room;
    if (!fs::exists(headers) || fs::is_empty(headers)) continue;
    EXPECT_TRUE(fs::exists(fs::path(TROTLINE_SOURCE_DIR) / "tests" / room)) << room << " has no tests";
  }
}

}  // namespace
