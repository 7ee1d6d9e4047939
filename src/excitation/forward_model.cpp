#include <algorithm>
#include <cmath>
#include <numbers>

#include <trotline/base/errors.hpp>
#include <trotline/excitation/forward_model.hpp>
#include <trotline/physics/planck.hpp>

#include "blend_integral.hpp"
#include "line_kernel.hpp"

namespace trotline {
namespace {

using internal::BlendMember;
using internal::LineArrays;
using internal::LineBatch;

constexpr double kFwhmPerHalfWidth = 1.6651092223153956;  // 2 sqrt(ln 2): FWHM over the half width at 1/e

bool is_positive(double value) { return std::isfinite(value) && value > 0.0; }

void require_line(const ModelLine& line, Opacity opacity, std::size_t isomers) {
  const auto require = [](bool good, const char* argument, double value, const char* allowed) {
    if (!good) throw DomainError(argument, value, allowed);
  };
  (void)intensity_per_upper_column_k_km_s_cm2(line.constants);  // checks frequency and A
  require(is_positive(line.constants.upper_degeneracy), "upper_degeneracy", line.constants.upper_degeneracy,
          "finite and above 0");
  require(line.constants.upper_energy_k >= 0.0 && std::isfinite(line.constants.upper_energy_k),
          "upper_energy_k", line.constants.upper_energy_k, "finite and not below 0");
  require(opacity == Opacity::thin || is_positive(line.fwhm_km_s), "fwhm_km_s", line.fwhm_km_s,
          "finite and above 0, as opacity needs the width of every line");
  require(is_positive(line.filling), "filling", line.filling, "finite and above 0");
  require(std::isfinite(line.beam_fwhm_arcsec) && line.beam_fwhm_arcsec >= 0.0, "beam_fwhm_arcsec",
          line.beam_fwhm_arcsec, "finite and not below 0");
  require(std::isfinite(line.continuum_k) && line.continuum_k >= 0.0, "continuum_k", line.continuum_k,
          "finite and not below 0");
  require(std::isfinite(line.offset_km_s), "offset_km_s", line.offset_km_s, "finite");
  require(line.datum >= 0, "datum", line.datum, "not below 0");
  require(line.isomer >= 0 && static_cast<std::size_t>(line.isomer) < isomers, "isomer", line.isomer,
          "the number of a partition function");
}

void lay_out(LineArrays& arrays, const ModelLine& line, Eigen::Index i) {
  const double per_column = intensity_per_upper_column_k_km_s_cm2(line.constants);
  const double photon_k = photon_energy_k(line.constants.frequency_hz);
  arrays.ln_strength[i] = std::log(line.constants.upper_degeneracy * per_column);
  arrays.energy_k[i] = line.constants.upper_energy_k;
  arrays.photon_k[i] = photon_k;
  if (is_positive(line.fwhm_km_s)) {
    arrays.depth_per_area[i] =
        std::sqrt(4.0 * std::numbers::ln2 / std::numbers::pi) / (line.fwhm_km_s * photon_k);
  }
  arrays.given_filling[i] = line.filling;
  arrays.beam_squared[i] = line.beam_fwhm_arcsec * line.beam_fwhm_arcsec;
  arrays.continuum_k[i] = line.continuum_k;
}

}  // namespace

ForwardModel::ForwardModel(std::vector<ModelLine> lines,
                           std::vector<std::shared_ptr<const TabulatedPartition>> partitions,
                           const ForwardModelOptions& options)
    : options_(options), lines_(std::move(lines)), partitions_(std::move(partitions)) {
  if (lines_.empty()) throw DomainError("lines.size()", 0.0, "at least 1");
  if (options.components < 1) throw DomainError("components", options.components, "at least 1");
  layout_ = {options.components, static_cast<int>(partitions_.size())};
  const auto count = static_cast<Eigen::Index>(lines_.size());
  arrays_ = std::make_unique<LineArrays>((count + internal::kVectorLines - 1) / internal::kVectorLines *
                                         internal::kVectorLines);
  for (Eigen::Index i = 0; i < count; ++i) {
    require_line(lines_[static_cast<std::size_t>(i)], options.opacity, partitions_.size());
    lay_out(*arrays_, lines_[static_cast<std::size_t>(i)], i);
  }
  sort_into_data();
}

void ForwardModel::sort_into_data() {
  std::vector<std::vector<Eigen::Index>> members;
  for (Eigen::Index i = 0; i < static_cast<Eigen::Index>(lines_.size()); ++i) {
    const int datum = lines_[static_cast<std::size_t>(i)].datum;
    members.resize(std::max(members.size(), static_cast<std::size_t>(datum) + 1));
    members[static_cast<std::size_t>(datum)].push_back(i);
    one_line_a_datum_ = one_line_a_datum_ && datum == i;
  }
  data_ = static_cast<Eigen::Index>(members.size());
  for (std::size_t datum = 0; datum < members.size(); ++datum) {
    auto& group = members[datum];
    if (group.empty()) throw DomainError("datum", static_cast<double>(datum), "a datum with a line");
    // Without the curve of growth the members of a blend are corrected one by one and added.
    if (group.size() == 1 || options_.opacity != Opacity::curve_of_growth) {
      alone_.insert(alone_.end(), group.begin(), group.end());
      continue;
    }
    std::stable_sort(group.begin(), group.end(), [&](Eigen::Index a, Eigen::Index b) {
      return lines_[static_cast<std::size_t>(a)].offset_km_s <
             lines_[static_cast<std::size_t>(b)].offset_km_s;
    });
    blends_.push_back({static_cast<int>(datum), group});
  }
}

ForwardModel::~ForwardModel() = default;
ForwardModel::ForwardModel(ForwardModel&&) noexcept = default;
ForwardModel& ForwardModel::operator=(ForwardModel&&) noexcept = default;

const TabulatedPartition& ForwardModel::partition(int isomer) const {
  return *partitions_[static_cast<std::size_t>(isomer)];
}

ModelWorkspace ForwardModel::workspace() const {
  ModelWorkspace workspace;
  const Eigen::Index padded = arrays_->ln_strength.size();
  workspace.intensity_k_km_s.setZero(data_);
  workspace.slopes.setZero(data_, layout_.size());
  workspace.scratch_.setZero(padded, internal::kScratchColumns);
  workspace.filling_.resize(static_cast<std::size_t>(layout_.components));
  for (auto& filling : workspace.filling_) {
    filling.value.setOnes(padded);
    filling.ln_slope.setZero(padded);
  }
  std::size_t most = 0;
  for (const Blend& blend : blends_) most = std::max(most, blend.members.size());
  workspace.blend_.resize(most);
  return workspace;
}

void ForwardModel::refresh_background(double background_k, ModelWorkspace& workspace) const {
  if (workspace.background_k_ == background_k) return;
  const LineBatch batch{workspace.scratch_.rows(), arrays_.get(), &workspace.scratch_, 0.0, nullptr, nullptr};
  internal::compute_background(batch, background_k);
  workspace.background_k_ = background_k;
}

void ForwardModel::refresh_filling(double ln_size, ModelWorkspace::Filling& filling) const {
  if (filling.ln_size == ln_size) return;
  const double inverse_size_squared = std::exp(-2.0 * ln_size);
  for (Eigen::Index i = 0; i < filling.value.size(); ++i) {
    const double ratio = arrays_->beam_squared[i] * inverse_size_squared;  // (beam/size)^2
    if (ratio == 0.0) {
      filling.value[i] = 1.0;
      filling.ln_slope[i] = 0.0;
    } else if (options_.source_shape == SourceShape::gaussian) {
      filling.value[i] = 1.0 / (1.0 + ratio);
      filling.ln_slope[i] = 2.0 * ratio * filling.value[i];
    } else {
      const double x = std::numbers::ln2 / ratio;
      filling.value[i] = -std::expm1(-x);
      filling.ln_slope[i] = x < 700.0 ? 2.0 * x / std::expm1(x) : 0.0;
    }
    filling.value[i] *= arrays_->given_filling[i];
  }
  filling.ln_size = ln_size;
}

void ForwardModel::populate(const State& state, int component, ModelWorkspace& workspace) const {
  const double ln_t = state[layout_.ln_temperature(component)];
  auto population = workspace.scratch_.col(internal::kPopulation);
  auto mean_energy = workspace.scratch_.col(internal::kMeanEnergy);
  if (layout_.isomers == 1) {
    const TabulatedPartition::Value q = partitions_.front()->at(ln_t);
    population.setConstant(state[layout_.ln_column(component)] - q.ln_q);
    mean_energy.setConstant(q.dlnq_dlnt);
    return;
  }
  for (int isomer = 0; isomer < layout_.isomers; ++isomer) {
    const TabulatedPartition::Value q = partitions_[static_cast<std::size_t>(isomer)]->at(ln_t);
    const double ln_n_over_q = state[layout_.ln_column(component, isomer)] - q.ln_q;
    for (std::size_t i = 0; i < lines_.size(); ++i) {
      if (lines_[i].isomer != isomer) continue;
      population[static_cast<Eigen::Index>(i)] = ln_n_over_q;
      mean_energy[static_cast<Eigen::Index>(i)] = q.dlnq_dlnt;
    }
  }
}

template <bool kWithSlopes>
void ForwardModel::compute_lines(const State& state, int component, ModelWorkspace& workspace) const {
  auto& filling = workspace.filling_[static_cast<std::size_t>(component)];
  refresh_filling(state[layout_.ln_size(component)], filling);
  populate(state, component, workspace);
  const LineBatch batch{workspace.scratch_.rows(), arrays_.get(),
                        &workspace.scratch_,       std::exp(-state[layout_.ln_temperature(component)]),
                        filling.value.data(),      filling.ln_slope.data()};
  internal::compute_areas(batch);
  internal::compute_saturation(batch, options_.opacity);
  if constexpr (kWithSlopes) {
    internal::compute_slopes(batch);
  } else {
    internal::compute_intensities(batch);
  }
}

void ForwardModel::add_lines(ModelWorkspace& workspace) const {
  const auto& line_intensity = workspace.scratch_.col(internal::kWork);
  if (one_line_a_datum_) {
    workspace.intensity_k_km_s += line_intensity.head(data_);
    return;
  }
  for (const Eigen::Index i : alone_) {
    workspace.intensity_k_km_s[lines_[static_cast<std::size_t>(i)].datum] += line_intensity[i];
  }
}

void ForwardModel::add_line_slopes(int component, ModelWorkspace& workspace) const {
  const auto& scratch = workspace.scratch_;
  using internal::kWork;
  const std::pair<Eigen::Index, Eigen::Index> columns[] = {{kWork + 2, layout_.ln_temperature(component)},
                                                           {kWork + 3, layout_.ln_size(component)},
                                                           {kWork + 4, layout_.background()}};
  if (one_line_a_datum_ && layout_.isomers == 1) {
    workspace.slopes.col(layout_.ln_column(component)) += scratch.col(kWork + 1).head(data_);
    for (const auto& [from, to] : columns) workspace.slopes.col(to) += scratch.col(from).head(data_);
    return;
  }
  for (const Eigen::Index i : alone_) {
    const ModelLine& line = lines_[static_cast<std::size_t>(i)];
    workspace.slopes(line.datum, layout_.ln_column(component, line.isomer)) += scratch(i, kWork + 1);
    for (const auto& [from, to] : columns) workspace.slopes(line.datum, to) += scratch(i, from);
  }
}

double ForwardModel::integrate(const Blend& blend, int component, ModelWorkspace& workspace) const {
  const auto& scratch = workspace.scratch_;
  const auto& filling = workspace.filling_[static_cast<std::size_t>(component)].value;
  for (std::size_t m = 0; m < blend.members.size(); ++m) {
    const Eigen::Index i = blend.members[m];
    const ModelLine& line = lines_[static_cast<std::size_t>(i)];
    const double contrast_k =
        arrays_->photon_k[i] * (1.0 / scratch(i, internal::kExpm1) - scratch(i, internal::kBackground));
    workspace.blend_[m] = {scratch(i, internal::kTau), line.offset_km_s, line.fwhm_km_s / kFwhmPerHalfWidth,
                           filling[i] * contrast_k};
  }
  return internal::integrate_blend(workspace.blend_.data(), static_cast<Eigen::Index>(blend.members.size()));
}

void ForwardModel::add_blend_slopes(const Blend& blend, const State& state, int component,
                                    ModelWorkspace& workspace) const {
  const double inverse_t = std::exp(-state[layout_.ln_temperature(component)]);
  const auto& scratch = workspace.scratch_;
  const auto& filling = workspace.filling_[static_cast<std::size_t>(component)];
  auto slopes = workspace.slopes.row(blend.datum);
  for (std::size_t m = 0; m < blend.members.size(); ++m) {
    const Eigen::Index i = blend.members[m];
    const BlendMember& member = workspace.blend_[m];
    const double expm1 = scratch(i, internal::kExpm1);
    const double x = arrays_->photon_k[i] * inverse_t;
    const double planck_slope = x + x / expm1;  // d ln J/d ln T
    const double depth_slope =
        arrays_->energy_k[i] * inverse_t - scratch(i, internal::kMeanEnergy) - planck_slope;
    const double full = member.by_source * filling.value[i] * arrays_->photon_k[i];
    slopes[layout_.ln_column(component, lines_[static_cast<std::size_t>(i)].isomer)] += member.by_ln_tau;
    slopes[layout_.ln_temperature(component)] += member.by_ln_tau * depth_slope + full / expm1 * planck_slope;
    slopes[layout_.ln_size(component)] += member.by_source * member.source_k * filling.ln_slope[i];
    slopes[layout_.background()] -= full * scratch(i, internal::kBackgroundSlope);
  }
}

template <bool kWithSlopes>
void ForwardModel::run(const State& state, ModelWorkspace& workspace) const {
  workspace.intensity_k_km_s.setZero();
  if constexpr (kWithSlopes) workspace.slopes.setZero();
  refresh_background(state[layout_.background()], workspace);
  for (int component = 0; component < layout_.components; ++component) {
    compute_lines<kWithSlopes>(state, component, workspace);
    add_lines(workspace);
    if constexpr (kWithSlopes) add_line_slopes(component, workspace);
    for (const Blend& blend : blends_) {
      workspace.intensity_k_km_s[blend.datum] += integrate(blend, component, workspace);
      if constexpr (kWithSlopes) add_blend_slopes(blend, state, component, workspace);
    }
  }
}

void ForwardModel::evaluate(const State& state, ModelWorkspace& workspace) const {
  run<false>(state, workspace);
}

void ForwardModel::evaluate_with_slopes(const State& state, ModelWorkspace& workspace) const {
  run<true>(state, workspace);
}

std::vector<LinePrediction> ForwardModel::predictions(const State& state, int component) const {
  ModelWorkspace workspace = this->workspace();
  refresh_background(state[layout_.background()], workspace);
  compute_lines<false>(state, component, workspace);
  std::vector<LinePrediction> predictions(lines_.size());
  const auto& filling = workspace.filling_[static_cast<std::size_t>(component)].value;
  for (std::size_t i = 0; i < lines_.size(); ++i) {
    const auto row = static_cast<Eigen::Index>(i);
    predictions[i].optical_depth = is_positive(lines_[i].fwhm_km_s)
                                       ? workspace.scratch_(row, internal::kTau)
                                       : std::numeric_limits<double>::quiet_NaN();
    predictions[i].filling = filling[row];
    predictions[i].intensity_k_km_s = workspace.scratch_(row, internal::kWork);
  }
  for (const Blend& blend : blends_) {
    (void)integrate(blend, component, workspace);
    for (std::size_t m = 0; m < blend.members.size(); ++m) {
      predictions[static_cast<std::size_t>(blend.members[m])].intensity_k_km_s =
          workspace.blend_[m].by_source * workspace.blend_[m].source_k;
    }
  }
  return predictions;
}

}  // namespace trotline
