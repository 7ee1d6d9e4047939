// The templates, style and script of the page, from src/report/page.
#pragma once

#include <string_view>

namespace trotline {

/// The bytes of one file by its name; empty when there is none.
[[nodiscard]] std::string_view page_asset(std::string_view name);

}  // namespace trotline
