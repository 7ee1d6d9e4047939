#pragma once

#include <filesystem>
#include <string>
#include <string_view>
#include <vector>

namespace trotline {

/// The whole of a file, or of standard input when `path` is "-".
/// @throws InputError naming the path when it cannot be read, is a folder or a device, or is larger than `most_bytes`
[[nodiscard]] std::string read_file(const std::string& path, std::size_t most_bytes = std::size_t{1} << 32);

/// Refuses to let an output replace an input: whether any of `outputs` is the same file as any of `inputs`, by
/// whatever path. Files that do not exist are passed over.
/// @throws InputError naming the input
void require_no_input_among(const std::vector<std::filesystem::path>& outputs,
                            const std::vector<std::string>& inputs);

/// Writes a file whole or not at all: a temporary file beside it, flushed to disk, then renamed.
/// Folders that are missing on the way are made.
/// @throws SystemError naming the path and the reason; nothing is left behind then
void write_file(const std::filesystem::path& path, std::string_view bytes);

/// A set of files that appear together: they are made in a hidden folder inside `target`, and moved into
/// `target` one rename each when commit() is called. Without commit() nothing of them stays; what a process that
/// was killed has left is removed by the next OutputFolder on the same target.
class OutputFolder {
 public:
  /// Makes `target` where it is missing. @throws SystemError when it cannot be written to
  explicit OutputFolder(std::filesystem::path target);
  ~OutputFolder();
  OutputFolder(const OutputFolder&) = delete;
  OutputFolder& operator=(const OutputFolder&) = delete;

  /// Where the files are made until commit().
  [[nodiscard]] const std::filesystem::path& staging() const { return staging_; }

  /// Writes one file into staging. @param name  a plain file name
  void write(const std::string& name, std::string_view bytes) const;

  /// Moves everything in staging to the target, over files of the same names.
  /// @param family  names that belong to the same set of outputs: those that were not made this time are removed
  ///         from the target, so that no figure of an earlier run stands beside this one's result
  /// @return the names of the files, sorted. @throws SystemError when a file cannot be moved
  std::vector<std::string> commit(const std::vector<std::string>& family = {});

 private:
  std::filesystem::path target_;
  std::filesystem::path staging_;
  bool made_target_ = false;
  bool committed_ = false;
};

/// Removes the hidden folders of all OutputFolder objects of this process that are not committed: for a program
/// that is told to stop. The objects are of no use afterwards.
void abandon_output_folders();

/// A file name made of `text` that is safe on every file system: letters, digits, `+`, `-`, `_` and `.`
/// stay, the rest becomes `_`; never empty, never `.` or `..` or a device name, at most 80 bytes. A text
/// that had to be changed gets its fingerprint appended, so that two texts never share a name.
[[nodiscard]] std::string safe_file_name(std::string_view text);

}  // namespace trotline
