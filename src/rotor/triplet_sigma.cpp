#include <Eigen/Eigenvalues>
#include <fmt/format.h>

#include <array>
#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/physics/constants.hpp>
#include <trotline/rotor/triplet_sigma.hpp>

// Case (a) states of one J: Omega = 0 and (|1> + |-1>)/sqrt2 share a parity, (|1> - |-1>)/sqrt2 has the
// other.
namespace trotline {
namespace {

using Eigen::Matrix2d;

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();
constexpr double kInfinity = std::numeric_limits<double>::infinity();
constexpr std::uint32_t kNoLevel = std::numeric_limits<std::uint32_t>::max();

Matrix2d half_anticommutator(const Matrix2d& x, const Matrix2d& y) { return 0.5 * (x * y + y * x); }

/// H on Omega = 0 and |Omega| = 1.
Matrix2d mixed_block(const TripletSigmaConstants& c, int j) {
  const double x = static_cast<double>(j) * (j + 1.0);
  const double off = std::sqrt(x);
  const Matrix2d n2{{x + 2.0, -2.0 * off}, {-2.0 * off, x}};
  const Matrix2d n4 = n2 * n2;
  const Matrix2d spin_spin{{-4.0 / 3.0, 0.0}, {0.0, 2.0 / 3.0}};
  const Matrix2d spin_rotation{{-2.0, off}, {off, -1.0}};
  return c.b_hz * n2 - c.d_hz * n4 + c.h_hz * n4 * n2 + c.lambda_hz * spin_spin +
         c.lambda_d_hz * half_anticommutator(spin_spin, n2) +
         c.lambda_h_hz * half_anticommutator(spin_spin, n4) + c.gamma_hz * spin_rotation +
         c.gamma_d_hz * half_anticommutator(spin_rotation, n2);
}

double middle_energy_hz(const TripletSigmaConstants& c, int j) {
  const double x = static_cast<double>(j) * (j + 1.0);
  return x * (c.b_hz + x * (-c.d_hz + x * c.h_hz)) +
         2.0 / 3.0 * (c.lambda_hz + x * (c.lambda_d_hz + x * c.lambda_h_hz)) -
         (c.gamma_hz + x * c.gamma_d_hz);
}

/// One J in the list of levels: places of N = J - 1, J, J + 1.
struct Placed {
  TripletSigmaJ solved;
  std::array<std::uint32_t, 3> places = {kNoLevel, kNoLevel, kNoLevel};
};

std::array<double, 3> energies_of(const TripletSigmaJ& solved) {
  return {solved.lower_hz, solved.middle_hz, solved.upper_hz};
}

/// Appends the levels of each J, and ends a series where it stops rising.
class Builder {
 public:
  explicit Builder(RotorModel& model) : model_(model) {}

  Placed add(const TripletSigmaConstants& constants, int j) {
    Placed placed{triplet_sigma_levels(constants, j), {kNoLevel, kNoLevel, kNoLevel}};
    const auto energies = energies_of(placed.solved);
    for (std::size_t series = 0; series < 3; ++series) {
      if (std::isnan(energies[series])) continue;
      if (!(energies[series] > last_hz_[series])) cut(series, j);
      if (is_cut_[series]) continue;
      last_hz_[series] = energies[series];
      placed.places[series] = static_cast<std::uint32_t>(model_.levels.size());
      const auto n = static_cast<std::int16_t>(j + static_cast<int>(series) - 1);
      model_.levels.push_back({{.j = static_cast<std::int16_t>(j), .n = n}, energies[series], 2.0 * j + 1.0});
    }
    return placed;
  }

  /// Whatever is missing lies above the last level of its series.
  void finish() const {
    for (const double last : last_hz_) model_.complete_to_hz = std::min(model_.complete_to_hz, last);
    if (first_cut_j_ < 0) return;
    model_.warnings.push_back(
        fmt::format("the distortion series stops rising: levels from J = {} upward are left out; none is "
                    "missing below E/k = {:.0f} K",
                    first_cut_j_, constants::kKelvinPerHz * model_.complete_to_hz));
  }

 private:
  void cut(std::size_t series, int j) {
    if (first_cut_j_ < 0) first_cut_j_ = j;
    is_cut_[series] = true;
  }

  RotorModel& model_;
  std::array<double, 3> last_hz_ = {-kInfinity, -kInfinity, -kInfinity};
  std::array<bool, 3> is_cut_ = {};
  int first_cut_j_ = -1;
};

/// Appends lines with S = amplitude^2.
class LineAppender {
 public:
  LineAppender(RotorModel& model, double mu2, double least) : model_(model), mu2_(mu2), least_(least) {}

