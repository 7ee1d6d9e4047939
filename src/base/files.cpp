#include <fcntl.h>
#include <fmt/format.h>
#include <sys/stat.h>
#include <unistd.h>

#include <algorithm>
#include <array>
#include <cerrno>
#include <csignal>
#include <cstdlib>
#include <cstring>
#include <fstream>
#include <iostream>
#include <map>
#include <mutex>
#include <sstream>
#include <system_error>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/base/text.hpp>

namespace trotline {
namespace fs = std::filesystem;
namespace {

[[noreturn]] void refuse(const fs::path& path, const std::string& action, int error) {
  throw SystemError(fmt::format("{}: cannot {}: {}", path.string(), action, std::strerror(error)));
}

std::string read_stream(std::istream& stream, const std::string& name, std::size_t most_bytes) {
  std::string bytes;
  std::array<char, 1 << 16> buffer{};
  while (stream.read(buffer.data(), buffer.size()) || stream.gcount() > 0) {
    bytes.append(buffer.data(), static_cast<std::size_t>(stream.gcount()));
    if (bytes.size() > most_bytes) {
      throw InputError(Place{name}, {fmt::format("holds more than {} bytes", most_bytes), "a smaller file"});
    }
  }
  if (stream.bad()) throw InputError(Place{name}, {"cannot be read to its end", "a readable file"});
  return bytes;
}

void write_all(int descriptor, std::string_view bytes, const fs::path& path) {
  while (!bytes.empty()) {
    const ssize_t written = ::write(descriptor, bytes.data(), bytes.size());
    if (written < 0 && errno == EINTR) continue;
    if (written < 0) refuse(path, "write", errno);
    bytes.remove_prefix(static_cast<std::size_t>(written));
  }
}

/// Closes the descriptor and removes the file unless release() was called.
class TemporaryFile {
 public:
  explicit TemporaryFile(const fs::path& beside) : name_(beside.string() + ".part-XXXXXX") {
    descriptor_ = ::mkstemp(name_.data());
    if (descriptor_ < 0) refuse(beside, "write", errno);
  }
  TemporaryFile(const TemporaryFile&) = delete;
  TemporaryFile& operator=(const TemporaryFile&) = delete;
  ~TemporaryFile() {
    if (descriptor_ >= 0) ::close(descriptor_);
    if (!released_) ::unlink(name_.c_str());
  }
  void store(std::string_view bytes, const fs::path& target) {
    write_all(descriptor_, bytes, target);
    if (::fchmod(descriptor_, 0644 & ~current_umask()) != 0) refuse(target, "set permissions of", errno);
    if (::fsync(descriptor_) != 0) refuse(target, "write", errno);
    const int closed = ::close(descriptor_);
    descriptor_ = -1;
    if (closed != 0) refuse(target, "write", errno);
    if (::rename(name_.c_str(), target.c_str()) != 0) refuse(target, "replace", errno);
    released_ = true;
  }

