#include "fits_file.hpp"

#include <array>

#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>

namespace trotline {
namespace {

/// CFITSIO's own words for an error: its short text and the first message of its stack.
std::string reason_of(int status) {
  std::array<char, FLEN_ERRMSG> text{};
  fits_get_errstatus(status, text.data());
  std::string reason = text.data();
  if (fits_read_errmsg(text.data()) != 0) reason += fmt::format(" ({})", trimmed(text.data()));
  fits_clear_errmsg();
  return printable(reason);
}

}  // namespace

FitsFile::FitsFile(std::string_view bytes, std::string name)
    : buffer_(const_cast<char*>(bytes.data())),  // opened read-only
      size_(bytes.size()),
      name_(std::move(name)) {
  constexpr std::size_t kBlock = 2880;
  if (size_ < kBlock) {
    throw InputError(Place{name_},
                     {fmt::format("holds {} bytes", size_), "a FITS file, of 2880 bytes at least"});
  }
  int status = 0;
  // The name is fixed because CFITSIO would read brackets in a user's file name as instructions.
  fits_open_memfile(&file_, "memory", READONLY, &buffer_, &size_, 0, nullptr, &status);
  if (status != 0) file_ = nullptr;
  check(status, "cannot be opened as FITS");
}

FitsFile::~FitsFile() {
  int status = 0;
  if (file_ != nullptr) fits_close_file(file_, &status);
  fits_clear_errmsg();
}

void FitsFile::check(int status, const std::string& action) const {
  if (status == 0) return;
  throw InputError(Place{name_}, {fmt::format("{}: {}", action, reason_of(status)), "a complete FITS file"});
}

int FitsFile::units() const {
  int status = 0;
  int number = 0;
  fits_get_num_hdus(file_, &number, &status);
  check(status, "its header-and-data units cannot be counted");
  return number;
}

int FitsFile::go_to(int number) const {
  int status = 0;
  int type = 0;
  fits_movabs_hdu(file_, number, &type, &status);
  check(status, fmt::format("extension {} cannot be read", number - 1));
  return type;
}

void FitsFile::require_complete_data(const std::string& what) const {
  int status = 0;
  LONGLONG start = 0;
  LONGLONG data = 0;
  LONGLONG end = 0;
  fits_get_hduaddrll(file_, &start, &data, &end, &status);
  check(status, what + " cannot be read");
  // The padding of the last block may be missing: no number is lost with it.
  constexpr LONGLONG kPadding = 2879;
  if (end - kPadding <= static_cast<LONGLONG>(size_)) return;
  throw InputError(
      Place{name_},
      {fmt::format("{} ends at byte {} but the file has only {}", what, end, size_), "a complete FITS file"});
}

}  // namespace trotline
