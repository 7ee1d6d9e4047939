// Where, when and whereto an observation was made, from a header.
#pragma once

#include <wcslib/wcs.h>

#include <trotline/observation/rest_frame.hpp>

#include "header_cards.hpp"

namespace trotline {

/// @param all  the coordinates of the same header, as wcslib parsed them
[[nodiscard]] ObservingCircumstances circumstances_of(const HeaderCards& cards, const wcsprm& all);

}  // namespace trotline
