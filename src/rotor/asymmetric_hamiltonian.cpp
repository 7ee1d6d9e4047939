#include <algorithm>
#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/rotor/asymmetric_hamiltonian.hpp>

// Symbols: x = J(J+1); y = K^2; chi = azimuth of J about z; the rigid part is
// mean x + (z - mean) y + (Bx - By)/4 (J+^2 + J-^2) with mean = (Bx + By)/2.
namespace trotline {
namespace {

void require_rigid(const AsymmetricConstants& constants) {
  const auto positive = [](const char* name, double value) {
    if (!(std::isfinite(value) && value > 0.0)) throw DomainError(name, value, "finite and above 0");
  };
  positive("A [Hz]", constants.a_hz);
  positive("B [Hz]", constants.b_hz);
  positive("C [Hz]", constants.c_hz);
  if (constants.a_hz < constants.b_hz) throw DomainError("B [Hz]", constants.b_hz, "not above A");
  if (constants.b_hz < constants.c_hz) throw DomainError("C [Hz]", constants.c_hz, "not above B");
  if (constants.a_hz == constants.c_hz) {
    throw DomainError("C [Hz]", constants.c_hz, "below A: three equal constants make a spherical rotor");
  }
}

void require_off_diagonal(const AReduction& terms, double bound_hz) {
  for (const double value : {terms.delta_j_hz, terms.delta_k_hz}) {
    if (!(std::abs(value) < bound_hz)) {
      throw DomainError("delta_J or delta_K [Hz]", value, "smaller than the rigid constants");
    }
  }
  for (const double value : {terms.h_j_hz, terms.h_jk_hz, terms.h_k_hz, terms.l_j_hz, terms.l_jk_hz,
                             terms.l_kj_hz, terms.l_k_hz}) {
    if (!std::isfinite(value)) throw DomainError("h or l of the A reduction [Hz]", value, "finite");
  }
}

void require_off_diagonal(const SReduction& terms, double bound_hz) {
  for (const double value : {terms.d1_hz, terms.d2_hz}) {
    if (!(std::abs(value) < bound_hz))
      throw DomainError("d1 or d2 [Hz]", value, "smaller than the rigid constants");
  }
  for (const double value :
       {terms.h1_hz, terms.h2_hz, terms.h3_hz, terms.l1_hz, terms.l2_hz, terms.l3_hz, terms.l4_hz}) {
    if (!std::isfinite(value)) throw DomainError("h or l of the S reduction [Hz]", value, "finite");
  }
}

struct Axes {
  double x_hz, y_hz, z_hz;
};

Axes axes_of(const AsymmetricConstants& c) {
  switch (c.representation) {
    case Representation::i_r:
      return {c.b_hz, c.c_hz, c.a_hz};
    case Representation::i_l:
      return {c.c_hz, c.b_hz, c.a_hz};
    case Representation::iii_r:
      return {c.a_hz, c.b_hz, c.c_hz};
    case Representation::iii_l:
      break;
  }
  return {c.b_hz, c.a_hz, c.c_hz};
}

/// The factor of (J+^2 + J-^2)/2 in the A reduction apart from the rigid part, by order; `y1` and `y2` are
/// the squares of the two K that it joins. Classically both are Jz^2.
struct Orders {
  double quartic_hz, sextic_hz, octic_hz;
};

Orders a_factor(const AReduction& t, double x, double y1, double y2) {
  const double sum1 = y1 + y2;
  const double sum2 = y1 * y1 + y2 * y2;
  const double sum3 = y1 * y1 * y1 + y2 * y2 * y2;
  return {-2.0 * t.delta_j_hz * x - t.delta_k_hz * sum1,
          x * (2.0 * t.h_j_hz * x + t.h_jk_hz * sum1) + t.h_k_hz * sum2,
          x * (x * (2.0 * t.l_j_hz * x + t.l_jk_hz * sum1) + t.l_kj_hz * sum2) + t.l_k_hz * sum3};
}

/// The factor of (J+^2m + J-^2m) in the S reduction apart from the rigid part.
double s_factor(const SReduction& t, double x, int m) {
  switch (m) {
    case 1:
      return x * (t.d1_hz + x * (t.h1_hz + x * t.l1_hz));
    case 2:
      return t.d2_hz + x * (t.h2_hz + x * t.l2_hz);
    case 3:
      return t.h3_hz + x * t.l3_hz;
    default:
      return t.l4_hz;
  }
}

/// <J,K+2m| J+^2m |J,K>, positive in the phases chosen.
double ladder_product(double x, int k, int m) {
  double product = 1.0;
  for (int step = k; step < k + 2 * m; ++step) {
    product *= x - static_cast<double>(step) * (static_cast<double>(step) + 1.0);
  }
  return std::sqrt(product);
}

/// Radial slope of the classical A-reduced off-diagonal terms: order n in the components of J counts n times.
double radial_off_diagonal(const AReduction& t, double x, double y, double cos_two_chi) {
  const Orders f = a_factor(t, x, y, y);
  return (x - y) * cos_two_chi * (4.0 * f.quartic_hz + 6.0 * f.sextic_hz + 8.0 * f.octic_hz);
}

double radial_off_diagonal(const SReduction& t, double x, double y, double cos_two_chi) {
  const double rho = x - y;  // Jx^2 + Jy^2; J+^2m + J-^2m is 2 rho^m cos(2 m chi)
  const double cos2 = cos_two_chi;
  const double cos4 = 2.0 * cos2 * cos2 - 1.0;
  const double cos6 = cos2 * (2.0 * cos4 - 1.0);
  const double cos8 = 2.0 * cos4 * cos4 - 1.0;
  const double quartic = t.d1_hz * x * rho * cos2 + t.d2_hz * rho * rho * cos4;
  const double sextic = rho * (t.h1_hz * x * x * cos2 + rho * (t.h2_hz * x * cos4 + rho * t.h3_hz * cos6));
  const double octic =
      rho * (t.l1_hz * x * x * x * cos2 +
             rho * (t.l2_hz * x * x * cos4 + rho * (t.l3_hz * x * cos6 + rho * t.l4_hz * cos8)));
  return 2.0 * (4.0 * quartic + 6.0 * sextic + 8.0 * octic);
}

}  // namespace

void require_valid(const AsymmetricConstants& constants) {
  require_rigid(constants);
  require_valid(constants.diagonal, {constants.c_hz, constants.a_hz});
  std::visit([&](const auto& terms) { require_off_diagonal(terms, constants.a_hz); }, constants.off_diagonal);
}

HamiltonianAtJ::HamiltonianAtJ(const AsymmetricConstants& constants, int j)
    : constants_(constants), j_(j), x_(static_cast<double>(j) * (j + 1.0)) {
  const Axes axes = axes_of(constants);
  z_hz_ = axes.z_hz;
  mean_hz_ = 0.5 * (axes.x_hz + axes.y_hz);
  difference_hz_ = axes.x_hz - axes.y_hz;
  rising_k_ = j;  // nothing is frozen while the turning point is sought
  rising_k_ = find_rising_k();
}

double HamiltonianAtJ::frozen(double y) const {
  const double top = std::max(rising_k_, 0);
  return std::min(y, top * top);
}

double HamiltonianAtJ::diagonal_hz(int k) const {
  const double y = static_cast<double>(k) * k;
  return mean_hz_ * x_ + (z_hz_ - mean_hz_) * y + constants_.diagonal.at_hz(x_, frozen(y));
}

double HamiltonianAtJ::floor_hz(int k) const {
  const double y = static_cast<double>(k) * k;
  return diagonal_hz(k) - 0.5 * std::abs(difference_hz_) * (x_ - y);
}

double HamiltonianAtJ::spread_of_k() const {
  const double across_hz = std::abs(difference_hz_);
  const double along_hz = std::abs(z_hz_ - mean_hz_) + 0.5 * across_hz;
  return std::sqrt(j_ * std::sqrt(across_hz / along_hz));
}

double HamiltonianAtJ::coupling_hz(int k, int m) const {
  if (k < -j_ || k + 2 * m > j_) return 0.0;
  const double rigid_hz = m == 1 ? 0.25 * difference_hz_ : 0.0;
  if (const auto* a = std::get_if<AReduction>(&constants_.off_diagonal)) {
    if (m != 1) return 0.0;
    const double k1 = k;
    const double k2 = k + 2;
    const Orders f = a_factor(*a, x_, frozen(k1 * k1), frozen(k2 * k2));
    return (rigid_hz + 0.5 * (f.quartic_hz + f.sextic_hz + f.octic_hz)) * ladder_product(x_, k, 1);
  }
  return (rigid_hz + s_factor(std::get<SReduction>(constants_.off_diagonal), x_, m)) *
         ladder_product(x_, k, m);
}

int HamiltonianAtJ::furthest_coupling() const {
  const auto* s = std::get_if<SReduction>(&constants_.off_diagonal);
  if (s == nullptr) return 1;
  if (s->l4_hz != 0.0) return 4;
  if (s->h3_hz != 0.0 || s->l3_hz != 0.0) return 3;
  return s->d2_hz != 0.0 || s->h2_hz != 0.0 || s->l2_hz != 0.0 ? 2 : 1;
}

double HamiltonianAtJ::radial_slope_hz(double y, double cos_two_chi) const {
  const double rigid = mean_hz_ * x_ + (z_hz_ - mean_hz_) * y + 0.5 * difference_hz_ * (x_ - y) * cos_two_chi;
  const DiagonalDistortion& d = constants_.diagonal;
  const double diagonal = 4.0 * d.quartic_hz(x_, y) + 6.0 * d.sextic_hz(x_, y) + 8.0 * d.octic_hz(x_, y);
  return 2.0 * rigid + diagonal +
         std::visit([&](const auto& terms) { return radial_off_diagonal(terms, x_, y, cos_two_chi); },
                    constants_.off_diagonal);
}

bool HamiltonianAtJ::rises_at(int k) const {
  if (j_ == 0) return true;
  const double y = static_cast<double>(k) * k;
  const bool rises = radial_slope_hz(y, 1.0) > 0.0 && radial_slope_hz(y, -1.0) > 0.0;
  if (k == 0 || !rises) return rises;
  const double step_hz = diagonal_hz(k) - diagonal_hz(k - 1);
  return z_hz_ > mean_hz_ ? step_hz > 0.0 : step_hz < 0.0;
}

int HamiltonianAtJ::find_rising_k() const {
  int k = -1;
  while (k < j_ && rises_at(k + 1)) ++k;
  return k;
}

}  // namespace trotline
