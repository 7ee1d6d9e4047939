#include <fmt/format.h>

#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/rotor/distortion.hpp>

namespace trotline {
namespace {

void require_below(const char* name, double value_hz, double bound_hz) {
  if (!(std::abs(value_hz) < bound_hz)) {
    throw DomainError(name, value_hz,
                      fmt::format("between -{0:g} and {0:g} Hz, the rigid constant", bound_hz));
  }
}

void require_finite(const char* name, double value_hz) {
  if (!std::isfinite(value_hz)) throw DomainError(name, value_hz, "finite");
}

}  // namespace

void require_valid(const DiagonalDistortion& distortion, const RigidScale& rigid) {
  require_below("D_J [Hz]", distortion.d_j_hz, rigid.smallest_hz);
  require_below("D_JK [Hz]", distortion.d_jk_hz, rigid.largest_hz);
  require_below("D_K [Hz]", distortion.d_k_hz, rigid.largest_hz);
  require_finite("H_J [Hz]", distortion.h_j_hz);
  require_finite("H_JK [Hz]", distortion.h_jk_hz);
  require_finite("H_KJ [Hz]", distortion.h_kj_hz);
  require_finite("H_K [Hz]", distortion.h_k_hz);
  require_finite("L_J [Hz]", distortion.l_j_hz);
  require_finite("L_JJK [Hz]", distortion.l_jjk_hz);
  require_finite("L_JK [Hz]", distortion.l_jk_hz);
  require_finite("L_KKJ [Hz]", distortion.l_kkj_hz);
  require_finite("L_K [Hz]", distortion.l_k_hz);
}

}  // namespace trotline
