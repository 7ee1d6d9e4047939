#pragma once

#include <numbers>

namespace trotline {

/// One second of arc [rad].
inline constexpr double kRadPerArcsec = std::numbers::pi / (180.0 * 3600.0);

}  // namespace trotline
