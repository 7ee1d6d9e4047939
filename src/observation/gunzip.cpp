#include <zlib.h>

#include <array>

#include "spectrum_reader.hpp"

namespace trotline {
namespace {

/// zlib's state, freed whatever happens.
class Inflater {
 public:
  explicit Inflater(std::string_view bytes) {
    stream_.next_in = reinterpret_cast<Bytef*>(const_cast<char*>(bytes.data()));  // zlib does not write there
    constexpr int kGzipOnly = 16;
    ready_ = inflateInit2(&stream_, MAX_WBITS + kGzipOnly) == Z_OK;
    left_ = bytes.size();
  }
  ~Inflater() {
    if (ready_) inflateEnd(&stream_);
  }
  Inflater(const Inflater&) = delete;
  Inflater& operator=(const Inflater&) = delete;

  /// Appends the next piece. @return zlib's code
  int step(std::string& out) {
    if (!ready_) return Z_MEM_ERROR;
    if (stream_.avail_in == 0) {
      stream_.avail_in = static_cast<uInt>(std::min<std::size_t>(left_, 1U << 30));
      left_ -= stream_.avail_in;
    }
    stream_.next_out = reinterpret_cast<Bytef*>(buffer_.data());
    stream_.avail_out = static_cast<uInt>(buffer_.size());
    const int code = inflate(&stream_, Z_NO_FLUSH);
    out.append(buffer_.data(), buffer_.size() - stream_.avail_out);
    return code;
  }

  /// True when another gzip member follows and was begun.
  bool next_member() { return stream_.avail_in + left_ > 0 && inflateReset(&stream_) == Z_OK; }

 private:
  z_stream stream_ = {};
  bool ready_ = false;
  std::size_t left_ = 0;
  std::array<char, 1 << 16> buffer_{};
};

}  // namespace

std::string gunzip(std::string_view bytes, const std::string& name) {
  constexpr std::size_t kMost = std::size_t{4} << 30;
  Inflater inflater(bytes);
  std::string unpacked;
  while (true) {
    const int code = inflater.step(unpacked);
    if (unpacked.size() > kMost) {
      throw InputError(Place{name}, {"the gzip file unpacks to more than 4 GiB", "a smaller file"});
    }
    if (code == Z_STREAM_END) {
      // Padding behind the last member is not an error: a second member begins with the gzip mark or is
      // ignored.
      if (!inflater.next_member()) return unpacked;
      std::string more;
      if (inflater.step(more) < 0) return unpacked;
      unpacked += more;
      continue;
    }
    if (code != Z_OK) {
      throw InputError(Place{name},
                       {code == Z_BUF_ERROR ? "the gzip file ends too early" : "the gzip file is damaged",
                        "a complete gzip file"});
    }
  }
}

}  // namespace trotline
