#pragma once

#include <string>
#include <vector>

namespace trotline {

/// One axis of a figure.
struct Axis {
  double low = 0.0;
  double high = 1.0;
  double step = 0.5;          ///< between ticks: 1, 2 or 5 times a power of ten
  int decimals = 1;           ///< that tell the ticks apart; 0 for whole numbers
  std::vector<double> ticks;  ///< multiples of step inside [low, high], rising; at least two
};

/// Ticks for the range [low, high], which is kept as it is: as many as possible, at most `most_ticks`;
/// fewer than 5 cannot be promised and count as 5.
/// A range without width, or with ends that are not finite, is widened to something that can be drawn.
[[nodiscard]] Axis axis_over(double low, double high, int most_ticks);

/// A tick in plain decimals, or with an exponent where the axis runs above 1e5 or needs more than 5 decimals.
/// The minus sign is U+2212.
[[nodiscard]] std::string tick_text(const Axis& axis, double tick);

}  // namespace trotline
