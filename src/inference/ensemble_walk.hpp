// One ensemble of walkers and its stretch moves.
#pragma once

#include <random>

#include <trotline/inference/ensemble_sampler.hpp>

namespace trotline {

class EnsembleWalk {
 public:
  /// @param stream  number of the ensemble: with the seed it names the random numbers
  EnsembleWalk(const EnsembleTarget& target, int walkers, std::uint64_t seed, std::uint64_t stream);

  /// Moves every walker `steps` times and keeps all states.
  void walk(int steps);

  [[nodiscard]] int steps() const { return steps_; }

  /// One parameter of all walkers, from step `from` on, shape (n_steps, n_walkers).
  [[nodiscard]] Eigen::MatrixXd series(Eigen::Index parameter, int from) const;

  /// States of one step, shape (n_parameters, n_walkers).
  [[nodiscard]] Eigen::Map<const Eigen::MatrixXd> states(int step) const;

  [[nodiscard]] std::int64_t taken() const { return taken_; }
  [[nodiscard]] std::int64_t evaluations() const { return evaluations_; }

 private:
  void start(const EnsembleTarget& target);
  void move_half(Eigen::Index begin, Eigen::Index others);
  [[nodiscard]] double uniform();
  [[nodiscard]] double normal();

  Eigen::Index parameters_;
  Eigen::Index walkers_;
  Eigen::VectorXd lower_;
  Eigen::VectorXd upper_;
  EnsembleCost evaluate_;
  std::mt19937_64 engine_;
  Eigen::MatrixXd position_;  // (n_parameters, n_walkers)
  Eigen::VectorXd cost_;
  Eigen::MatrixXd proposal_;  // of half the walkers
  Eigen::VectorXd proposal_cost_;
  Eigen::VectorXd ln_stretch_;
  std::vector<bool> outside_;
  std::vector<double> history_;
  int steps_ = 0;
  std::int64_t taken_ = 0;
  std::int64_t evaluations_ = 0;
};

}  // namespace trotline
