#pragma once

namespace trotline {

/// The version of trotline, "major.minor.patch".
[[nodiscard]] const char* version();

}  // namespace trotline
