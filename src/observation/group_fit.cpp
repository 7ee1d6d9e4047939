#include "group_fit.hpp"

#include <trotline/observation/gaussian_fit.hpp>

namespace trotline {
namespace {

class GroupFit {
 public:
  GroupFit(const MeasurementContext& context, const LineGroup& group, const Region& region)
      : context_(context), group_(group), region_(region) {
    for (Eigen::Index i = region.window().begin - region.guard(); i < region.window().end + region.guard();
         ++i) {
      const bool inside = i >= region.span().begin && i < region.span().end;
      if (inside && !region.is_hole(i)) channels_.push_back(i);
    }
  }

  [[nodiscard]] FittedLines run() const {
    const GaussianProblem problem = make_problem();
    const GaussianSolution solution = fit_gaussians(problem);
    FittedLines result;
    result.trouble = solution.trouble;
    if (!solution.converged) return result;
    const auto lines = static_cast<Eigen::Index>(group_.size());
    std::vector<LinearSum> parameters;
    for (Eigen::Index k = 0; k < lines + 2; ++k) {
      result.weights.push_back(spread(solution.response.row(k)));
      parameters.push_back(region_.evaluate(result.weights.back(), result.weights.back()));
    }
    for (Eigen::Index k = 0; k < lines; ++k) result.lines.push_back(line(solution, parameters, k));
    result.areas.assign(parameters.begin(), parameters.begin() + lines);
    for (Eigen::Index k = 0; k < lines; ++k)
      result.areas[static_cast<std::size_t>(k)].value = solution.area(k);
    result.correlation = correlation_of(result.areas);
    result.model = Eigen::ArrayXd::Zero(region_.span().size());
    for (std::size_t i = 0; i < channels_.size(); ++i) {
      result.model(channels_[i] - region_.span().begin) = solution.model(static_cast<Eigen::Index>(i));
    }
    return result;
  }

 private:
  [[nodiscard]] GaussianProblem make_problem() const {
    const auto n = static_cast<Eigen::Index>(channels_.size());
    const auto lines = static_cast<Eigen::Index>(group_.size());
    GaussianProblem problem;
    problem.intensity.resize(n);
    problem.velocity_km_s.resize(n, lines);
    for (Eigen::Index i = 0; i < n; ++i) {
      const Eigen::Index channel = channels_[static_cast<std::size_t>(i)];
      problem.intensity(i) =
          context_.spectrum.intensity(channel) - region_.baseline()(channel - region_.span().begin);
      for (Eigen::Index k = 0; k < lines; ++k) {
        problem.velocity_km_s(i, k) = velocity_km_s(region_.frequency_hz(channel), rest_hz(k));
      }
    }
    const VelocityRange& window = group_[0].window;
    problem.narrowest_km_s = 0.5 * region_.width_km_s(region_.window().begin, rest_hz(0));
    set_start(window, problem);
    return problem;
  }

  /// One line alone starts at its moments; several start where they are expected.
  void set_start(const VelocityRange& window, GaussianProblem& problem) const {
    const double width = window.high_km_s - window.low_km_s;
    problem.start_velocity_km_s = 0.5 * (window.low_km_s + window.high_km_s);
    problem.start_fwhm_km_s = context_.options.fwhm_km_s.value_or(width / 3.0);
    if (group_.size() > 1 || problem.intensity.size() == 0) return;
    Eigen::Index highest = 0;
    problem.intensity.maxCoeff(&highest);
    const double peak = problem.intensity(highest);
    const double half = static_cast<double>((problem.intensity > 0.5 * peak).count());
    problem.start_velocity_km_s = problem.velocity_km_s(highest, 0);
    problem.start_fwhm_km_s = std::max(half, 1.5) * 2.0 * problem.narrowest_km_s;
  }

  [[nodiscard]] double rest_hz(Eigen::Index line) const {
    return group_[static_cast<std::size_t>(line)].request->rest_frequency_hz;
  }

  /// A parameter's response to the data of the fit, as weights over the region.
  [[nodiscard]] Eigen::VectorXd spread(const Eigen::RowVectorXd& response) const {
    Eigen::VectorXd weights = Eigen::VectorXd::Zero(region_.span().size());
    for (std::size_t i = 0; i < channels_.size(); ++i) {
      weights(channels_[i] - region_.span().begin) = response(static_cast<Eigen::Index>(i));
    }
    return weights;
  }

  [[nodiscard]] double covariance(const LinearSum& a, const LinearSum& b) const {
    return region_.fit().rms * region_.fit().rms *
           context_.correlation.covariance_of(a.total_weights, b.total_weights);
  }

  [[nodiscard]] GaussianLine line(const GaussianSolution& solution, const std::vector<LinearSum>& parameters,
                                  Eigen::Index k) const {
    const LinearSum& area = parameters[static_cast<std::size_t>(k)];
    const LinearSum& velocity = parameters[group_.size()];
    const LinearSum& fwhm = parameters[group_.size() + 1];
    // peak = area / fwhm * 2 sqrt(ln 2 / pi)
    constexpr double kPeak = 0.9394372786996513;
    GaussianLine result;
    result.area = {solution.area(k), area.sigma()};
    result.velocity_km_s = {solution.velocity_km_s, velocity.sigma()};
    result.fwhm_km_s = {solution.fwhm_km_s, fwhm.sigma()};
    const double peak = kPeak * solution.area(k) / solution.fwhm_km_s;
    const double from_area = kPeak / solution.fwhm_km_s;
    const double from_fwhm = -peak / solution.fwhm_km_s;
    const double variance = from_area * from_area * area.sigma() * area.sigma() +
                            from_fwhm * from_fwhm * fwhm.sigma() * fwhm.sigma() +
                            2.0 * from_area * from_fwhm * covariance(area, fwhm);
    result.peak = {peak, std::sqrt(std::max(0.0, variance))};
    return result;
  }

  [[nodiscard]] Eigen::MatrixXd correlation_of(const std::vector<LinearSum>& areas) const {
    const auto n = static_cast<Eigen::Index>(areas.size());
    Eigen::MatrixXd correlation = Eigen::MatrixXd::Identity(n, n);
    for (Eigen::Index i = 0; i < n; ++i) {
      for (Eigen::Index k = 0; k < i; ++k) {
        const LinearSum& one = areas[static_cast<std::size_t>(i)];
        const LinearSum& other = areas[static_cast<std::size_t>(k)];
        correlation(i, k) = correlation(k, i) = covariance(one, other) / (one.sigma() * other.sigma());
      }
    }
    return correlation;
  }

  const MeasurementContext& context_;
  const LineGroup& group_;
  const Region& region_;
  std::vector<Eigen::Index> channels_;
};

}  // namespace

FittedLines fit_group(const MeasurementContext& context, const LineGroup& group, const Region& region) {
  return GroupFit(context, group, region).run();
}

}  // namespace trotline