  void add(std::uint32_t one, std::uint32_t other, double amplitude) {
    const double s = amplitude * amplitude;
    if (one == kNoLevel || other == kNoLevel || s == 0.0 || mu2_ == 0.0 || s < least_) return;
    model_.transitions.push_back({.upper = one, .lower = other, .line_strength_mu2_c2m2 = s * mu2_});
  }

 private:
  RotorModel& model_;
  double mu2_;
  double least_;
};

/// The elements of the direction cosine between case (a) states are those of a symmetric rotor with K =
/// Omega.
double stretch(int j, int omega) { return std::sqrt(((j + 1.0) * (j + 1.0) - omega * omega) / (j + 1.0)); }

/// J and J + 1: states keep their kind.
void connect_next(const Placed& below, const Placed& above, int j, LineAppender& lines) {
  const Eigen::DiagonalMatrix<double, 2> cosine(stretch(j, 0), stretch(j, 1));
  const Matrix2d amplitudes = above.solved.vectors.transpose() * (cosine * below.solved.vectors);
  for (const int to : {0, 1}) {
    for (const int from : {0, 1}) {
      lines.add(above.places[static_cast<std::size_t>(2 * to)],
                below.places[static_cast<std::size_t>(2 * from)], amplitudes(to, from));
    }
  }
  if (j > 0) lines.add(above.places[1], below.places[1], stretch(j, 1));
}

/// Inside of one J: N = J with the |Omega| = 1 part of the others.
void connect_same(const Placed& here, int j, LineAppender& lines) {
  if (j == 0) return;
  const double element = std::sqrt((2.0 * j + 1.0) / (j * (j + 1.0)));
  for (const int mixed : {0, 1}) {
    lines.add(here.places[1], here.places[static_cast<std::size_t>(2 * mixed)],
              element * here.solved.vectors(1, mixed));
  }
}

}  // namespace

void require_valid(const TripletSigmaConstants& c) {
  if (!(std::isfinite(c.b_hz) && c.b_hz > 0.0)) throw DomainError("B [Hz]", c.b_hz, "finite and above 0");
  if (!(std::abs(c.d_hz) < c.b_hz)) throw DomainError("D [Hz]", c.d_hz, "below B");
  const std::pair<const char*, double> others[] = {{"H [Hz]", c.h_hz},
                                                   {"lambda [Hz]", c.lambda_hz},
                                                   {"lambda_D [Hz]", c.lambda_d_hz},
                                                   {"lambda_H [Hz]", c.lambda_h_hz},
                                                   {"gamma [Hz]", c.gamma_hz},
                                                   {"gamma_D [Hz]", c.gamma_d_hz}};
  for (const auto& [name, value] : others) {
    if (!std::isfinite(value)) throw DomainError(name, value, "finite");
  }
}

TripletSigmaJ triplet_sigma_levels(const TripletSigmaConstants& constants, int j) {
  const Matrix2d block = mixed_block(constants, j);
  TripletSigmaJ result;
  if (j == 0) {  // Omega = 0 alone
    result.lower_hz = result.middle_hz = kNaN;
    result.upper_hz = block(0, 0);
    result.vectors(0, 1) = 1.0;
    return result;
  }
  const Eigen::SelfAdjointEigenSolver<Matrix2d> solver(block);
  result.lower_hz = solver.eigenvalues()[0];
  result.middle_hz = middle_energy_hz(constants, j);
  result.upper_hz = solver.eigenvalues()[1];
  result.vectors = solver.eigenvectors();
  return result;
}

RotorModel triplet_sigma_model(const TripletSigmaConstants& constants, double dipole_c_m,
                               const SpinRule& spin, const RotorOptions& options) {
  require_valid(constants);
  require_valid(options);
  if (!std::isfinite(dipole_c_m)) throw DomainError("dipole [C m]", dipole_c_m, "finite");
  RotorModel model;
  Builder builder(model);
  LineAppender lines(model, dipole_c_m * dipole_c_m, options.least_line_strength);
  Placed previous = builder.add(constants, 0);
  for (int j = 1; j <= options.highest_j; ++j) {
    Placed current = builder.add(constants, j);
    connect_next(previous, current, j - 1, lines);
    connect_same(current, j, lines);
    previous = std::move(current);
  }
  builder.finish();
  return finished_model(std::move(model), spin, options);
}

}  // namespace trotline
