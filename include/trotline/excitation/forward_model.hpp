#pragma once

#include <Eigen/Dense>

#include <limits>
#include <memory>
#include <vector>

#include <trotline/excitation/curve_of_growth.hpp>
#include <trotline/excitation/tabulated_partition.hpp>
#include <trotline/excitation/thin_line.hpp>

namespace trotline {

/// One line as the forward model sees it.
struct ModelLine {
  LineConstants constants;
  double fwhm_km_s = std::numeric_limits<double>::quiet_NaN();  ///< needed unless lines are thin
  double filling = 1.0;           ///< a given beam filling factor; multiplies that of the source size
  double beam_fwhm_arcsec = 0.0;  ///< 0: the source fills this beam whatever its size
  double continuum_k = 0.0;       ///< brightness behind the source at this line, on top of J(nu, T_bg) [K]
  double offset_km_s = 0.0;       ///< velocity of the line relative to the others of its datum
  int datum = 0;                  ///< which measurement it belongs to; lines of one datum are a blend
  int isomer = 0;                 ///< which partition function and column density it follows
};

struct ForwardModelOptions {
  Opacity opacity = Opacity::curve_of_growth;
  SourceShape source_shape = SourceShape::gaussian;
  int components = 1;
};

/// Where each parameter of a model stands in its state vector. For every component: ln N [cm^-2] of each
/// isomer, ln T [K], ln of the source size [arcsec] (infinity: the source fills every beam); at the end the
/// background temperature [K], shared by all.
struct StateLayout {
  int components = 1;
  int isomers = 1;

  [[nodiscard]] int ln_column(int component, int isomer = 0) const {
    return component * (isomers + 2) + isomer;
  }
  [[nodiscard]] int ln_temperature(int component) const { return component * (isomers + 2) + isomers; }
  [[nodiscard]] int ln_size(int component) const { return ln_temperature(component) + 1; }
  [[nodiscard]] int background() const { return components * (isomers + 2); }
  [[nodiscard]] int size() const { return background() + 1; }
};

/// What a model predicts for one line of one component, for reports.
struct LinePrediction {
  double optical_depth = 0.0;     ///< at line centre of this line alone; NaN without a width
  double filling = 1.0;           ///< of this component in this line's beam
  double intensity_k_km_s = 0.0;  ///< its share of its datum
};

namespace internal {

struct LineArrays;

/// One member of a blend: a Gaussian optical depth and the brightness behind it.
struct BlendMember {
  double tau0 = 0.0;  ///< optical depth at its centre
  double offset_km_s = 0.0;
  double half_width_km_s = 0.0;  ///< where tau falls to tau0/e
  double source_k = 0.0;         ///< f [J(T) - J(T_bg) - T_cont]
  // What the integral fills in:
  double by_ln_tau = 0.0;  ///< dW / d ln tau0
  double by_source = 0.0;  ///< dW / d source_k; times source_k it is the member's share of W
};

}  // namespace internal

/// Scratch space of a model: made once a thread, then nothing is allocated.
class ModelWorkspace {
 public:
  ModelWorkspace() = default;

  Eigen::ArrayXd intensity_k_km_s;  ///< W, shape (n_data)
  Eigen::ArrayXXd slopes;           ///< dW/d(state), shape (n_data, n_state); column by column as StateLayout

