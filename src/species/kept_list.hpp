// Long line lists in a form that reopens at once.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include <trotline/species/level.hpp>

namespace trotline {

/// What a line list and the species file that names it come to, before Q(T).
struct OpenedList {
  std::vector<Level> levels;            ///< by rising energy; without spin isomers
  std::vector<Transition> transitions;  ///< by rising frequency, with A
  std::vector<std::string> warnings;    ///< of the list
  double partition_300k = 0.0;          ///< with which A was found from intensities; 0 where A was listed
};

/// Lists with fewer lines are read anew each time: it takes a few milliseconds.
inline constexpr std::size_t kLongListLines = 20000;

/// The file that keeps one opened list, in $TROTLINE_CACHE, else $XDG_CACHE_HOME/trotline, else
/// ~/.cache/trotline. It is this machine's own: it can be deleted at any time, and is made anew where
/// something differs from when it was written: the species file, path, size, inode or time of change of the
/// list, the code that reads lists, the file's own bytes.
class KeptList {
 public:
  /// @param species_fingerprint  of the species file's text
  KeptList(const std::string& list_path, const std::string& species_path,
           const std::string& species_fingerprint);

  /// The list as it was kept; nothing if it was not, or if anything differs or is damaged.
  [[nodiscard]] std::optional<OpenedList> reopen() const;

  /// Keeps the list. A folder that cannot be written to is no error: the list is read again next time.
  void keep(const OpenedList& list) const;

 private:
  std::string file_;  ///< empty where there is no folder to keep it in, or no list
  std::string key_;   ///< everything on which the content depends
};

}  // namespace trotline
