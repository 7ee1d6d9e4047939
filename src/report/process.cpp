#include <fcntl.h>
#include <fmt/format.h>
#include <poll.h>
#include <spawn.h>
#include <sys/wait.h>
#include <unistd.h>

#include <algorithm>
#include <array>
#include <cerrno>
#include <chrono>
#include <csignal>
#include <cstdlib>
#include <cstring>
#include <thread>

#include <trotline/base/errors.hpp>
#include <trotline/report/process.hpp>

namespace trotline {
namespace {

using Clock = std::chrono::steady_clock;

/// The variables that a drawing program needs, and no others.
std::vector<std::string> clean_environment() {
  constexpr const char* kKept[] = {"PATH",           "HOME",
                                   "TMPDIR",         "LD_LIBRARY_PATH",
                                   "XDG_CACHE_HOME", "XDG_CONFIG_HOME",
                                   "XDG_DATA_HOME",  "FONTCONFIG_FILE",
                                   "FONTCONFIG_PATH"};
  std::vector<std::string> environment = {"LC_ALL=C.UTF-8"};
  for (const char* name : kKept) {
    if (const char* value = std::getenv(name)) environment.push_back(std::string(name) + "=" + value);
  }
  return environment;
}

/// Pointers as the C interface wants them; the texts must outlive them.
std::vector<char*> pointers_to(std::vector<std::string>& texts) {
  std::vector<char*> pointers;
  for (std::string& text : texts) pointers.push_back(text.data());
  pointers.push_back(nullptr);
  return pointers;
}

[[noreturn]] void refuse(const std::string& program, const std::string& what, int error) {
  throw SystemError(fmt::format("{}: {}: {}", program, what, std::strerror(error)));
}

class Pipe {
 public:
  explicit Pipe(const std::string& program) {
    if (::pipe2(ends_.data(), O_CLOEXEC) != 0) refuse(program, "cannot make a pipe", errno);
  }
  ~Pipe() {
    close_end(0);
    close_end(1);
  }
  Pipe(const Pipe&) = delete;
  Pipe& operator=(const Pipe&) = delete;
  [[nodiscard]] int reading() const { return ends_[0]; }
  [[nodiscard]] int writing() const { return ends_[1]; }
  void close_end(std::size_t end) {
    if (ends_[end] >= 0) ::close(ends_[end]);
    ends_[end] = -1;
  }

 private:
  std::array<int, 2> ends_ = {-1, -1};
};

/// What the new process starts with: files, folder, signals, a process group of its own.
class SpawnSetup {
 public:
  SpawnSetup(const Pipe& pipe, const std::filesystem::path& folder) {
    ::posix_spawn_file_actions_init(&files_);
    ::posix_spawnattr_init(&attributes_);
    ::posix_spawn_file_actions_addopen(&files_, STDIN_FILENO, "/dev/null", O_RDONLY, 0);
    ::posix_spawn_file_actions_adddup2(&files_, pipe.writing(), STDOUT_FILENO);
    ::posix_spawn_file_actions_adddup2(&files_, pipe.writing(), STDERR_FILENO);
    ::posix_spawn_file_actions_addclosefrom_np(&files_, STDERR_FILENO + 1);
    if (!folder.empty()) ::posix_spawn_file_actions_addchdir_np(&files_, folder.c_str());
    sigset_t signals;
    ::sigfillset(&signals);
    ::posix_spawnattr_setsigdefault(&attributes_, &signals);
    ::sigemptyset(&signals);
    ::posix_spawnattr_setsigmask(&attributes_, &signals);
    ::posix_spawnattr_setpgroup(&attributes_, 0);
    ::posix_spawnattr_setflags(&attributes_,
                               POSIX_SPAWN_SETPGROUP | POSIX_SPAWN_SETSIGDEF | POSIX_SPAWN_SETSIGMASK);
  }
  ~SpawnSetup() {
    ::posix_spawn_file_actions_destroy(&files_);
    ::posix_spawnattr_destroy(&attributes_);
  }
  SpawnSetup(const SpawnSetup&) = delete;
  SpawnSetup& operator=(const SpawnSetup&) = delete;

  pid_t start(std::vector<std::string> arguments) {
    std::vector<std::string> environment = clean_environment();
    const std::string program = arguments.front();
    pid_t process = 0;
    const int error = ::posix_spawnp(&process, program.c_str(), &files_, &attributes_,
                                     pointers_to(arguments).data(), pointers_to(environment).data());
    if (error != 0) refuse(program, "cannot be started", error);
    return process;
  }

 private:
  posix_spawn_file_actions_t files_{};
  posix_spawnattr_t attributes_{};
};

/// A process that is killed with its children unless it was waited for.
class Process {
 public:
  Process(pid_t id, std::string program, double timeout_s)
      : id_(id),
        program_(std::move(program)),
        timeout_s_(timeout_s),
        end_(Clock::now() +
             std::chrono::duration_cast<Clock::duration>(std::chrono::duration<double>(timeout_s))) {}
  ~Process() {
    if (waited_) return;
    ::kill(-id_, SIGKILL);
    while (::waitpid(id_, nullptr, 0) < 0 && errno == EINTR) {
    }
  }
  Process(const Process&) = delete;
  Process& operator=(const Process&) = delete;

  /// All that comes through the pipe until its other end is closed.
  std::string read_all(int descriptor, std::size_t most_bytes) {
    std::string output;
    std::array<char, 4096> buffer{};
    for (;;) {
      wait_for_input(descriptor);
      const ssize_t count = ::read(descriptor, buffer.data(), buffer.size());
      if (count < 0 && errno == EINTR) continue;
      if (count < 0) refuse(program_, "its output cannot be read", errno);
      if (count == 0) return output;
      const std::size_t room = most_bytes - std::min(most_bytes, output.size());
      output.append(buffer.data(), std::min(room, static_cast<std::size_t>(count)));
    }
  }

  int exit_code() {
    int status = 0;
    for (;;) {
      const pid_t ended = ::waitpid(id_, &status, WNOHANG);
      if (ended == id_) break;
      if (ended < 0 && errno != EINTR) refuse(program_, "cannot be waited for", errno);
      check_time();
      std::this_thread::sleep_for(std::chrono::milliseconds(1));
    }
    waited_ = true;
    return WIFSIGNALED(status) ? 128 + WTERMSIG(status) : WEXITSTATUS(status);
  }

 private:
  void check_time() const {
    if (Clock::now() < end_) return;
    throw SystemError(fmt::format("{}: has not ended after {:g} s and was stopped", program_, timeout_s_));
  }

  void wait_for_input(int descriptor) const {
    pollfd wanted{descriptor, POLLIN, 0};
    while (::poll(&wanted, 1, 50) <= 0) check_time();
    check_time();
  }

  pid_t id_;
  std::string program_;
  double timeout_s_;
  Clock::time_point end_;
  bool waited_ = false;
};

}  // namespace

ProcessOutcome run_process(const std::vector<std::string>& arguments, const ProcessOptions& options) {
  if (arguments.empty()) throw SystemError("no program was named to run");
  Pipe pipe(arguments.front());
  Process process(SpawnSetup(pipe, options.folder).start(arguments), arguments.front(), options.timeout_s);
  pipe.close_end(1);
  ProcessOutcome outcome;
  outcome.output = process.read_all(pipe.reading(), options.most_bytes);
  outcome.exit_code = process.exit_code();
  return outcome;
}

}  // namespace trotline
