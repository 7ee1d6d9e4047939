#include <unsupported/Eigen/NonLinearOptimization>

#include <numbers>

#include <trotline/observation/gaussian_fit.hpp>
#include <trotline/physics/constants.hpp>

namespace trotline {
namespace {

/// Parameters x: A_0 ... A_{n-1}, V, ln(fwhm); the logarithm keeps the width positive.
class Residuals {
 public:
  explicit Residuals(const GaussianProblem& problem)
      : problem_(problem), lines_(problem.velocity_km_s.cols()) {}

  [[nodiscard]] int values() const { return static_cast<int>(problem_.intensity.size()); }
  [[nodiscard]] int inputs() const { return static_cast<int>(lines_) + 2; }

  int operator()(const Eigen::VectorXd& x, Eigen::VectorXd& residual) const {
    residual = model(x) - problem_.intensity;
    return 0;
  }

  int df(const Eigen::VectorXd& x, Eigen::MatrixXd& jacobian) const {
    jacobian = derivatives(x);
    return 0;
  }

  [[nodiscard]] Eigen::ArrayXd model(const Eigen::VectorXd& x) const {
    Eigen::ArrayXd sum = Eigen::ArrayXd::Zero(problem_.intensity.size());
    for (Eigen::Index k = 0; k < lines_; ++k) sum += x(k) * profile(x, k);
    return sum;
  }

  [[nodiscard]] Eigen::MatrixXd derivatives(const Eigen::VectorXd& x) const {
    Eigen::MatrixXd jacobian = Eigen::MatrixXd::Zero(problem_.intensity.size(), lines_ + 2);
    for (Eigen::Index k = 0; k < lines_; ++k) {
      const Eigen::ArrayXd shape = profile(x, k);
      const Eigen::ArrayXd t = (problem_.velocity_km_s.col(k) - x(lines_)) / sigma(x);
      jacobian.col(k) = shape;
      jacobian.col(lines_).array() += x(k) * shape * t / sigma(x);
      jacobian.col(lines_ + 1).array() += x(k) * shape * (t.square() - 1.0);
    }
    return jacobian;
  }

 private:
  [[nodiscard]] double sigma(const Eigen::VectorXd& x) const {
    return std::exp(x(lines_ + 1)) / constants::kFwhmPerSigma;
  }

  [[nodiscard]] Eigen::ArrayXd profile(const Eigen::VectorXd& x, Eigen::Index k) const {
    const double s = sigma(x);
    const Eigen::ArrayXd t = (problem_.velocity_km_s.col(k) - x(lines_)) / s;
    return (-0.5 * t.square()).exp() / (s * std::sqrt(2.0 * std::numbers::pi));
  }

  const GaussianProblem& problem_;
  Eigen::Index lines_;
};

/// For a given velocity and width the areas are a linear problem.
Eigen::VectorXd start(const GaussianProblem& problem, const Residuals& residuals) {
  const Eigen::Index lines = problem.velocity_km_s.cols();
  Eigen::VectorXd x = Eigen::VectorXd::Ones(lines + 2);
  x(lines) = problem.start_velocity_km_s;
  x(lines + 1) = std::log(problem.start_fwhm_km_s);
  const Eigen::MatrixXd shapes = residuals.derivatives(x).leftCols(lines);
  x.head(lines) = shapes.colPivHouseholderQr().solve(problem.intensity.matrix());
  return x;
}

std::string trouble_of(const GaussianProblem& problem, const GaussianSolution& solution) {
  if (!solution.converged) return "the fit did not converge";
  if (solution.fwhm_km_s < problem.narrowest_km_s) return "the line is narrower than a channel";
  const double low = problem.velocity_km_s.minCoeff();
  const double high = problem.velocity_km_s.maxCoeff();
  if (solution.velocity_km_s < low || solution.velocity_km_s > high)
    return "the line lies outside of its window";
  if (solution.fwhm_km_s > high - low) return "the line is wider than its window";
  return {};
}

}  // namespace

GaussianSolution fit_gaussians(const GaussianProblem& problem) {
  GaussianSolution solution;
  const Eigen::Index lines = problem.velocity_km_s.cols();
  if (problem.intensity.size() < lines + 3) {
    solution.trouble = "too few channels for a fit";
    return solution;
  }
  Residuals residuals(problem);
  Eigen::VectorXd x = start(problem, residuals);
  Eigen::LevenbergMarquardt<Residuals> minimiser(residuals);
  minimiser.parameters.maxfev = 200;
  minimiser.parameters.xtol = 1e-12;
  minimiser.parameters.ftol = 1e-14;
  const auto status = minimiser.minimize(x);
  solution.converged = status >= 1 && status != Eigen::LevenbergMarquardtSpace::TooManyFunctionEvaluation &&
                       x.allFinite() && std::abs(x(lines + 1)) < 50.0;
  if (!solution.converged) {
    solution.trouble = "the fit did not converge";
    return solution;
  }
  solution.area = x.head(lines);
  solution.velocity_km_s = x(lines);
  solution.fwhm_km_s = std::exp(x(lines + 1));
  solution.model = residuals.model(x);
  Eigen::MatrixXd jacobian = residuals.derivatives(x);
  jacobian.col(lines + 1) /= solution.fwhm_km_s;  // from ln(fwhm) to fwhm
  const auto decomposition = jacobian.completeOrthogonalDecomposition();
  solution.trouble =
      decomposition.rank() < lines + 2 ? "the lines cannot be told apart" : trouble_of(problem, solution);
  solution.response = decomposition.pseudoInverse();
  return solution;
}

}  // namespace trotline
