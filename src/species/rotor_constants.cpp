#include "rotor_constants.hpp"

#include <array>

namespace trotline {
namespace {

using D = DiagonalDistortion;

constexpr std::array<ConstantKey<D>, 12> kDistortion = {{
    {"D_J", &D::d_j_hz},
    {"D_JK", &D::d_jk_hz},
    {"D_K", &D::d_k_hz},
    {"H_J", &D::h_j_hz},
    {"H_JK", &D::h_jk_hz},
    {"H_KJ", &D::h_kj_hz},
    {"H_K", &D::h_k_hz},
    {"L_J", &D::l_j_hz},
    {"L_JJK", &D::l_jjk_hz},
    {"L_JK", &D::l_jk_hz},
    {"L_KKJ", &D::l_kkj_hz},
    {"L_K", &D::l_k_hz},
}};

constexpr std::array<ConstantKey<D>, 12> kAReduction = {{
    {"Delta_J", &D::d_j_hz},
    {"Delta_JK", &D::d_jk_hz},
    {"Delta_K", &D::d_k_hz},
    {"Phi_J", &D::h_j_hz},
    {"Phi_JK", &D::h_jk_hz},
    {"Phi_KJ", &D::h_kj_hz},
    {"Phi_K", &D::h_k_hz},
    {"L_J", &D::l_j_hz},
    {"L_JJK", &D::l_jjk_hz},
    {"L_JK", &D::l_jk_hz},
    {"L_KKJ", &D::l_kkj_hz},
    {"L_K", &D::l_k_hz},
}};

}  // namespace

std::span<const ConstantKey<D>> distortion_keys() { return kDistortion; }
std::span<const ConstantKey<D>> a_reduction_keys() { return kAReduction; }

DipoleMoment read_dipole_components(const FileMap& file, Species& species) {
  const FileMap map = file.map("dipole");
  const auto component = [&](const char* key) {
    return map.optional_quantity(key, Dimension::dipole_moment, 0.0);
  };
  const DipoleMoment dipole{component("mu_a"), component("mu_b"), component("mu_c")};
  if (dipole.a_c_m == 0.0 && dipole.b_c_m == 0.0 && dipole.c_c_m == 0.0) {
    file.refuse("dipole", {"no component of the dipole moment is given",
                           "at least one of mu_a, mu_b, mu_c that is not 0", "e.g. 'mu_a: 2.33 D'"});
  }
  cite(map, "dipole moment", species);
  map.finish();
  return dipole;
}

double read_axial_dipole(const FileMap& file, Species& species) {
  const FileMap map = file.map("dipole");
  const double mu_c_m = map.quantity("mu", Dimension::dipole_moment);
  if (mu_c_m == 0.0) map.refuse("mu", {"'dipole.mu' is 0", "the dipole moment of the species"});
  cite(map, "dipole moment", species);
  map.finish();
  return mu_c_m;
}

}  // namespace trotline
