// CFITSIO with errors as exceptions. Files are read from memory: nothing in a name is taken for a command.
#pragma once

#include <fitsio.h>

#include <cstddef>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "fits_structure.hpp"

namespace trotline {

class FitsFile {
 public:
  /// Opens the bytes of a whole file, which must outlive this object. @param name  for messages
  /// @throws InputError when their structure is not that of a FITS file
  FitsFile(std::string_view bytes, std::string name);
  ~FitsFile();
  FitsFile(const FitsFile&) = delete;
  FitsFile& operator=(const FitsFile&) = delete;

  [[nodiscard]] fitsfile* handle() const { return file_; }
  [[nodiscard]] const std::string& name() const { return name_; }

  /// Throws InputError naming the file, what could not be done and CFITSIO's reason, unless status is 0.
  void check(int status, const std::string& action) const;

  /// Number of header-and-data units.
  [[nodiscard]] int units() const { return static_cast<int>(structure_.size()); }

  /// Makes unit `number` (from 1) the current one and returns its type, IMAGE_HDU, ASCII_TBL or BINARY_TBL.
  int go_to(int number) const;

  /// The units as fits_structure() found them.
  [[nodiscard]] const std::vector<FitsUnit>& structure() const { return structure_; }

 private:
  fitsfile* file_ = nullptr;
  std::vector<FitsUnit> structure_;
  std::string padded_;  ///< a copy filled up to whole blocks, where the bytes are not
  void* buffer_;
  std::size_t size_;
  std::string name_;
};

}  // namespace trotline
