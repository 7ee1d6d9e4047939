// Small FITS files made in memory.
#pragma once

#include <fitsio.h>

#include <cmath>
#include <cstdlib>
#include <stdexcept>
#include <string>
#include <vector>

namespace trotline {

/// A FITS file in memory that grows while CFITSIO writes it.
class FitsBuilder {
 public:
  FitsBuilder() {
    run([&](int* status) { fits_create_memfile(&file_, &buffer_, &size_, 2880, std::realloc, status); });
  }
  ~FitsBuilder() {
    int status = 0;
    if (file_ != nullptr) fits_close_file(file_, &status);
    std::free(buffer_);
  }
  FitsBuilder(const FitsBuilder&) = delete;
  FitsBuilder& operator=(const FitsBuilder&) = delete;

  [[nodiscard]] fitsfile* handle() const { return file_; }

  template <class Call>
  void run(const Call& call) {
    int status = 0;
    call(&status);
    if (status != 0) {
      char text[FLEN_ERRMSG];
      fits_get_errstatus(status, text);
      throw std::runtime_error(std::string("CFITSIO in a test: ") + text);
    }
  }

  [[nodiscard]] std::string bytes() {
    run([&](int* status) { fits_flush_file(file_, status); });
    long long start = 0;
    long long data = 0;
    long long end = 0;
    int units = 0;
    run([&](int* status) {
      fits_get_num_hdus(file_, &units, status);
      fits_movabs_hdu(file_, units, nullptr, status);
      fits_get_hduaddrll(file_, &start, &data, &end, status);
    });
    return std::string(static_cast<const char*>(buffer_), static_cast<std::size_t>(end));
  }

  /// An image extension (the first one is the primary image). @param code  FLOAT_IMG, SHORT_IMG ...
  void image(int code, std::vector<long> lengths) {
    run([&](int* status) {
      fits_create_img(file_, code, static_cast<int>(lengths.size()), lengths.data(), status);
    });
  }

  /// Fills the current image from its first value on.
  void pixels(const std::vector<double>& values) {
    std::vector<double> copy = values;
    run([&](int* status) {
      fits_write_img(file_, TDOUBLE, 1, static_cast<LONGLONG>(copy.size()), copy.data(), status);
    });
  }

  /// The same in single precision: compressed images are not converted while they are written.
  void float_pixels(const std::vector<double>& values) {
    std::vector<float> copy(values.begin(), values.end());
    run([&](int* status) {
      fits_write_img(file_, TFLOAT, 1, static_cast<LONGLONG>(copy.size()), copy.data(), status);
    });
  }

  void whole_pixels(const std::vector<double>& values) {
    std::vector<int> copy;
    for (const double value : values) copy.push_back(static_cast<int>(std::lround(value)));
    run([&](int* status) {
      fits_write_img(file_, TINT, 1, static_cast<LONGLONG>(copy.size()), copy.data(), status);
    });
  }

  /// Reads BSCALE, BZERO and BLANK of the current image anew after they were written.
  void rescan() {
    run([&](int* status) { fits_set_hdustruc(file_, status); });
  }

  struct Column {
    std::string name;
    std::string form;  ///< TFORM
    std::string unit;
  };

  void table(const std::vector<Column>& columns) {
    std::vector<std::vector<std::string>> texts(3);
    std::vector<std::vector<char*>> pointers(3);
    for (const Column& column : columns) {
      texts[0].push_back(column.name);
      texts[1].push_back(column.form);
      texts[2].push_back(column.unit);
    }
    for (std::size_t i = 0; i < 3; ++i) {
      for (std::string& text : texts[i]) pointers[i].push_back(text.data());
    }
    run([&](int* status) {
      fits_create_tbl(file_, BINARY_TBL, 0, static_cast<int>(columns.size()), pointers[0].data(),
                      pointers[1].data(), pointers[2].data(), "LINES", status);
    });
  }

  void put(int column, long long row, double value) {
    run([&](int* status) { fits_write_col(file_, TDOUBLE, column, row, 1, 1, &value, status); });
  }
  void put(int column, long long row, const std::string& value) {
    std::string copy = value;
    char* text = copy.data();
    run([&](int* status) { fits_write_col(file_, TSTRING, column, row, 1, 1, &text, status); });
  }
  void put(int column, long long row, bool value) {
    char flag = value ? 1 : 0;
    run([&](int* status) { fits_write_col(file_, TLOGICAL, column, row, 1, 1, &flag, status); });
  }
  void put(int column, long long row, const std::vector<double>& values) {
    std::vector<double> copy = values;
    run([&](int* status) {
      fits_write_col(file_, TDOUBLE, column, row, 1, static_cast<LONGLONG>(copy.size()), copy.data(), status);
    });
  }
  void put_undefined(int column, long long row) {
    run([&](int* status) { fits_write_col_null(file_, column, row, 1, 1, status); });
  }
  void key(const std::string& name, const std::string& value) {
    run([&](int* status) {
      fits_update_key(file_, TSTRING, name.c_str(), const_cast<char*>(value.c_str()), "", status);
    });
  }
  void key(const std::string& name, long long value) {
    run([&](int* status) { fits_update_key(file_, TLONGLONG, name.c_str(), &value, "", status); });
  }
  void key(const std::string& name, int value) { key(name, static_cast<long long>(value)); }
  void key(const std::string& name, double value) {
    run([&](int* status) { fits_update_key(file_, TDOUBLE, name.c_str(), &value, "", status); });
  }

 private:
  fitsfile* file_ = nullptr;
  void* buffer_ = nullptr;
  std::size_t size_ = 0;
};

}  // namespace trotline
