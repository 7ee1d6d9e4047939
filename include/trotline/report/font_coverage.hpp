#pragma once

#include <string>
#include <string_view>

namespace trotline {

/// What display_text() makes of `text`, with every character that no installed font can show replaced by
/// U+25A1 (a white square), and marks without width dropped. What draws the PDF and PNG figures would
/// otherwise leave stray lines in its place. Latin, Greek and Cyrillic letters, the digits raised and lowered
/// and common marks count as installed; for others the installed fonts are asked once (the program fc-list,
/// which comes with the drawing libraries).
[[nodiscard]] std::string drawable_text(std::string_view text);

}  // namespace trotline
