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
    : structure_(fits_structure(bytes, name)),
      buffer_(const_cast<char*>(bytes.data())),  // opened read-only
      name_(std::move(name)) {
  const FitsUnit& last = structure_.back();
  size_ = (last.data_start + last.data_bytes + kFitsBlock - 1) / kFitsBlock * kFitsBlock;
  if (size_ > bytes.size()) {  // CFITSIO reads whole blocks, whatever size it is told
    padded_.assign(bytes);
    padded_.resize(size_);
    buffer_ = padded_.data();
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

int FitsFile::go_to(int number) const {
  int status = 0;
  int type = 0;
  fits_movabs_hdu(file_, number, &type, &status);
  check(status, fmt::format("extension {} cannot be read", number - 1));
  return type;
}

}  // namespace trotline
