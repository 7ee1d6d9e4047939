#include "kept_list.hpp"

#include <boost/interprocess/file_mapping.hpp>
#include <boost/interprocess/mapped_region.hpp>
#include <fmt/format.h>
#include <sys/stat.h>

#include <algorithm>
#include <array>
#include <cstdlib>
#include <cstring>
#include <filesystem>
#include <span>
#include <type_traits>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/base/text.hpp>

namespace trotline {
namespace {

namespace fs = std::filesystem;
namespace ipc = boost::interprocess;

static_assert(std::is_trivially_copyable_v<Transition> && sizeof(Transition) == 32, "written as it lies");

constexpr std::array<char, 8> kMark = {'t', 'r', 'o', 't', 'l', 'k', '0', '1'};

/// How many of everything follow. Every part begins at a multiple of 8 bytes.
struct Head {
  std::array<char, 8> mark = kMark;
  std::uint64_t key_bytes = 0;
  std::uint64_t warning_bytes = 0;  ///< warnings, each ended by a line feed
  std::uint64_t levels = 0;
  std::uint64_t label_bytes = 0;
  std::uint64_t transitions = 0;
  double partition_300k = 0.0;
  std::uint64_t checksum = 0;  ///< of everything after the head
};

std::uint64_t padded(std::uint64_t bytes) { return (bytes + 7) / 8 * 8; }

/// Two running sums over 8-byte words (after Fletcher 1982, IEEE Trans. Commun. 30, 247): they notice
/// changed, missing and exchanged words. Four lanes, so that the sums do not wait for each other.
std::uint64_t checksum(std::span<const char> bytes) {
  constexpr std::size_t kLanes = 4;
  std::array<std::uint64_t, kLanes> first = {1, 2, 3, 4};
  std::array<std::uint64_t, kLanes> second = {};
  const std::size_t words = bytes.size() / 8;
  for (std::size_t i = 0; i + kLanes <= words; i += kLanes) {
    std::array<std::uint64_t, kLanes> word;
    std::memcpy(word.data(), bytes.data() + 8 * i, sizeof word);
    for (std::size_t lane = 0; lane < kLanes; ++lane) {
      first[lane] += word[lane];
      second[lane] += first[lane];
    }
  }
  for (std::size_t i = words - words % kLanes; i < words; ++i) {
    std::uint64_t word;
    std::memcpy(&word, bytes.data() + 8 * i, sizeof word);
    first[0] += word;
    second[0] += first[0];
  }
  constexpr std::uint64_t kOdd = 0x9E3779B97F4A7C15ULL;  // any large odd number: no sum hides behind another
  std::uint64_t sum = 0;
  for (std::size_t lane = 0; lane < kLanes; ++lane) sum = (sum * kOdd + first[lane]) * kOdd + second[lane];
  return sum;
}

/// Writes parts one after another.
class Packer {
 public:
  void add(const void* data, std::size_t bytes) {
    bytes_.append(static_cast<const char*>(data), bytes);
    bytes_.resize(padded(bytes_.size()), '\0');
  }
  template <class T>
  void add(const std::vector<T>& values) {
    add(values.data(), values.size() * sizeof(T));
  }
  [[nodiscard]] std::string finished(Head head) && {
    head.checksum = checksum(bytes_);
    return std::string(reinterpret_cast<const char*>(&head), sizeof head) + bytes_;
  }

 private:
  std::string bytes_;
};

/// The parts of a mapped file, in the order in which they were added.
class Unpacker {
 public:
  explicit Unpacker(std::span<const char> bytes) : bytes_(bytes) {}
  [[nodiscard]] std::span<const char> take(std::uint64_t bytes) {
    const auto part = bytes_.first(bytes);
    bytes_ = bytes_.subspan(padded(bytes));
    return part;
  }
  template <class T>
  [[nodiscard]] std::vector<T> take_values(std::uint64_t count) {
    const auto part = take(count * sizeof(T));
    const T* const first = reinterpret_cast<const T*>(part.data());
    return {first, first + count};
  }

