#include <trotline/base/version.hpp>

namespace trotline {

const char* version() { return TROTLINE_VERSION; }

}  // namespace trotline
