// Comparing rows to the bit, and small FITS tables made in memory.
#pragma once

#include <fitsio.h>
#include <gtest/gtest.h>

#include <bit>
#include <cstdint>
#include <cstdlib>
#include <string>
#include <vector>

#include <trotline/observation/intensity_table.hpp>

namespace trotline {

inline std::uint64_t bits(double value) { return std::bit_cast<std::uint64_t>(value); }

inline void expect_same_bits(const std::optional<double>& a, const std::optional<double>& b,
                             const char* what) {
  ASSERT_EQ(a.has_value(), b.has_value()) << what;
  if (a && bits(*a) != bits(*b)) ADD_FAILURE() << what << ": " << *a << " and " << *b;
}

/// Everything except the line number, which differs between formats.
inline void expect_same_row(const IntensityRow& a, const IntensityRow& b) {
  EXPECT_EQ(a.transition, b.transition);
  expect_same_bits(a.frequency_hz, b.frequency_hz, "frequency");
  expect_same_bits(a.intensity, b.intensity, "intensity");
  EXPECT_EQ(std::isnan(a.intensity_sigma), std::isnan(b.intensity_sigma));
  if (!std::isnan(a.intensity_sigma)) {
    expect_same_bits(a.intensity_sigma, b.intensity_sigma, "intensity_error");
  }
  EXPECT_EQ(a.scale, b.scale);
  EXPECT_EQ(a.is_limit, b.is_limit);
  EXPECT_EQ(a.source, b.source);
  EXPECT_EQ(a.species, b.species);
  expect_same_bits(a.beam_fwhm_rad, b.beam_fwhm_rad, "beam_fwhm");
  expect_same_bits(a.fwhm_km_s, b.fwhm_km_s, "fwhm");
  EXPECT_EQ(a.calibration_group, b.calibration_group);
  expect_same_bits(a.calibration_error, b.calibration_error, "calibration_error");
  expect_same_bits(a.forward_efficiency, b.forward_efficiency, "forward_efficiency");
  expect_same_bits(a.main_beam_efficiency, b.main_beam_efficiency, "main_beam_efficiency");
  EXPECT_EQ(a.blend, b.blend);
  EXPECT_EQ(a.note, b.note);
}

inline void expect_same_rows(const IntensityTable& a, const IntensityTable& b) {
  ASSERT_EQ(a.rows.size(), b.rows.size());
  for (std::size_t i = 0; i < a.rows.size(); ++i) {
    SCOPED_TRACE(i);
    expect_same_row(a.rows[i], b.rows[i]);
  }
}

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
