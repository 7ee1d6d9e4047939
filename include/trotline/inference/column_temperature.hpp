#pragma once

#include <Eigen/Dense>

#include <vector>

#include <trotline/inference/likelihood_fit.hpp>

namespace trotline {

/// The most likely N and T of one position.
struct ColumnTemperature {
  FitStatus status = FitStatus::not_converged;
  double ln_column = 0.0;       ///< ln N [cm^-2]
  double ln_temperature = 0.0;  ///< ln T [K]
  double ln_column_variance = 0.0;
  double ln_temperature_variance = 0.0;
  double covariance = 0.0;  ///< of ln N and ln T; like the variances from the expected information
  double cost = 0.0;        ///< see IntensityLikelihood::cost
};

/// Fits N and T to the intensities of the same lines toward many positions: what fit_likelihood gives, where
/// the same model serves all of them.
///
/// The model is tabulated once over temperatures and opacities; each position reads its starts off the table
/// (no guess is needed, and a second minimum is found where there is one) and descends by Levenberg &
/// Marquardt with analytic derivatives. Nothing is allocated from position to position. Positions that do not
/// settle so go through fit_likelihood.
class ColumnTemperatureFitter {
 public:
  /// Scratch space: made once a thread.
  struct Workspace {
    ModelWorkspace model;
    Eigen::VectorXd state;
    Eigen::ArrayXd cost;
    Eigen::ArrayXd slope;
    Eigen::ArrayXd curvature;
  };

  /// @param model       one component and one isomer; it must outlive this
  /// @param parameters  of every entry of the state: ln N and ln T free between finite bounds without a
  /// prior, the
  ///                    rest fixed
  /// @throws DomainError if model or parameters are others
  ColumnTemperatureFitter(const ForwardModel& model, std::vector<StateParameter> parameters);

  [[nodiscard]] Workspace workspace() const;

  /// @param data  one for each datum of the model; calibration errors are not for this fit
  [[nodiscard]] ColumnTemperature fit(const Measurement* data, Workspace& workspace) const;

  /// All positions: data of the first, then of the second ...
  /// @param threads  do not change a bit of the result
  /// @throws DomainError if data are no multiple of the model's, not finite, sigma not above 0, or have a
  ///         calibration error
  [[nodiscard]] std::vector<ColumnTemperature> fit_all(const std::vector<Measurement>& data,
                                                       int threads = 1) const;

 private:
  struct Start {
    double ln_column;
    double ln_temperature;
    double cost;
  };
  struct Descent {
    double ln_column;
    double ln_temperature;
    double cost;
    Eigen::Matrix2d information;
    bool settled;
  };

  void tabulate();
  [[nodiscard]] Start best_of_temperature(Eigen::Index node, const Measurement* data,
                                          Workspace& workspace) const;
  int find_starts(const Measurement* data, Workspace& workspace, Start* starts) const;
  [[nodiscard]] double cost_at(double ln_column, double ln_temperature, const Measurement* data,
                               Workspace& workspace) const;
  double linearise(const Descent& at, const Measurement* data, Workspace& workspace,
                   Eigen::Vector2d& gradient, Eigen::Matrix2d& information) const;
  [[nodiscard]] Descent descend(const Start& start, const Measurement* data, Workspace& workspace) const;
  [[nodiscard]] bool are_parted(const Descent& a, const Descent& b, const Measurement* data,
                                Workspace& workspace) const;
  [[nodiscard]] FitStatus status_of(const Descent& best, const Measurement* data) const;
  [[nodiscard]] ColumnTemperature fit_the_long_way(const Measurement* data) const;

  const ForwardModel* model_;
  std::vector<StateParameter> parameters_;
  int column_;  // entries of the state
  int temperature_;
  Eigen::VectorXd ln_temperature_;          // of the nodes
  Eigen::VectorXd first_ln_column_;         // of each node's cells
  std::vector<Eigen::ArrayXXd> intensity_;  // of each node: (cells, data)
  std::vector<Eigen::ArrayXXd> slope_;      // by ln N
};

}  // namespace trotline
