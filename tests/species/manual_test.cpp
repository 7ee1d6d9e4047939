// The examples of docs/species-files.md are species files that work.

#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <unistd.h>

#include <filesystem>
#include <fstream>
#include <map>

#include <trotline/base/files.hpp>
#include <trotline/species/species_file.hpp>

namespace trotline {
namespace {

/// The fenced blocks of a page, by the word after the fence.
std::multimap<std::string, std::string> blocks_of(const std::string& page) {
  std::multimap<std::string, std::string> blocks;
  for (std::size_t at = page.find("```"); at != std::string::npos; at = page.find("```", at)) {
    const std::size_t text = page.find('\n', at) + 1;
    const std::size_t end = page.find("```", text);
    blocks.emplace(page.substr(at + 3, text - at - 4), page.substr(text, end - text));
    at = end + 3;
  }
  return blocks;
}

TEST(SpeciesFilesManual, EveryExampleIsAccepted) {
  const auto blocks = blocks_of(read_file(std::string(TROTLINE_SOURCE_DIR) + "/docs/species-files.md"));
  ASSERT_EQ(blocks.count("yaml"), 5u);
  ASSERT_EQ(blocks.count("text"), 1u);
  const auto folder = std::filesystem::temp_directory_path() / fmt::format("trotline-manual-{}", ::getpid());
  std::filesystem::create_directories(folder);
  std::ofstream(folder / "xy.cat") << blocks.find("text")->second;
  const auto [first, last] = blocks.equal_range("yaml");
  for (auto block = first; block != last; ++block) {
    const Species species = parse_species(block->second, (folder / "example.yaml").string());
    EXPECT_GE(species.transitions.size(), 2u) << species.name;
    EXPECT_GT(species.partition->at(2.0).q, 1.0) << species.name;
  }
  std::filesystem::remove_all(folder);
}

}  // namespace
}  // namespace trotline