 private:
  friend class ForwardModel;
  struct Filling {
    double ln_size = std::numeric_limits<double>::quiet_NaN();  // for which the two arrays hold
    Eigen::ArrayXd value;
    Eigen::ArrayXd ln_slope;  // d ln f / d ln size
  };
  Eigen::ArrayXXd scratch_;  // one column for each quantity of internal::Scratch
  std::vector<Filling> filling_;
  std::vector<internal::BlendMember> blend_;
  double background_k_ = std::numeric_limits<double>::quiet_NaN();  // for which the background columns hold
};

/// Integrated intensities of lines from temperatures and column densities, with derivatives.
///
///     W = sum over components of f [J(nu, T) - J(nu, T_bg) - T_cont] * integral of (1 - exp(-tau(v))) dv
///
/// for one line, tau(v) a Gaussian of the line's FWHM; opacity after `opacity`. The lines of a blend add up
/// in tau(v), each with its own offset, width and source function:
///
///     W = integral of (1 - exp(-tau)) / tau * sum over members of tau_m f_m [J_m(T) - ...] dv
///
/// by a trapezoidal sum whose step is halved until it holds to kBlendError. With line_centre opacity or thin
/// lines the members of a blend are corrected one by one and added. Components do not shade one another.
///
/// Constants of the lines are laid out once; evaluations allocate nothing and run over all lines in vectors.
/// The same bits come out for one source or for a million, on every processor of a kind.
/// Reference: [MangumShirley2015] for thin lines, [GoldsmithLanger1999] for opacity.
class ForwardModel {
 public:
  /// @param lines       at least one; data are numbered from 0 without gaps
  /// @param partitions  one for each isomer, over one span of temperatures
  /// @throws DomainError naming the argument: constants not above 0, a width missing that opacity needs, a
  ///         beam below 0, a datum without a line, an isomer without a partition function
  ForwardModel(std::vector<ModelLine> lines,
               std::vector<std::shared_ptr<const TabulatedPartition>> partitions,
               const ForwardModelOptions& options);
  ~ForwardModel();
  ForwardModel(ForwardModel&&) noexcept;
  ForwardModel& operator=(ForwardModel&&) noexcept;

  [[nodiscard]] const StateLayout& layout() const { return layout_; }
  [[nodiscard]] Eigen::Index data() const { return data_; }
  [[nodiscard]] const std::vector<ModelLine>& lines() const { return lines_; }
  [[nodiscard]] const ForwardModelOptions& options() const { return options_; }
  [[nodiscard]] const TabulatedPartition& partition(int isomer) const;

  [[nodiscard]] ModelWorkspace workspace() const;

  /// W at a state, into the workspace. The state is not checked: ln N and T_bg finite, T inside the span of
  /// the partition functions, T_bg >= 0.
  void evaluate(const Eigen::Ref<const Eigen::VectorXd>& state, ModelWorkspace& workspace) const;

  /// W and all its derivatives.
  void evaluate_with_slopes(const Eigen::Ref<const Eigen::VectorXd>& state, ModelWorkspace& workspace) const;

  /// What one component contributes line by line, in the order of lines().
  [[nodiscard]] std::vector<LinePrediction> predictions(const Eigen::Ref<const Eigen::VectorXd>& state,
                                                        int component) const;

 private:
  struct Blend {
    int datum;
    std::vector<Eigen::Index> members;  // by rising offset
  };
  using State = Eigen::Ref<const Eigen::VectorXd>;

  void sort_into_data();
  template <bool kWithSlopes>
  void run(const State& state, ModelWorkspace& workspace) const;
  template <bool kWithSlopes>
  void compute_lines(const State& state, int component, ModelWorkspace& workspace) const;
  void add_lines(ModelWorkspace& workspace) const;
  void add_line_slopes(int component, ModelWorkspace& workspace) const;
  double integrate(const Blend& blend, int component, ModelWorkspace& workspace) const;
  void add_blend_slopes(const Blend& blend, const State& state, int component,
                        ModelWorkspace& workspace) const;
  void refresh_background(double background_k, ModelWorkspace& workspace) const;
  void refresh_filling(double ln_size, ModelWorkspace::Filling& filling) const;
  void populate(const State& state, int component, ModelWorkspace& workspace) const;

  StateLayout layout_;
  ForwardModelOptions options_;
  Eigen::Index data_ = 0;
  bool one_line_a_datum_ = true;  // line i is datum i
  std::vector<ModelLine> lines_;
  std::vector<std::shared_ptr<const TabulatedPartition>> partitions_;
  std::vector<Blend> blends_;
  std::vector<Eigen::Index> alone_;  // lines that are no members of a blend
  std::unique_ptr<internal::LineArrays> arrays_;
};

/// Relative accuracy of the velocity integral over a blend.
inline constexpr double kBlendError = 1e-10;

}  // namespace trotline