 private:
  std::span<const char> bytes_;
};

std::uint64_t size_after_head(const Head& head) {
  return padded(head.key_bytes) + padded(head.warning_bytes) + 2 * 8 * head.levels +
         padded(4 * (head.levels + 1)) + padded(head.label_bytes) + sizeof(Transition) * head.transitions;
}

std::string joined(const std::vector<std::string>& lines) {
  std::string text;
  for (const std::string& line : lines) text += line + '\n';
  return text;
}

std::vector<std::string> lines_of(std::string_view text) {
  std::vector<std::string> lines;
  for (std::size_t end; (end = text.find('\n')) != std::string_view::npos; text.remove_prefix(end + 1)) {
    lines.emplace_back(text.substr(0, end));
  }
  return lines;
}

std::string pack(const OpenedList& list, const std::string& key) {
  std::vector<double> energies;
  std::vector<double> degeneracies;
  std::vector<std::uint32_t> label_ends = {0};
  std::string labels;
  for (const Level& level : list.levels) {
    energies.push_back(level.energy_k);
    degeneracies.push_back(level.degeneracy);
    labels += level.label;
    label_ends.push_back(static_cast<std::uint32_t>(labels.size()));
  }
  const std::string warnings = joined(list.warnings);
  Packer packer;
  packer.add(key.data(), key.size());
  packer.add(warnings.data(), warnings.size());
  packer.add(energies);
  packer.add(degeneracies);
  packer.add(label_ends);
  packer.add(labels.data(), labels.size());
  packer.add(list.transitions);
  return std::move(packer).finished({.key_bytes = key.size(),
                                     .warning_bytes = warnings.size(),
                                     .levels = list.levels.size(),
                                     .label_bytes = labels.size(),
                                     .transitions = list.transitions.size(),
                                     .partition_300k = list.partition_300k});
}

std::vector<Level> take_levels(Unpacker& unpacker, const Head& head) {
  const auto energies = unpacker.take_values<double>(head.levels);
  const auto degeneracies = unpacker.take_values<double>(head.levels);
  const auto ends = unpacker.take_values<std::uint32_t>(head.levels + 1);
  const auto labels = unpacker.take(head.label_bytes);
  std::vector<Level> levels(head.levels);
  for (std::size_t i = 0; i < levels.size(); ++i) {
    levels[i].label.assign(labels.data() + ends[i], ends[i + 1] - ends[i]);
    levels[i].energy_k = energies[i];
    levels[i].degeneracy = degeneracies[i];
  }
  return levels;
}

/// Nothing where the bytes are not what was written under this key.
std::optional<OpenedList> unpack(std::span<const char> bytes, const std::string& key) {
  Head head;
  if (bytes.size() < sizeof head) return std::nullopt;
  std::memcpy(&head, bytes.data(), sizeof head);
  const auto rest = bytes.subspan(sizeof head);
  const std::array counts = {head.key_bytes, head.warning_bytes, head.levels, head.label_bytes,
                             head.transitions};
  const bool likely = std::all_of(counts.begin(), counts.end(), [&](auto n) { return n <= rest.size(); });
  if (head.mark != kMark || !likely || size_after_head(head) != rest.size()) return std::nullopt;
  Unpacker unpacker(rest);
  const auto kept_key = unpacker.take(head.key_bytes);
  if (std::string_view(kept_key.data(), kept_key.size()) != key || checksum(rest) != head.checksum) {
    return std::nullopt;
  }
  OpenedList list;
  const auto warnings = unpacker.take(head.warning_bytes);
  list.warnings = lines_of({warnings.data(), warnings.size()});
  list.levels = take_levels(unpacker, head);
  list.transitions = unpacker.take_values<Transition>(head.transitions);
  list.partition_300k = head.partition_300k;
  return list;
}

bool is_file(const std::string& path) {
  std::error_code unreadable;
  return fs::is_regular_file(path, unreadable);
}

fs::path cache_folder() {
  const auto set = [](const char* name) {
    const char* const value = std::getenv(name);
    return value == nullptr ? std::string() : std::string(value);
  };
  if (const auto own = set("TROTLINE_CACHE"); !own.empty()) return own;
  if (const auto cache = set("XDG_CACHE_HOME"); !cache.empty()) return fs::path(cache) / "trotline";
  if (const auto home = set("HOME"); !home.empty()) return fs::path(home) / ".cache" / "trotline";
  return {};
}

}  // namespace

KeptList::KeptList(const std::string& list_path, const std::string& species_path,
                   const std::string& species_fingerprint) {
  struct stat status = {};
  const fs::path folder = cache_folder();
  if (folder.empty() || ::stat(list_path.c_str(), &status) != 0) return;
  std::error_code ignored;
  const std::string whole_path = fs::absolute(list_path, ignored).lexically_normal().string();
  key_ = fmt::format("{}\n{}\n{} bytes, inode {} of {}, changed {}.{:09}\nspecies file {}\n", TROTLINE_LIST_CODE,
                     whole_path, status.st_size, status.st_ino, status.st_dev, status.st_ctim.tv_sec,
                     status.st_ctim.tv_nsec, species_fingerprint);
  const std::string both =
      fs::absolute(species_path, ignored).lexically_normal().string() + '\n' + whole_path;
  file_ = (folder / (fingerprint(both) + ".lines")).string();
}

std::optional<OpenedList> KeptList::reopen() const {
  if (file_.empty() || !is_file(file_)) return std::nullopt;
  try {
    const ipc::file_mapping mapping(file_.c_str(), ipc::read_only);
    const ipc::mapped_region region(mapping, ipc::read_only);
    return unpack({static_cast<const char*>(region.get_address()), region.get_size()}, key_);
  } catch (const ipc::interprocess_exception&) {
    return std::nullopt;
  }
}

void KeptList::keep(const OpenedList& list) const {
  if (file_.empty() || list.transitions.size() < kLongListLines) return;
  try {
    write_file(file_, pack(list, key_));
  } catch (const SystemError&) {
    // The next reading takes its time again, and nothing else is lost.
  }
}

}  // namespace trotline
