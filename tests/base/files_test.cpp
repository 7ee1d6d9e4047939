#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <sys/stat.h>
#include <sys/wait.h>
#include <unistd.h>

#include <fstream>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>

namespace trotline {
namespace {

namespace fs = std::filesystem;

/// An empty folder for each test, removed afterwards.
class Files : public testing::Test {
 protected:
  void SetUp() override {
    std::string name = (fs::temp_directory_path() / "trotline-files-XXXXXX").string();
    ASSERT_NE(::mkdtemp(name.data()), nullptr);
    folder_ = name;
  }
  void TearDown() override { fs::remove_all(folder_); }

  [[nodiscard]] std::vector<std::string> names_in(const fs::path& folder) const {
    std::vector<std::string> names;
    for (const auto& entry : fs::directory_iterator(folder))
      names.push_back(entry.path().filename().string());
    std::sort(names.begin(), names.end());
    return names;
  }

  fs::path folder_;
};

TEST_F(Files, BytesComeBackAsTheyWereWritten) {
  const std::string bytes("a\0b\r\n\xFF", 6);
  write_file(folder_ / "deep" / "er" / "x.bin", bytes);
  EXPECT_EQ(read_file((folder_ / "deep/er/x.bin").string()), bytes);
  write_file(folder_ / "deep/er/x.bin", "short");
  EXPECT_EQ(read_file((folder_ / "deep/er/x.bin").string()), "short");
  EXPECT_THAT(names_in(folder_ / "deep/er"), testing::ElementsAre("x.bin"));
}

TEST_F(Files, PermissionsFollowTheUmask) {
  const mode_t before = ::umask(027);
  write_file(folder_ / "x", "1");
  ::umask(before);
  struct stat status {};
  ASSERT_EQ(::stat((folder_ / "x").c_str(), &status), 0);
  EXPECT_EQ(status.st_mode & 0777U, 0640U);
}

TEST_F(Files, ReadingNamesWhatIsWrong) {
  const auto message = [](const std::string& path, std::size_t most = 100) {
    try {
      (void)read_file(path, most);
    } catch (const InputError& error) {
      return std::string(error.what());
    }
    return std::string("no error");
  };
  EXPECT_THAT(message((folder_ / "none").string()),
              testing::EndsWith("none: there is no such file; expected a readable file"));
  EXPECT_THAT(message(folder_.string()), testing::EndsWith("is a folder; expected a file"));
  write_file(folder_ / "big", std::string(101, 'x'));
  EXPECT_THAT(message((folder_ / "big").string()), testing::HasSubstr("holds more than 100 bytes"));
  EXPECT_EQ(message((folder_ / "big").string(), 101), "no error");
}

TEST_F(Files, AWriteThatFailsLeavesTheOldFileAndNothingElse) {
  fs::create_directory(folder_ / "taken");
  EXPECT_THROW(write_file(folder_ / "taken", "x"), SystemError);
  write_file(folder_ / "file", "old");
  EXPECT_THROW(write_file(folder_ / "file" / "below", "x"), SystemError);
  EXPECT_EQ(read_file((folder_ / "file").string()), "old");
  EXPECT_THAT(names_in(folder_), testing::ElementsAre("file", "taken"));
}

TEST_F(Files, OutputFolderShowsNothingBeforeCommit) {
  {
    OutputFolder output(folder_ / "new" / "out");
    output.write("b.txt", "2");
    output.write("a.txt", "1");
    EXPECT_FALSE(fs::exists(folder_ / "new/out/a.txt"));
    EXPECT_THAT(output.commit(), testing::ElementsAre("a.txt", "b.txt"));
  }
  EXPECT_THAT(names_in(folder_ / "new/out"), testing::ElementsAre("a.txt", "b.txt"));
}

/// Until 2026-12-01 a figure of an earlier run stayed beside the result of the next one.
TEST_F(Files, OutputFolderRemovesWhatAnEarlierRunLeftOfItsFamily) {
  write_file(folder_ / "out/figure.svg", "old");
  write_file(folder_ / "out/theirs.txt", "keep me");
  OutputFolder output(folder_ / "out");
  output.write("result.json", "new");
  output.commit({"figure.svg", "result.json"});
  EXPECT_THAT(names_in(folder_ / "out"), testing::IsSupersetOf({"result.json", "theirs.txt"}));
  EXPECT_FALSE(fs::exists(folder_ / "out/figure.svg"));
}

TEST_F(Files, AbandonedOutputFoldersLeaveAFolderThatWasThere) {
  fs::create_directory(folder_ / "mine");
  const OutputFolder output(folder_ / "mine");
  abandon_output_folders();
  EXPECT_TRUE(fs::exists(folder_ / "mine"));
}

TEST_F(Files, OutputFolderWithoutCommitLeavesNothing) {
  {
    OutputFolder output(folder_ / "out");
    output.write("a.txt", "1");
  }
  EXPECT_TRUE(names_in(folder_).empty());
}

TEST_F(Files, OutputFolderWithoutCommitKeepsWhatWasThere) {
  write_file(folder_ / "out" / "a.txt", "old");
  {
    OutputFolder output(folder_ / "out");
    output.write("a.txt", "new");
  }
  EXPECT_EQ(read_file((folder_ / "out/a.txt").string()), "old");
  EXPECT_THAT(names_in(folder_ / "out"), testing::ElementsAre("a.txt"));
}

TEST_F(Files, OutputFolderRefusesAFileInItsPlaceAndAFolderInAFilesPlace) {
  write_file(folder_ / "file", "x");
  EXPECT_THROW(OutputFolder(folder_ / "file"), SystemError);
  fs::create_directories(folder_ / "out" / "a.txt");
  OutputFolder output(folder_ / "out");
  output.write("0.txt", "1");
  output.write("a.txt", "1");
  EXPECT_THROW((void)output.commit(), SystemError);
  EXPECT_FALSE(fs::exists(folder_ / "out/0.txt"));
}

TEST_F(Files, SafeNamesOfHostileTextsAreSafeAndDistinct) {
  const std::vector<std::string> hostile = {"",
                                            ".",
                                            "..",
                                            "../x",
                                            "/etc/passwd",
                                            "a/b",
                                            "a\\b",
                                            "a b",
                                            "a\nb",
                                            "a\tb",
                                            "-rf",
                                            ".ssh",
                                            "con",
                                            "CON.txt",
                                            "nul",
                                            "lpt1",
                                            "COM9.x",
                                            "a\0b",
                                            "$(x)",
                                            "`x`",
                                            "a|b",
                                            "a:b",
                                            "x?*",
                                            "\xFF",
                                            "é",
                                            "É",
                                            "~",
                                            "a;b",
                                            "\"q\"",
                                            "'",
                                            "a%2Fb",
                                            "名",
                                            std::string(500, 'x'),
                                            std::string(500, 'x') + "y",
                                            std::string("a\0b", 3)};
  std::vector<std::string> names;
  for (const std::string& text : hostile) {
    const std::string name = safe_file_name(text);
    SCOPED_TRACE(name);
    ASSERT_FALSE(name.empty());
    EXPECT_LE(name.size(), 80U);
    EXPECT_NE(name.front(), '.');
    EXPECT_NE(name.front(), '-');
    EXPECT_EQ(name.find_first_not_of("abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ0123456789+-_."),
              std::string::npos);
    if (text != "a") names.push_back(name);
    write_file(folder_ / name, text);  // it is a file name indeed
    EXPECT_EQ(fs::path(name).filename(), name);
  }
  std::sort(names.begin(), names.end());
  EXPECT_EQ(std::adjacent_find(names.begin(), names.end()), names.end()) << "two texts share a name";
}

TEST_F(Files, PlainNamesStayAsTheyAre) {
  for (const char* name : {"CO", "13CO", "HCO+", "c-C3H2", "source_1.a"})
    EXPECT_EQ(safe_file_name(name), name);
}

TEST(OutputFolder, RemovesWhatAKilledProcessLeftAndNothingElse) {
  const fs::path target = fs::temp_directory_path() / fmt::format("trotline-stale-{}", ::getpid());
  const pid_t child = ::fork();
  if (child == 0) _exit(0);
  ::waitpid(child, nullptr, 0);  // now a process number that runs no more
  const fs::path stale = target / fmt::format(".making-{}-abcdef", child);
  const fs::path alive = target / fmt::format(".making-{}-abcdef", ::getppid());
  fs::create_directories(stale);
  fs::create_directories(alive);
  { const OutputFolder folder(target); }
  EXPECT_FALSE(fs::exists(stale));
  EXPECT_TRUE(fs::exists(alive));
  fs::remove_all(target);
}

TEST(OutputFolder, IsAbandonedWholeWhenTheProgramIsToldToStop) {
  const fs::path target = fs::temp_directory_path() / fmt::format("trotline-stop-{}", ::getpid());
  {
    const OutputFolder folder(target);
    folder.write("result.json", "{}");
    abandon_output_folders();
    EXPECT_FALSE(fs::exists(target));
  }
  EXPECT_FALSE(fs::exists(target));
}

}  // namespace
}  // namespace trotline
