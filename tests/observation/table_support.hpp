// Comparing rows to the bit.
#pragma once

#include <gtest/gtest.h>

#include <bit>
#include <cstdint>
#include <cstdlib>
#include <string>
#include <vector>

#include <trotline/observation/intensity_table.hpp>

#include "fits_builder.hpp"

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

}  // namespace trotline
