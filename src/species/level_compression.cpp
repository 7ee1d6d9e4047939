#include "level_compression.hpp"

#include <algorithm>
#include <cmath>
#include <vector>

namespace trotline {
namespace {

struct Thinned {
  std::vector<double> energies_k;
  std::vector<double> degeneracies;

  void add(double energy_k, double degeneracy) {
    energies_k.push_back(energy_k);
    degeneracies.push_back(degeneracy);
  }
};

/// The coefficients of the first three monic orthogonal polynomials of a discrete weight:
/// p_{k+1} = (x - a_k) p_k - b_k p_{k-1}. `size` is smaller where there are fewer different x.
struct Recurrence {
  Eigen::Array3d a = Eigen::Array3d::Zero();
  Eigen::Array3d b = Eigen::Array3d::Zero();
  int size = 0;
};

Recurrence recurrence_of(const Eigen::ArrayXd& x, const Eigen::ArrayXd& weight) {
  constexpr double kNoSpread = 1e-24;  // of the squared norm; x runs from 0 to 1
  Recurrence r;
  Eigen::ArrayXd previous = Eigen::ArrayXd::Zero(x.size());
  Eigen::ArrayXd p = Eigen::ArrayXd::Ones(x.size());
  double norm = weight.sum();
  for (int k = 0; k < 3; ++k) {
    const double next_norm = (weight * p.square()).sum();
    if (k > 0 && next_norm <= kNoSpread * weight.sum()) break;
    r.b[k] = k > 0 ? next_norm / norm : 0.0;
    r.a[k] = (weight * x * p.square()).sum() / next_norm;
    norm = next_norm;
    const Eigen::ArrayXd next = (x - r.a[k]) * p - r.b[k] * previous;
    previous = p;
    p = next;
    r.size = k + 1;
  }
  return r;
}

/// Nodes are the eigenvalues of the recurrence's Jacobi matrix, weights the squares of the first components.
void add_gauss_rule(const Eigen::ArrayXd& energies_k, const Eigen::ArrayXd& degeneracies, double width_k,
                    Thinned& out) {
  const double zero = energies_k[0];
  const Recurrence r = recurrence_of((energies_k - zero) / width_k, degeneracies);
  Eigen::MatrixXd jacobi = Eigen::MatrixXd::Zero(r.size, r.size);
  for (int k = 0; k < r.size; ++k) {
    jacobi(k, k) = r.a[k];
    if (k > 0) jacobi(k, k - 1) = jacobi(k - 1, k) = std::sqrt(r.b[k]);
  }
  const Eigen::SelfAdjointEigenSolver<Eigen::MatrixXd> solver(jacobi);
  const double states = degeneracies.sum();
  for (int k = 0; k < r.size; ++k) {
    const double first = solver.eigenvectors()(0, k);
    out.add(zero + width_k * solver.eigenvalues()[k], states * first * first);
  }
}

}  // namespace

LevelArrays compressed(const LevelArrays& levels, double width_k) {
  constexpr Eigen::Index kNodes = 3;
  Thinned out;
  const double* const begin = levels.energies_k.data();
  const double* const end = begin + levels.energies_k.size();
  for (const double* first = begin; first != end;) {
    const double* const last = std::upper_bound(first, end, *first + width_k);
    const Eigen::Index place = first - begin;
    const Eigen::Index length = last - first;
    if (length > kNodes) {
      add_gauss_rule(levels.energies_k.segment(place, length), levels.degeneracies.segment(place, length),
                     width_k, out);
    } else {
      for (Eigen::Index i = place; i < place + length; ++i)
        out.add(levels.energies_k[i], levels.degeneracies[i]);
    }
    first = last;
  }
  const auto n = static_cast<Eigen::Index>(out.energies_k.size());
  return {Eigen::Map<Eigen::ArrayXd>(out.energies_k.data(), n),
          Eigen::Map<Eigen::ArrayXd>(out.degeneracies.data(), n)};
}

}  // namespace trotline
