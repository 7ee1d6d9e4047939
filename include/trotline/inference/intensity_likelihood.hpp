#pragma once

#include <Eigen/Dense>

#include <limits>
#include <vector>

#include <trotline/excitation/forward_model.hpp>

namespace trotline {

/// One measured integrated intensity, or an upper limit of one.
struct Measurement {
  double intensity_k_km_s = 0.0;  ///< W, which may be negative; or the limit L
  double sigma_k_km_s = 0.0;      ///< its standard error without calibration, > 0
  bool is_limit = false;
  double calibration_error = 0.0;  ///< c: ln of the calibration factor is known to this standard error
  int calibration_group = -1;      ///< data of one group share their factor; -1: its own
};

enum class NoiseModel {
  gaussian,
  student_t  ///< heavy tails, for outliers; sigma is the scale of the core, not the standard deviation
};

/// What is known beforehand about one entry of the model's state.
struct StateParameter {
  bool free = false;
  double value = 0.0;  ///< where it is fixed: the value; where it is free: a first guess
  double lower = -std::numeric_limits<double>::infinity();  ///< bounds, where it is free
  double upper = std::numeric_limits<double>::infinity();
  double prior_mean = 0.0;
  double prior_sigma = std::numeric_limits<double>::infinity();  ///< infinity: no prior but the bounds
  int same_as = -1;  ///< index of another entry whose value this one takes; -1: its own
};

struct LikelihoodProblem {
  std::vector<Measurement> data;           ///< one for each datum of the model
  std::vector<StateParameter> parameters;  ///< one for each entry of the state, see StateLayout
  NoiseModel noise = NoiseModel::gaussian;
  double student_dof = 4.0;  ///< of student_t; > 0. 4: one datum in 200 beyond 5 sigma, from common practice
};

/// Scratch space of a likelihood: made once a thread, then nothing is allocated.
struct LikelihoodWorkspace {
  ModelWorkspace model;
  Eigen::VectorXd state;
  Eigen::VectorXd calibration;      ///< z of each group at the last evaluation
  Eigen::VectorXd predicted;        ///< s W of every datum, calibration factor included
  Eigen::VectorXd residuals;        ///< data, then groups, then priors: half their squares sum to -ln L
  Eigen::VectorXd residual_slopes;  ///< d residual/d predicted of every datum
  Eigen::MatrixXd jacobian;         ///< d residuals / d free, calibration following along
  Eigen::MatrixXd slopes;           ///< d predicted / d free at fixed calibration
  Eigen::VectorXd group_curvature;  ///< d2(-ln L)/dz2 of each group
};

/// The probability of intensities, given the state of a source.
///
///     measured, gaussian:  W_i ~ Normal(s_g m_i, sigma_i)
///     measured, student_t: (W_i - s_g m_i)/sigma_i ~ Student t with student_dof degrees of freedom
///     limit:               probability Phi((L_i - s_g m_i)/sigma_i) that noise keeps the line below L_i
///     calibration:         s_g = exp(c_i z_g), z_g ~ Normal(0, 1), shared by the data of a group
///     priors:              Normal(prior_mean, prior_sigma) on entries of the state, flat otherwise
///
/// m_i is the forward model. The calibration z is a nuisance: for a fit it takes, at every state, its most
/// likely value (which for a factor on the model, unlike a covariance made of the data, pulls nothing to low
/// values); for a posterior it is integrated out by Laplace's method, which is exact to some c^2/n. Where
/// noise is small both reduce to the covariance c_g^2 [i, j in g] of the diagram's logarithms.
class IntensityLikelihood {
 public:
  /// @throws DomainError naming the argument: sizes that disagree, sigma not above 0, numbers that are not
  ///         finite, bounds that cross, a chain of same_as, no free parameter
  IntensityLikelihood(const ForwardModel& model, LikelihoodProblem problem);

  [[nodiscard]] const ForwardModel& model() const { return *model_; }
  [[nodiscard]] const LikelihoodProblem& problem() const { return problem_; }

