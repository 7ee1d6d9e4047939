#include <cmath>
#include <numbers>

#include <trotline/rotor/direction_cosine.hpp>

// Reduced elements sqrt(2J+1) <J K 1 q | J' K+q> of the direction cosines, by components x, y (without a
// common factor -i) and z. Between Wang states both halves add up, so only K >= 0 is needed, and a factor
// sqrt(2) where one of the two states is K = 0.
namespace trotline {
namespace {

/// <J+1,K|z|J,K> and <J,K|z|J,K>.
double parallel(int j, int k, int delta_j) {
  const double jd = j;
  const double kd = k;
  if (delta_j == 1) return std::sqrt((jd + 1.0 - kd) * (jd + 1.0 + kd) / (jd + 1.0));
  return j == 0 ? 0.0 : kd * std::sqrt((2.0 * jd + 1.0) / (jd * (jd + 1.0)));
}

/// |<J',K+1|x|J,K>|; with -K for K it is that of K -> K-1.
double perpendicular(int j, int k, int delta_j) {
  const double jd = j;
  const double kd = k;
  if (delta_j == 1) return std::sqrt((jd + kd + 1.0) * (jd + kd + 2.0) / (4.0 * (jd + 1.0)));
  return j == 0 ? 0.0 : std::sqrt((jd + kd + 1.0) * (jd - kd) * (2.0 * jd + 1.0) / (4.0 * jd * (jd + 1.0)));
}

/// Signed element K -> K+1 (step +1) or K -> K-1 (step -1).
double stepping(BodyAxis axis, int j, int k, int step, int delta_j) {
  const double magnitude = perpendicular(j, step * k, delta_j);
  const bool up_is_negative = (axis == BodyAxis::x) == (delta_j == 1);
  return step > 0 && up_is_negative ? -magnitude : magnitude;
}

double wang_factor(int from_k, int to_k) { return from_k == 0 || to_k == 0 ? std::numbers::sqrt2 : 1.0; }

/// The product of the direction cosine with the eigenvectors of `from`, one row for each K of `to`.
Eigen::MatrixXd applied(BodyAxis axis, const WangBlock& from, const WangBlock& to) {
  const int delta_j = to.j - from.j;
  const Eigen::Index n = from.vectors.rows();
  Eigen::MatrixXd result = Eigen::MatrixXd::Zero(to.vectors.rows(), from.vectors.cols());
  for (Eigen::Index row = 0; row < result.rows(); ++row) {
    const int to_k = to.first_k + 2 * static_cast<int>(row);
    const auto add = [&](int from_k, double element) {
      const Eigen::Index index = (from_k - from.first_k) / 2;
      if (from_k >= from.first_k && index < n) result.row(row) += element * from.vectors.row(index);
    };
    if (axis == BodyAxis::z) {
      add(to_k, parallel(from.j, to_k, delta_j));
      continue;
    }
    add(to_k - 1, wang_factor(to_k - 1, to_k) * stepping(axis, from.j, to_k - 1, +1, delta_j));
    add(to_k + 1, wang_factor(to_k + 1, to_k) * stepping(axis, from.j, to_k + 1, -1, delta_j));
  }
  return result;
}

}  // namespace

WangTarget wang_target(BodyAxis axis, const WangBlock& from, int delta_j) {
  const bool from_odd = from.first_k % 2 != 0;
  // Half turns about x multiply a Wang state by sign (-1)^J, about z by (-1)^K; a dipole along an axis keeps
  // its sign in the turn about that axis and changes it in the others.
  const bool changes_about_x = axis != BodyAxis::x;
  const bool changes = changes_about_x != (delta_j == 1);
  return {from_odd != (axis != BodyAxis::z), changes ? -from.sign : from.sign};
}

Eigen::MatrixXd line_strength_amplitudes(BodyAxis axis, const WangBlock& from, const WangBlock& to) {
  return to.vectors.transpose() * applied(axis, from, to);
}

}  // namespace trotline
