#include <trotline/species/library.hpp>

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cstdlib>
#include <filesystem>
#include <fstream>

#include <trotline/base/errors.hpp>

namespace trotline {
namespace {

namespace fs = std::filesystem;
using testing::Contains;
using testing::ElementsAre;
using testing::HasSubstr;

std::string rotor_named(const std::string& name) {
  return "name: " + name +
         "\nkind: linear\nconstants: {B: 10 GHz, from: made}\ndipole: {mu0: 1 D, from: made}\nholds: "
         "{largest_j: 5}\n";
}

class Library : public testing::Test {
 protected:
  void SetUp() override {
    folder = fs::temp_directory_path() /
             fmt::format("trotline-library-{}-{}", ::getpid(),
                         testing::UnitTest::GetInstance()->current_test_info()->name());
    fs::create_directories(folder / "first");
    fs::create_directories(folder / "second");
  }
  void TearDown() override { fs::remove_all(folder); }
  void put(const std::string& file, const std::string& text) const { std::ofstream(folder / file) << text; }
  [[nodiscard]] SpeciesLibrary library() const {
    return SpeciesLibrary(
        {(folder / "first").string(), (folder / "missing").string(), (folder / "second").string()});
  }
  fs::path folder;
};

TEST_F(Library, FindsByNameInAnyCaseAndByPath) {
  put("first/XY.yaml", rotor_named("XY"));
  put("second/a-Z+.yaml", rotor_named("a-Z+"));
  EXPECT_EQ(library().find("XY").name, "XY");
  EXPECT_EQ(library().find("xy").name, "XY");
  EXPECT_EQ(library().find("A-z+").name, "a-Z+");
  EXPECT_EQ(library().find((folder / "first" / "XY.yaml").string()).name, "XY");
}

TEST_F(Library, PrefersTheSameCaseAndTheFirstFolder) {
  put("first/Co.yaml", rotor_named("Co"));
  put("first/CO.yaml", rotor_named("CO"));
  put("second/CO.yaml", rotor_named("CO"));
  EXPECT_EQ(library().find("CO").name, "CO");
  EXPECT_EQ(library().find("Co").name, "Co");
  EXPECT_THAT(library().find("CO").file, HasSubstr("first"));
  EXPECT_THAT(library().names(), ElementsAre("CO", "Co"));
}

TEST_F(Library, SuggestsTheNearestName) {
  put("first/HC3N.yaml", rotor_named("HC3N"));
  put("first/OCS.yaml", rotor_named("OCS"));
  try {
    (void)library().find("HC3M");
    FAIL() << "an unknown species was found";
  } catch (const InputError& error) {
    EXPECT_THAT(error.what(), HasSubstr("there is no species 'HC3M'"));
    EXPECT_THAT(error.what(), HasSubstr("HC3N, OCS"));
    EXPECT_THAT(error.what(), HasSubstr("did you mean 'HC3N'?"));
  }
}

TEST_F(Library, RefusesAFileWhoseNameIsNotTheSpecies) {
  put("first/XY.yaml", rotor_named("YX"));
  try {
    (void)library().find("XY");
    FAIL() << "a misnamed file was accepted";
  } catch (const InputError& error) {
    EXPECT_THAT(error.place().file, HasSubstr("XY.yaml"));
    EXPECT_THAT(error.what(), HasSubstr("called 'YX'"));
  }
}

TEST_F(Library, IsEmptyWithoutFolders) {
  EXPECT_TRUE(SpeciesLibrary({}).names().empty());
  EXPECT_THROW((void)SpeciesLibrary({}).find("CO"), InputError);
  EXPECT_THROW((void)library().find("no/such/file.yaml"), InputError);
}

TEST(StandardLibrary, HoldsEverySpeciesOfTheSources) {
  const SpeciesLibrary library(SpeciesLibrary::standard_folders());
  const auto names = library.names();
  for (const char* name : {"CO", "13CO", "C18O", "CS", "SiO", "HC3N", "OCS", "HCO+"})
    EXPECT_THAT(names, Contains(name));
  for (const std::string& name : names) {
    const Species species = library.find(name);
    EXPECT_FALSE(species.citations.empty()) << name;
    EXPECT_FALSE(species.transitions.empty()) << name;
  }
}

TEST(StandardLibrary, TakesFoldersFromTheEnvironmentFirst) {
  ::setenv("TROTLINE_SPECIES_PATH", "/one::/two", 1);
  const auto folders = SpeciesLibrary::standard_folders();
  ::unsetenv("TROTLINE_SPECIES_PATH");
  ASSERT_GE(folders.size(), 3u);
  EXPECT_EQ(folders[0], "/one");
  EXPECT_EQ(folders[1], "/two");
}

}  // namespace
}  // namespace trotline
