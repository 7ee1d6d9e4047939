#include <fcntl.h>
#include <fmt/chrono.h>
#include <fmt/format.h>
#include <sys/file.h>
#include <unistd.h>

#include <cerrno>
#include <chrono>
#include <cstring>

#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/survey/ledger.hpp>

namespace trotline {
namespace {

std::string own_description() {
  std::string host(256, '\0');
  if (gethostname(host.data(), host.size() - 1) != 0) host = "?";
  return fmt::format("process {} on {}, since {:%Y-%m-%d %H:%M:%S} UTC\n", getpid(), host.c_str(),
                     fmt::gmtime(std::chrono::system_clock::now()));
}

std::string content_of(int file) {
  std::string text(512, '\0');
  const ssize_t size = pread(file, text.data(), text.size(), 0);
  text.resize(size > 0 ? static_cast<std::size_t>(size) : 0);
  return printable(trimmed(text));
}

}  // namespace

FolderLock::FolderLock(const std::filesystem::path& folder) {
  std::error_code error;
  std::filesystem::create_directories(folder, error);
  const std::string path = (folder / kFileName).string();
  file_ = error ? -1 : ::open(path.c_str(), O_RDWR | O_CREAT | O_CLOEXEC, 0666);
  if (file_ < 0) {
    throw SystemError(fmt::format("the folder {} cannot be written to: {}", folder.string(),
                                  error ? error.message() : std::strerror(errno)));
  }
  if (flock(file_, LOCK_EX | LOCK_NB) != 0) {
    const int reason = errno;
    const std::string holder = content_of(file_);
    close(file_);
    throw SystemError(
        reason == EWOULDBLOCK
            ? fmt::format("another run is at work in {} ({}); wait for it to end, or choose another "
                          "folder",
                          folder.string(), holder)
            : fmt::format("the file {} cannot be locked: {}", path, std::strerror(reason)));
  }
  const std::string text = own_description();
  // A lock without its description still holds: what is written here only serves the message above.
  if (ftruncate(file_, 0) != 0 || pwrite(file_, text.data(), text.size(), 0) < 0) errno = 0;
}

FolderLock::~FolderLock() { close(file_); }

}  // namespace trotline