  /// Entries of the state that are free, in order; all vectors called `free` follow it.
  [[nodiscard]] const std::vector<int>& free_entries() const { return free_; }
  [[nodiscard]] Eigen::Index free_count() const { return static_cast<Eigen::Index>(free_.size()); }
  [[nodiscard]] Eigen::Index data_count() const { return static_cast<Eigen::Index>(problem_.data.size()); }
  [[nodiscard]] Eigen::Index measured_count() const;  ///< data that are no limits
  [[nodiscard]] Eigen::Index residual_count() const;
  [[nodiscard]] Eigen::VectorXd lower_bounds() const;
  [[nodiscard]] Eigen::VectorXd upper_bounds() const;

  /// The whole state from its free entries.
  [[nodiscard]] Eigen::VectorXd state_of(const Eigen::VectorXd& free) const;

  [[nodiscard]] LikelihoodWorkspace workspace() const;

  /// -ln of likelihood and priors without constants, calibration at its most likely value.
  double cost(const Eigen::Ref<const Eigen::VectorXd>& free, LikelihoodWorkspace& workspace) const;

  /// The same with the calibration integrated out.
  double marginal_cost(const Eigen::Ref<const Eigen::VectorXd>& free, LikelihoodWorkspace& workspace) const;

  /// residuals and jacobian. Their product is the exact gradient of cost.
  /// @return cost
  double linearise(const Eigen::Ref<const Eigen::VectorXd>& free, LikelihoodWorkspace& workspace) const;

  /// Gradient of cost.
  [[nodiscard]] Eigen::VectorXd gradient(const Eigen::Ref<const Eigen::VectorXd>& free,
                                         LikelihoodWorkspace& workspace) const;

  /// Expected information of the free entries (priors included): its inverse is the usual covariance.
  [[nodiscard]] Eigen::MatrixXd information(const Eigen::Ref<const Eigen::VectorXd>& free,
                                            LikelihoodWorkspace& workspace) const;

  /// Exact curvature of cost, from differences of its analytic gradient (fourth order in `steps`).
  /// @param steps  of each free entry; about a twentieth of its standard error serves well
  [[nodiscard]] Eigen::MatrixXd curvature(const Eigen::VectorXd& free, const Eigen::VectorXd& steps,
                                          LikelihoodWorkspace& workspace) const;

  /// The linearised problem with the calibration as parameters of its own: rows as residuals, columns the free
  /// entries and then z of each group. `workspace.residuals` and `residual_slopes` belong to it.
  [[nodiscard]] Eigen::MatrixXd full_design(const Eigen::Ref<const Eigen::VectorXd>& free,
                                            LikelihoodWorkspace& workspace) const;

  /// What cost leaves out of -ln L; needed where likelihoods of different noise models are compared.
  [[nodiscard]] double constant() const { return constant_; }

 private:
  struct Group {
    std::vector<Eigen::Index> members;
  };

  struct Calibration {
    double z;
    double curvature;
  };

  void gather_free();
  void gather_groups();
  void spread(const Eigen::Ref<const Eigen::VectorXd>& free, Eigen::VectorXd& state) const;
  [[nodiscard]] Calibration calibration_of(const Group& group, const Eigen::ArrayXd& intensity) const;
  double calibrate(LikelihoodWorkspace& workspace) const;
  void linearise_groups(LikelihoodWorkspace& workspace) const;
  void linearise_priors(LikelihoodWorkspace& workspace) const;
  [[nodiscard]] double prior_cost(const Eigen::VectorXd& state) const;
  void gather_slopes(LikelihoodWorkspace& workspace) const;

  const ForwardModel* model_;
  LikelihoodProblem problem_;
  std::vector<int> free_;
  std::vector<int> free_of_entry_;  // which free parameter an entry of the state follows, or -1
  std::vector<int> with_prior_;     // entries of the state
  std::vector<Group> groups_;
  std::vector<int> group_of_datum_;  // or -1
  double constant_ = 0.0;
};

}  // namespace trotline
