#include <gtest/gtest.h>

#include <cmath>
#include <random>

#include <trotline/base/errors.hpp>
#include <trotline/excitation/forward_model.hpp>
#include <trotline/physics/planck.hpp>
#include <trotline/rotor/line_strength.hpp>

#include "plain_model.hpp"

namespace trotline {
namespace {

constexpr double kInfinite = std::numeric_limits<double>::infinity();

std::vector<std::shared_ptr<const TabulatedPartition>> partitions(int isomers) {
  std::vector<std::shared_ptr<const TabulatedPartition>> tables;
  for (int i = 0; i < isomers; ++i) {
    tables.push_back(std::make_shared<TabulatedPartition>(plain::RotorPartition(isomers, i), 2.0, 2000.0));
  }
  return tables;
}

/// Lines of a rotor much like CO, J = 1-0 and up, A made to rise as it does; widths and beams all different.
std::vector<ModelLine> ladder(int count) {
  std::vector<ModelLine> lines;
  for (int j = 1; j <= count; ++j) {
    ModelLine line;
    line.constants = {2.0 * plain::kRotorK / constants::kKelvinPerHz * j, plain::kRotorK * j * (j + 1),
                      2.0 * j + 1, 7.2e-8 * 3.0 * std::pow(j, 4) / (2 * j + 1)};
    line.fwhm_km_s = 2.0 + 0.1 * j;
    line.beam_fwhm_arcsec = 28.0 / j;
    line.datum = j - 1;
    lines.push_back(line);
  }
  return lines;
}

struct Case {
  std::string name;
  ForwardModel model;
  Eigen::VectorXd state;
};

Case single(double ln_column, double t, double size, double background, ForwardModelOptions options = {}) {
  Case c{fmt::format("ln N {} T {} size {} bg {}", ln_column, t, size, background),
         ForwardModel(ladder(9), partitions(1), options), Eigen::VectorXd(4)};
  c.state << ln_column, std::log(t), std::log(size), background;
  return c;
}

/// Two components, two isomers, blends across isomers, continuum and given fillings: everything at once.
Case everything() {
  auto lines = ladder(10);
  for (std::size_t i = 0; i < lines.size(); ++i) {
    lines[i].isomer = static_cast<int>((i + 1) % 2);
    lines[i].datum = static_cast<int>(i < 3 ? 0 : i < 5 ? 1 : i - 3);
    lines[i].offset_km_s = i < 3 ? 1.7 * static_cast<double>(i) - 1.0 : 40.0 * static_cast<double>(i);
    lines[i].continuum_k = 0.1 * static_cast<double>(i);
    lines[i].filling = i == 7 ? 0.4 : 1.0;
    if (i == 7) lines[i].beam_fwhm_arcsec = 0.0;
  }
  ForwardModelOptions options;
  options.components = 2;
  options.source_shape = SourceShape::disc;
  Case c{"everything", ForwardModel(lines, partitions(2), options), Eigen::VectorXd(9)};
  c.state << 38.5, 37.7, std::log(18.0), std::log(11.0), 35.0, 35.5, std::log(160.0), std::log(4.0), 2.7;
  return c;
}

std::vector<Case> cases() {
  std::vector<Case> all;
  for (const double ln_column : {25.0, 36.0, 39.0, 43.0}) {
    for (const double t : {5.0, 30.0, 400.0}) all.push_back(single(ln_column, t, 12.0, 2.7255));
  }
  all.push_back(single(37.0, 25.0, kInfinite, 0.0));
  all.push_back(single(37.0, 25.0, 0.02, 15.0));
  all.push_back(single(37.0, 2.2, 5.0, 6.0));  // absorption
  all.push_back(single(37.0, 40.0, 12.0, 2.7255, {Opacity::curve_of_growth, SourceShape::disc, 1}));
  all.push_back(everything());
  return all;
}

TEST(ForwardModel, AgreesWithABruteVelocitySum) {
  for (const Case& c : cases()) {
    const std::vector<double> state(c.state.begin(), c.state.end());
    const std::vector<double> expected = plain::intensities(c.model, state);
    ModelWorkspace workspace = c.model.workspace();
    c.model.evaluate(c.state, workspace);
    for (std::size_t d = 0; d < expected.size(); ++d) {
      // Q is tabulated to 1e-9; the sum and the integral of blends are good to 1e-10 or better. Lines near
      // T = T_bg lose the digits of their contrast.
      EXPECT_NEAR(workspace.intensity_k_km_s[static_cast<Eigen::Index>(d)], expected[d],
                  3e-9 * std::abs(expected[d]))
          << c.name << " datum " << d;
    }
  }
}

TEST(ForwardModel, DerivativesAgreeWithTheComplexStep) {
  using Complex = std::complex<double>;
  constexpr double kStep = 1e-30;
  for (const Case& c : cases()) {
    ModelWorkspace workspace = c.model.workspace();
    c.model.evaluate_with_slopes(c.state, workspace);
    for (Eigen::Index k = 0; k < c.state.size(); ++k) {
      if (std::isinf(c.state[k]) || (k == c.state.size() - 1 && c.state[k] == 0.0)) continue;
      std::vector<Complex> state(c.state.begin(), c.state.end());
      state[static_cast<std::size_t>(k)] += Complex(0.0, kStep);
      const std::vector<Complex> shifted = plain::intensities(c.model, state);
      for (std::size_t d = 0; d < shifted.size(); ++d) {
        const double expected = shifted[d].imag() / kStep;
        const double scale = std::abs(expected) + std::abs(shifted[d].real());
        // the slope of a tabulated ln Q is good to some 1e-7 at the lowest temperatures
        EXPECT_NEAR(workspace.slopes(static_cast<Eigen::Index>(d), k), expected, 2e-7 * scale)
            << c.name << " datum " << d << " parameter " << k;
      }
    }
  }
}

TEST(ForwardModel, GivesTheSameIntensitiesWithAndWithoutSlopes) {
  for (const Case& c : cases()) {
    ModelWorkspace one = c.model.workspace();
    ModelWorkspace two = c.model.workspace();
    c.model.evaluate(c.state, one);
    c.model.evaluate_with_slopes(c.state, two);
    for (Eigen::Index d = 0; d < c.model.data(); ++d) {
      EXPECT_NEAR(two.intensity_k_km_s[d], one.intensity_k_km_s[d],
                  4e-16 * std::abs(one.intensity_k_km_s[d]));
    }
  }
}

TEST(ForwardModel, DoesNotRememberEarlierStates) {
  const Case c = everything();
  ModelWorkspace used = c.model.workspace();
  Eigen::VectorXd other = c.state;
  other.array() += 0.3;
  c.model.evaluate_with_slopes(other, used);
  ModelWorkspace fresh = c.model.workspace();
  c.model.evaluate_with_slopes(c.state, used);
  c.model.evaluate_with_slopes(c.state, fresh);
  EXPECT_TRUE((used.intensity_k_km_s == fresh.intensity_k_km_s).all());
  EXPECT_TRUE((used.slopes == fresh.slopes).all());
}

TEST(ForwardModel, GivesTheSameBitsForALineAloneOrAmongOthers) {
  const auto lines = ladder(21);
  const ForwardModel together(lines, partitions(1), {});
  ModelWorkspace workspace = together.workspace();
  const Eigen::Vector4d state(38.0, std::log(33.0), 2.0, 2.7255);
  together.evaluate_with_slopes(state, workspace);
  for (std::size_t i = 0; i < lines.size(); ++i) {
    ModelLine line = lines[i];
    line.datum = 0;
    const ForwardModel alone({line}, partitions(1), {});
    ModelWorkspace own = alone.workspace();
    alone.evaluate_with_slopes(state, own);
    EXPECT_EQ(own.intensity_k_km_s[0], workspace.intensity_k_km_s[static_cast<Eigen::Index>(i)]);
    EXPECT_TRUE((own.slopes.row(0) == workspace.slopes.row(static_cast<Eigen::Index>(i))).all());
  }
}

TEST(ForwardModel, ThinLinesGiveNuFromTheirAreaWhateverHnuOverKT) {
  Case c = single(27.0, 3.0, kInfinite, 0.0, {Opacity::thin, SourceShape::gaussian, 1});
  ModelWorkspace workspace = c.model.workspace();
  c.model.evaluate(c.state, workspace);
  for (std::size_t i = 0; i < c.model.lines().size(); ++i) {
    const LineConstants& line = c.model.lines()[i].constants;
    const double column =
        std::exp(27.0 - plain::ln_q(3.0, 1, 0) - line.upper_energy_k / 3.0) * line.upper_degeneracy;
    const double w = workspace.intensity_k_km_s[static_cast<Eigen::Index>(i)];
    EXPECT_NEAR(w / intensity_per_upper_column_k_km_s_cm2(line) / column, 1.0, 2e-9);
  }
}

TEST(ForwardModel, EveryOpacityIsTheThinAreaOverItsCorrection) {
  for (const Opacity opacity : {Opacity::thin, Opacity::line_centre, Opacity::curve_of_growth}) {
    const Case thin = single(39.0, 22.0, 9.0, 2.7, {Opacity::thin, SourceShape::gaussian, 1});
    const Case c = single(39.0, 22.0, 9.0, 2.7, {opacity, SourceShape::gaussian, 1});
    ModelWorkspace thin_workspace = thin.model.workspace();
    ModelWorkspace workspace = c.model.workspace();
    thin.model.evaluate(thin.state, thin_workspace);
    c.model.evaluate(c.state, workspace);
    const auto predictions = c.model.predictions(c.state, 0);
    for (std::size_t i = 0; i < predictions.size(); ++i) {
      const auto d = static_cast<Eigen::Index>(i);
      const double factor = opacity_correction(opacity, predictions[i].optical_depth).factor;
      EXPECT_NEAR(workspace.intensity_k_km_s[d] * factor / thin_workspace.intensity_k_km_s[d], 1.0, 1e-13);
      EXPECT_NEAR(predictions[i].optical_depth,
                  central_optical_depth(c.model.lines()[i].constants,
                                        std::exp(39.0 - plain::ln_q(22.0, 1, 0) -
                                                 c.model.lines()[i].constants.upper_energy_k / 22.0) *
                                            c.model.lines()[i].constants.upper_degeneracy,
                                        22.0, c.model.lines()[i].fwhm_km_s),
                  2e-9 * predictions[i].optical_depth);
    }
  }
}

TEST(ForwardModel, LinesVanishAtTheTemperatureOfTheBackground) {
  const Case c = single(38.0, 9.0, kInfinite, 9.0);
  const Case warm = single(38.0, 9.0, kInfinite, 0.0);
  ModelWorkspace workspace = c.model.workspace();
  ModelWorkspace warm_workspace = warm.model.workspace();
  c.model.evaluate(c.state, workspace);
  warm.model.evaluate(warm.state, warm_workspace);
  for (Eigen::Index d = 0; d < c.model.data(); ++d) {
    EXPECT_NEAR(workspace.intensity_k_km_s[d] / warm_workspace.intensity_k_km_s[d], 0.0, 1e-13);
  }
}

TEST(ForwardModel, IntensityRisesWithColumnAndWithTemperatureOfOpaqueLines) {
  ForwardModel model(ladder(6), partitions(1), {});
  ModelWorkspace workspace = model.workspace();
  std::mt19937_64 engine(20260503);
  std::uniform_real_distribution<double> ln_n(24.0, 45.0);
  std::uniform_real_distribution<double> ln_t(std::log(3.0), std::log(1500.0));
  for (int i = 0; i < 2000; ++i) {
    Eigen::Vector4d state(ln_n(engine), ln_t(engine), 2.0, 2.7255);
    model.evaluate_with_slopes(state, workspace);
    for (Eigen::Index d = 0; d < model.data(); ++d) {
      // d ln W/d ln N = d ln G/d ln tau lies between 0 (opaque) and 1 (thin)
      const double growth = workspace.slopes(d, 0) / workspace.intensity_k_km_s[d];
      EXPECT_GT(growth, 0.0);
      EXPECT_LE(growth, 1.0 + 1e-12);
      EXPECT_LE(workspace.slopes(d, 3), 0.0);  // a warmer background never helps
    }
  }
}

std::vector<ModelLine> blend_of(double offset_km_s, double width_ratio) {
  auto lines = ladder(3);
  lines.erase(lines.begin());
  lines[1].offset_km_s = offset_km_s;
  lines[1].fwhm_km_s = lines[0].fwhm_km_s * width_ratio;
  for (ModelLine& line : lines) line.datum = 0;
  return lines;
}

double datum(const std::vector<ModelLine>& lines, double ln_column, double t) {
  const ForwardModel model(lines, partitions(1), {});
  ModelWorkspace workspace = model.workspace();
  model.evaluate(Eigen::Vector4d(ln_column, std::log(t), std::log(10.0), 2.7255), workspace);
  return workspace.intensity_k_km_s.sum();
}

std::vector<ModelLine> apart(std::vector<ModelLine> lines) {
  for (std::size_t i = 0; i < lines.size(); ++i) lines[i].datum = static_cast<int>(i);
  return lines;
}

TEST(Blend, IsTheSumOfItsMembersWhereTheyAreThinOrFarApart) {
  for (const double ratio : {1.0, 0.2, 7.0}) {
    const auto near = blend_of(0.5, ratio);
    EXPECT_NEAR(datum(near, 20.0, 20.0) / datum(apart(near), 20.0, 20.0), 1.0, 1e-7);  // tau near 1e-8
    const auto far = blend_of(500.0, ratio);
    EXPECT_NEAR(datum(far, 41.0, 20.0) / datum(apart(far), 41.0, 20.0), 1.0, 2.0 * kBlendError);
  }
}

TEST(Blend, OfOpaqueLinesIsLessThanTheSumAndMoreThanEither) {
  const auto lines = blend_of(0.0, 1.0);
  const double together = datum(lines, 41.0, 20.0);
  EXPECT_LT(together, 0.75 * datum(apart(lines), 41.0, 20.0));
  EXPECT_GT(together, 0.5 * datum(apart(lines), 41.0, 20.0));
}

TEST(Blend, OfALineSplitInTwoIsTheLine) {
  auto whole = ladder(2);
  whole.erase(whole.begin());
  whole[0].datum = 0;
  auto halves = whole;
  halves[0].constants.einstein_a_per_s *= 0.3;
  halves.push_back(whole[0]);
  halves[1].constants.einstein_a_per_s *= 0.7;
  for (const double ln_column : {30.0, 38.0, 42.0, 46.0}) {
    EXPECT_NEAR(datum(halves, ln_column, 30.0) / datum(whole, ln_column, 30.0), 1.0, 2.0 * kBlendError)
        << ln_column;
  }
}

/// The wide line reaches back over both narrow ones, which do not touch each other: until 2026-12-01 the first was
/// closed before the last was looked at, and the overlap of opaque lines counted twice.
TEST(Blend, SeesALineThatReachesBackOverTwoOthers) {
  auto lines = blend_of(14.0, 1.0);
  lines[0].fwhm_km_s = lines[1].fwhm_km_s = 2.0 * std::sqrt(std::numbers::ln2);
  lines[1].constants.einstein_a_per_s *= 0.1;
  lines.push_back(lines[0]);
  lines[2].offset_km_s = 15.0;
  lines[2].fwhm_km_s *= 10.0;
  lines[2].constants.einstein_a_per_s *= 10.0;
  const ForwardModel model(lines, partitions(1), {});
  for (const double ln_column : {34.0, 36.0, 38.0}) {
    const std::vector<double> state = {ln_column, std::log(20.0), std::log(10.0), 2.7255};
    EXPECT_NEAR(datum(lines, ln_column, 20.0) / plain::intensities(model, state)[0], 1.0, 2.0 * kBlendError)
        << ln_column;
  }
}

TEST(Blend, SharesOfTheMembersAddUpToTheDatum) {
  const Case c = everything();
  ModelWorkspace workspace = c.model.workspace();
  c.model.evaluate(c.state, workspace);
  Eigen::ArrayXd sum = Eigen::ArrayXd::Zero(c.model.data());
  for (const int component : {0, 1}) {
    const auto predictions = c.model.predictions(c.state, component);
    for (std::size_t i = 0; i < predictions.size(); ++i) {
      sum[c.model.lines()[i].datum] += predictions[i].intensity_k_km_s;
    }
  }
  EXPECT_TRUE(sum.isApprox(workspace.intensity_k_km_s, 1e-13));
}

// Mangum & Shirley 2015, PASP 127, 266, eq. 90, for C18O 1-0: N = 2.48e14 (T + 0.88) exp(5.27/T) /
// (exp(5.27/T) - 1) W / (J(T) - J(T_bg)), with B = 54891.420 MHz, mu = 0.11079 D; thin.
TEST(ForwardModel, ReproducesThePublishedFormulaForC18O) {
  class ClassicalPartition final : public PartitionFunction {  // their Q = kT/hB + 1/3 = (T + 0.88 K)/2.634 K
   public:
    [[nodiscard]] PartitionValue at(double t) const override {
      const double b_k = constants::kKelvinPerHz * 54891.420e6;
      const double q = t / b_k + 1.0 / 3.0;
      return {q, std::log(q), 1.0 / (b_k * q), 0.0};
    }
    [[nodiscard]] double lowest_k() const override { return 1.0; }
    [[nodiscard]] double highest_k() const override { return 1000.0; }
    [[nodiscard]] std::string description() const override { return "kT/hB + 1/3"; }
  };
  const double nu = 109.782176e9;
  ModelLine line;
  // A = 16 pi^3 nu^3 S mu^2 / (3 eps0 h c^3 g) with S = 1 and g = 3
  const double mu = 0.11079 * constants::kDebyeCM;
  line.constants = {nu, 5.27, 3.0,
                    16.0 * std::pow(M_PI * nu / constants::kLightMPerS, 3) * mu * mu /
                        (3.0 * constants::kVacuumPermittivityFPerM * constants::kPlanckJS * 3.0)};
  const auto q = std::make_shared<TabulatedPartition>(ClassicalPartition(), 2.0, 500.0);
  const ForwardModel model({line}, {q}, {Opacity::thin, SourceShape::gaussian, 1});
  ModelWorkspace workspace = model.workspace();
  for (const double t : {7.0, 20.0, 80.0}) {
    model.evaluate(Eigen::Vector4d(std::log(1e15), std::log(t), kInfinite, 2.7255), workspace);
    const double contrast =
        planck_equivalent_temperature_k(nu, t) - planck_equivalent_temperature_k(nu, 2.7255);
    const double n = 2.48e14 * (t + 0.88) * std::exp(5.27 / t) / std::expm1(5.27 / t) *
                     workspace.intensity_k_km_s[0] / contrast;
    EXPECT_NEAR(n / 1e15, 1.0, 0.005 / 2.48 + 0.005 / 5.27) << t;  // half a unit of the digits printed
  }
}

TEST(ForwardModel, RefusesLinesThatItCannotPredict) {
  const auto broken = [](auto&& spoil) {
    auto lines = ladder(3);
    spoil(lines);
    EXPECT_THROW(ForwardModel(lines, partitions(1), {}), DomainError);
  };
  broken([](auto& lines) { lines.clear(); });
  broken([](auto& lines) { lines[1].fwhm_km_s = std::nan(""); });
  broken([](auto& lines) { lines[1].constants.einstein_a_per_s = 0.0; });
  broken([](auto& lines) { lines[1].constants.upper_degeneracy = -1.0; });
  broken([](auto& lines) { lines[1].datum = 7; });
  broken([](auto& lines) { lines[1].datum = -1; });
  broken([](auto& lines) { lines[1].isomer = 1; });
  broken([](auto& lines) { lines[1].beam_fwhm_arcsec = -3.0; });
  broken([](auto& lines) { lines[1].filling = 0.0; });
  broken([](auto& lines) { lines[1].continuum_k = kInfinite; });
  auto lines = ladder(3);
  lines[0].fwhm_km_s = std::nan("");
  EXPECT_NO_THROW(ForwardModel(lines, partitions(1), {Opacity::thin, SourceShape::gaussian, 1}));
}

TEST(TabulatedPartition, AgreesWithItsSourceAndHoldsToItsSpan) {
  const plain::RotorPartition source(1, 0);
  const TabulatedPartition table(source, 2.0, 2000.0);
  EXPECT_LT(table.error(), kTabulatedPartitionError);
  std::mt19937_64 engine(20260504);
  std::uniform_real_distribution<double> ln_t(std::log(2.0), std::log(2000.0));
  for (int i = 0; i < 2000; ++i) {
    const double t = std::exp(ln_t(engine));
    const PartitionValue exact = source.at(t);
    EXPECT_NEAR(table.at(std::log(t)).ln_q, exact.ln_q, 2.0 * kTabulatedPartitionError);
    EXPECT_NEAR(table.at(std::log(t)).dlnq_dlnt, exact.dlnq_dt * t, 3e-7);
  }
  EXPECT_THROW(TabulatedPartition(source, 0.5, 100.0), DomainError);
  EXPECT_THROW(TabulatedPartition(source, 5.0, 4000.0), DomainError);
  EXPECT_THROW(TabulatedPartition(source, 5.0, 5.0), DomainError);
}

}  // namespace
}  // namespace trotline
