#pragma once

#include <map>
#include <string>

#include <trotline/rotor/asymmetric.hpp>

/// Asymmetric rotors for tests. All constants are from memory, checked by the frequencies that they give.
namespace trotline {

inline constexpr double kMega = 1e6;
constexpr double kKilo = 1e3;

/// H2CO, S reduction, I^r, quartic terms (as in Bocquet et al. 1996, J. Mol. Spectrosc. 177, 154).
inline AsymmetricConstants formaldehyde() {
  AsymmetricConstants c{
      .a_hz = 281970.5712 * kMega, .b_hz = 38833.98732 * kMega, .c_hz = 34004.24386 * kMega};
  c.diagonal.d_j_hz = 70.3211 * kKilo;
  c.diagonal.d_jk_hz = 1321.31 * kKilo;
  c.diagonal.d_k_hz = 19403.0 * kKilo;
  c.off_diagonal = SReduction{.d1_hz = -10.43838 * kKilo, .d2_hz = -2.497703 * kKilo};
  return c;
}

/// SO2, A reduction, I^r, quartic terms (as in Helminger & De Lucia 1985, J. Mol. Spectrosc. 111, 66).
inline AsymmetricConstants sulphur_dioxide() {
  AsymmetricConstants c{.a_hz = 60778.5522 * kMega, .b_hz = 10318.0740 * kMega, .c_hz = 8799.7023 * kMega};
  c.diagonal.d_j_hz = 6.6065 * kKilo;
  c.diagonal.d_jk_hz = -116.963 * kKilo;
  c.diagonal.d_k_hz = 2590.3 * kKilo;
  c.off_diagonal = AReduction{.delta_j_hz = 1.7009 * kKilo, .delta_k_hz = 25.35 * kKilo};
  return c;
}

/// H2O, A reduction, I^r, quartic and sextic terms (as in De Lucia, Helminger & Kirchhoff 1974, J. Phys.
/// Chem. Ref. Data 3, 211, whose higher terms are left out).
inline AsymmetricConstants water() {
  AsymmetricConstants c{.a_hz = 835840.288 * kMega, .b_hz = 435351.717 * kMega, .c_hz = 278138.700 * kMega};
  c.diagonal = {.d_j_hz = 37.59422 * kMega,
                .d_jk_hz = -172.9128 * kMega,
                .d_k_hz = 973.29052 * kMega,
                .h_j_hz = 1.56556e-2 * kMega,
                .h_jk_hz = -4.2081e-2 * kMega,
                .h_kj_hz = -5.09508e-1 * kMega,
                .h_k_hz = 3.733028 * kMega};
  c.off_diagonal = AReduction{.delta_j_hz = 15.210402 * kMega,
                              .delta_k_hz = 41.0502 * kMega,
                              .h_j_hz = 7.79579e-3 * kMega,
                              .h_jk_hz = -2.5165e-2 * kMega,
                              .h_k_hz = 1.0971 * kMega};
  return c;
}

inline std::map<std::string, std::size_t> by_label(const RotorModel& model) {
  std::map<std::string, std::size_t> found;
  for (std::size_t i = 0; i < model.levels.size(); ++i) found[label_of(model.levels[i].quanta)] = i;
  return found;
}

inline RotorModel model_of(const AsymmetricConstants& c, const DipoleMoment& dipole, int highest_j) {
  return asymmetric_model(c, dipole, *make_spin_rule({}), {.highest_j = highest_j});
}

inline constexpr DipoleMoment kAllThree{.a_c_m = 1.0, .b_c_m = 1.0, .c_c_m = 1.0};  // S mu^2 is S

}  // namespace trotline