 private:
  /// It can only be read by setting it, and it is the process's: one thread at a time, or two could put back
  /// what the other has set.
  static mode_t current_umask() {
    static std::mutex one_at_a_time;
    const std::scoped_lock lock(one_at_a_time);
    const mode_t mask = ::umask(022);
    ::umask(mask);
    return mask;
  }
  std::string name_;
  int descriptor_ = -1;
  bool released_ = false;
};

void make_folder(const fs::path& folder) {
  if (folder.empty()) return;
  std::error_code error;
  fs::create_directories(folder, error);
  if (error)
    throw SystemError(fmt::format("{}: cannot make the folder: {}", folder.string(), error.message()));
}

/// The hidden folders of this process, for abandon_output_folders().
struct StagingRegistry {
  std::mutex mutex;
  std::map<fs::path, bool> folders;  ///< true: the folder above was made for it
};

StagingRegistry& registry() {
  static StagingRegistry instance;
  return instance;
}

const std::string kStagingPrefix = ".making-";

/// Removes what killed processes have left: the name holds the process, and it runs no more.
void remove_stale_staging(const fs::path& target) {
  std::error_code ignored;
  for (const auto& entry : fs::directory_iterator(target, ignored)) {
    const std::string name = entry.path().filename().string();
    if (!name.starts_with(kStagingPrefix)) continue;
    const std::string digits = name.substr(kStagingPrefix.size(), name.rfind('-') - kStagingPrefix.size());
    const auto process = parse_whole_number(digits);
    const bool gone =
        process && *process > 0 && ::kill(static_cast<pid_t>(*process), 0) != 0 && errno == ESRCH;
    if (gone) fs::remove_all(entry.path(), ignored);
  }
}

bool is_device_name(const std::string& name) {
  static const std::vector<std::string> kDevices = {"con", "prn", "aux", "nul"};
  const std::string stem = lower_case(name.substr(0, name.find('.')));
  const bool port = stem.size() == 4 && (stem.starts_with("com") || stem.starts_with("lpt"));
  return port || std::find(kDevices.begin(), kDevices.end(), stem) != kDevices.end();
}

}  // namespace

std::string read_file(const std::string& path, std::size_t most_bytes) {
  if (path == "-") return read_stream(std::cin, "standard input", most_bytes);
  std::error_code error;
  const auto status = fs::status(path, error);
  if (error && error != std::errc::no_such_file_or_directory) {
    throw InputError(Place{path}, {"cannot be opened for reading: " + error.message(), "a readable file"});
  }
  if (!fs::exists(status)) throw InputError(Place{path}, {"there is no such file", "a readable file"});
  if (fs::is_directory(status)) throw InputError(Place{path}, {"is a folder", "a file"});
  if (fs::is_character_file(status) || fs::is_block_file(status)) {
    throw InputError(Place{path}, {"is a device, which has no end", "a file"});
  }
  std::ifstream stream(path, std::ios::binary);
  if (!stream) throw InputError(Place{path}, {"cannot be opened for reading", "a readable file"});
  return read_stream(stream, path, most_bytes);
}

void require_no_input_among(const std::vector<fs::path>& outputs, const std::vector<std::string>& inputs) {
  std::error_code error;
  for (const fs::path& output : outputs) {
    for (const std::string& input : inputs) {
      if (input.empty() || !fs::equivalent(output, input, error) || error) continue;
      throw InputError(Place{input}, {"is an input, and would be written over by an output of the same name",
                                      "another name or folder for the output"});
    }
  }
}

void write_file(const fs::path& path, std::string_view bytes) {
  make_folder(path.parent_path());
  std::error_code ignored;
  if (fs::is_directory(path, ignored)) {
    throw SystemError(fmt::format("{}: is a folder, cannot write", path.string()));
  }
  TemporaryFile(path).store(bytes, path);
}

OutputFolder::OutputFolder(fs::path target) : target_(std::move(target)) {
  std::error_code error;
  if (fs::exists(target_, error) && !fs::is_directory(target_, error)) {
    throw SystemError(
        fmt::format("{}: exists and is no folder; name another output folder", target_.string()));
  }
  made_target_ = !fs::exists(target_, error);
  make_folder(target_);
  remove_stale_staging(target_);
  std::string name = (target_ / fmt::format("{}{}-XXXXXX", kStagingPrefix, ::getpid())).string();
  if (::mkdtemp(name.data()) == nullptr) {
    const int reason = errno;
    if (made_target_) fs::remove(target_, error);
    refuse(target_, "write to the folder", reason);
  }
  staging_ = name;
  const std::scoped_lock lock(registry().mutex);
  registry().folders[staging_] = made_target_;
}

OutputFolder::~OutputFolder() {
  std::error_code ignored;
  fs::remove_all(staging_, ignored);
  const std::scoped_lock lock(registry().mutex);
  registry().folders.erase(staging_);
  if (made_target_ && !committed_) fs::remove(target_, ignored);  // only where it is empty
}

void OutputFolder::write(const std::string& name, std::string_view bytes) const {
  write_file(staging_ / name, bytes);
}

std::vector<std::string> OutputFolder::commit(const std::vector<std::string>& family) {
  std::error_code error;
  std::vector<std::string> names;
  for (fs::directory_iterator entry(staging_, error), end; !error && entry != end; entry.increment(error)) {
    names.push_back(entry->path().filename().string());
  }
  if (error) throw SystemError(fmt::format("{}: cannot be read: {}", staging_.string(), error.message()));
  std::sort(names.begin(), names.end());
  for (const std::string& name : names) {
    if (fs::is_directory(target_ / name, error)) {
      throw SystemError(fmt::format("{}: is a folder, cannot write", (target_ / name).string()));
    }
  }
  const std::scoped_lock lock(registry().mutex);  // nobody abandons the set half-way
  for (const std::string& old : family) {
    if (!std::binary_search(names.begin(), names.end(), old)) fs::remove(target_ / old, error);
  }
  for (const std::string& name : names) {
    if (::rename((staging_ / name).c_str(), (target_ / name).c_str()) != 0)
      refuse(target_ / name, "write", errno);
  }
  committed_ = true;
  return names;
}

void abandon_output_folders() {
  const std::scoped_lock lock(registry().mutex);
  std::error_code ignored;
  for (const auto& [folder, made_above] : registry().folders) {
    fs::remove_all(folder, ignored);
    if (made_above) fs::remove(folder.parent_path(), ignored);  // only where it is empty
  }
  registry().folders.clear();
}

std::string safe_file_name(std::string_view text) {
  constexpr std::size_t kLongest = 80;
  const auto is_plain = [](char c) {
    return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') || c == '+' ||
           c == '-' || c == '_' || c == '.';
  };
  std::string name;
  for (const char c : text) name += is_plain(c) ? c : '_';
  const bool hidden = name.empty() || name.front() == '.' || name.front() == '-';
  const bool changed = name != text || hidden || is_device_name(name) || name.size() > kLongest;
  if (!changed) return name;
  if (hidden) name.insert(name.begin(), '_');
  return name.substr(0, kLongest - 17) + "-" + fingerprint(text);
}

}  // namespace trotline
