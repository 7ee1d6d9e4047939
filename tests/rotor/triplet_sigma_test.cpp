#include <Eigen/Eigenvalues>

#include <map>

#include <trotline/base/errors.hpp>
#include <trotline/rotor/triplet_sigma.hpp>

namespace trotline {
namespace {

/// 32S16O, v = 0 (as in Klaus et al. 1996, J. Mol. Spectrosc. 180, 197; from memory, checked below).
TripletSigmaConstants sulphur_monoxide() {
  return {.b_hz = 21523.5561e6,
          .d_hz = 33.9153e3,
          .h_hz = 0.0,
          .lambda_hz = 158254.392e6,
          .lambda_d_hz = 0.30626e6,
          .lambda_h_hz = 0.0,
          .gamma_hz = -168.3043e6,
          .gamma_d_hz = -0.525e3};
}

std::map<std::string, const RotorTransition*> by_label(const RotorModel& model) {
  std::map<std::string, const RotorTransition*> found;
  for (const RotorTransition& line : model.transitions) {
    found[label_of(model.levels[line.upper].quanta) + "-" + label_of(model.levels[line.lower].quanta)] =
        &line;
  }
  return found;
}

RotorModel model_of(const TripletSigmaConstants& c, int highest_j, double least = 0.0) {
  return triplet_sigma_model(c, 1.0, *make_spin_rule({}),
                             {.highest_j = highest_j, .least_line_strength = least});
}

TEST(TripletSigma, FrequenciesOfSulphurMonoxideAgreeWithMeasuredOnes) {
  // Rest frequencies [MHz] in use at telescopes, from memory. Labels are N(J).
  const std::pair<const char*, double> measured[] = {
      {"0(1)-1(0)", 30001.58},  {"2(3)-1(2)", 99299.87},  {"2(2)-1(1)", 86093.95},  {"3(2)-2(1)", 109252.22},
      {"3(4)-2(3)", 138178.60}, {"4(3)-3(2)", 158971.81}, {"3(3)-2(2)", 129138.92}, {"4(4)-3(3)", 172181.40},
      {"4(5)-3(4)", 178605.40}, {"5(4)-4(3)", 206176.01}, {"5(5)-4(4)", 215220.65}, {"5(6)-4(5)", 219949.44},
      {"6(5)-5(4)", 251825.77}, {"6(6)-5(5)", 258255.83}, {"6(7)-5(6)", 261843.72}};
  const RotorModel model = model_of(sulphur_monoxide(), 8);
  const auto lines = by_label(model);
  for (const auto& [label, frequency_mhz] : measured) {
    ASSERT_TRUE(lines.contains(label)) << label;
    EXPECT_NEAR(lines.at(label)->frequency_hz / 1e6, frequency_mhz, 0.2) << label;
  }
}

TEST(TripletSigma, FineStructureOfOxygenAgreesWithThe60GHzBand) {
  // O2, N = 1 (from memory: Tretyakov et al. 2005, J. Mol. Spectrosc. 231, 1): the lines 1- at 118750.3 MHz
  // and 1+ at 56264.8 MHz join J = 0 and J = 2 to J = 1; 3+ 58446.6 and 3- 62486.3 join J = 4 and 2 to 3 of N
  // = 3.
  const TripletSigmaConstants oxygen{.b_hz = 43100.4425e6,
                                     .d_hz = 0.145123e6,
                                     .h_hz = 0.0,
                                     .lambda_hz = 59501.3435e6,
                                     .lambda_d_hz = 58.3680e-3 * 1e6,
                                     .lambda_h_hz = 0.29e0,
                                     .gamma_hz = -252.58634e6,
                                     .gamma_d_hz = -0.24344e3};
  const TripletSigmaJ j0 = triplet_sigma_levels(oxygen, 0);
  const TripletSigmaJ j1 = triplet_sigma_levels(oxygen, 1);
  const TripletSigmaJ j2 = triplet_sigma_levels(oxygen, 2);
  const TripletSigmaJ j3 = triplet_sigma_levels(oxygen, 3);
  const TripletSigmaJ j4 = triplet_sigma_levels(oxygen, 4);
  EXPECT_NEAR((j1.middle_hz - j0.upper_hz) / 1e6, 118750.3, 1.0);
  EXPECT_NEAR((j1.middle_hz - j2.lower_hz) / 1e6, 56264.8, 1.0);
  EXPECT_NEAR((j3.middle_hz - j4.lower_hz) / 1e6, 58446.6, 1.0);
  EXPECT_NEAR((j3.middle_hz - j2.upper_hz) / 1e6, 62486.3, 1.0);
}

TEST(TripletSigma, WithoutCouplingItIsALinearRotorThreefold) {
  const TripletSigmaConstants c{.b_hz = 20e9, .d_hz = 30e3, .h_hz = 0.01};
  for (int j = 1; j <= 20; ++j) {
    const auto energy = [&](int n) {
      const double x = n * (n + 1.0);
      return c.b_hz * x - c.d_hz * x * x + c.h_hz * x * x * x;
    };
    const TripletSigmaJ levels = triplet_sigma_levels(c, j);
    EXPECT_NEAR(levels.lower_hz, energy(j - 1), 1e-12 * energy(j + 1));
    EXPECT_NEAR(levels.middle_hz, energy(j), 1e-12 * energy(j + 1));
    EXPECT_NEAR(levels.upper_hz, energy(j + 1), 1e-12 * energy(j + 1));
  }
}

/// The same Hamiltonian in the other limit, Hund's case (b), where N^2 and N.S are diagonal and spin-spin
/// coupling is not (Tinkham & Strandberg 1955, Phys. Rev. 97, 937; Gordy & Cook, ch. IV).
TEST(TripletSigma, LevelsAgreeWithHundsCaseB) {
  const TripletSigmaConstants c{.b_hz = 21e9, .lambda_hz = 158e9, .gamma_hz = -170e6};
  for (int j = 1; j <= 12; ++j) {
    const double jd = j;
    // <3 Sz^2 - S^2> in case (b): -2(N+1)/(2N-1) ... in terms of J for N = J-1 and J+1, and what joins the
    // two.
    const double l_low = 2.0 / 3.0 - 2.0 * jd / (2.0 * jd + 1.0);
    const double l_up = 2.0 / 3.0 - 2.0 * (jd + 1.0) / (2.0 * jd + 1.0);
    const double l_off = 2.0 * std::sqrt(jd * (jd + 1.0)) / (2.0 * jd + 1.0);
    Eigen::Matrix2d h;
    h(0, 0) = c.b_hz * jd * (jd - 1.0) + c.lambda_hz * l_low + c.gamma_hz * (jd - 1.0);
    h(1, 1) = c.b_hz * (jd + 1.0) * (jd + 2.0) + c.lambda_hz * l_up - c.gamma_hz * (jd + 2.0);
    h(0, 1) = h(1, 0) = c.lambda_hz * l_off;
    const Eigen::Vector2d expected = Eigen::SelfAdjointEigenSolver<Eigen::Matrix2d>(h).eigenvalues();
    const TripletSigmaJ levels = triplet_sigma_levels(c, j);
    EXPECT_NEAR(levels.lower_hz, expected[0], 1e-13 * h.norm());
    EXPECT_NEAR(levels.upper_hz, expected[1], 1e-13 * h.norm());
  }
}

TEST(TripletSigma, LineStrengthsOfEveryLevelAddUpTo2JPlus1) {
  const RotorModel model = model_of(sulphur_monoxide(), 25);
  std::vector<double> sums(model.levels.size(), 0.0);
  for (const RotorTransition& line : model.transitions) {
    sums[line.upper] += line.line_strength_mu2_c2m2;
    sums[line.lower] += line.line_strength_mu2_c2m2;
  }
  for (std::size_t i = 0; i < sums.size(); ++i) {
    const int j = model.levels[i].quanta.j;
    if (j < 25) {
      EXPECT_NEAR(sums[i], 2.0 * j + 1.0, 1e-10) << label_of(model.levels[i].quanta);
    }
  }
}

TEST(TripletSigma, LinesChangeNByAnOddNumber) {
  const RotorModel model = model_of(sulphur_monoxide(), 15);
  for (const RotorTransition& line : model.transitions) {
    const int delta_n = model.levels[line.upper].quanta.n - model.levels[line.lower].quanta.n;
    EXPECT_EQ(std::abs(delta_n) % 2, 1);
  }
}

TEST(TripletSigma, StrongLinesOfSulphurMonoxideApproachTheLinearRotorAtHighN) {
  // S of N(J)-N-1(J-1) tends to N = J - 1, J, J + 1 as spin uncouples, with a relative difference of order
  // 1/N^2.
  const RotorModel model = model_of(sulphur_monoxide(), 41, 1.0);
  const auto lines = by_label(model);
  EXPECT_NEAR(lines.at("40(40)-39(39)")->line_strength_mu2_c2m2, (1600.0 - 1.0) / 40.0, 1e-12);
  EXPECT_NEAR(lines.at("40(41)-39(40)")->line_strength_mu2_c2m2, 41.0, 41.0 * 2.0 / 40.0);
}

TEST(TripletSigma, EveryJHasItsThreeLevelsOnce) {
  const RotorModel model = model_of(sulphur_monoxide(), 10);
  std::map<std::string, int> count;
  for (const RotorLevel& level : model.levels) ++count[label_of(level.quanta)];
  EXPECT_EQ(model.levels.size(), 1U + 3U * 10U);
  for (const auto& [label, times] : count) EXPECT_EQ(times, 1) << label;
  EXPECT_EQ(label_of(model.levels.front().quanta), "1(0)");  // the lowest level of SO
}

TEST(TripletSigma, ASeriesThatTurnsOverIsCutAndBadConstantsAreRefused) {
  const RotorModel model = model_of({.b_hz = 1e9, .d_hz = 1e7, .lambda_hz = 1e7}, 30);
  EXPECT_THAT(model.warnings.at(0), testing::HasSubstr("stops rising"));
  for (const RotorLevel& level : model.levels) EXPECT_LE(level.quanta.n, 7);
  EXPECT_THROW(require_valid(TripletSigmaConstants{.b_hz = -1.0}), DomainError);
  EXPECT_THROW(require_valid(TripletSigmaConstants{.b_hz = 1e9, .d_hz = 1e10}), DomainError);
  EXPECT_THROW(require_valid(TripletSigmaConstants{.b_hz = 1e9, .lambda_hz = std::nan("")}), DomainError);
  EXPECT_THROW((void)triplet_sigma_model(sulphur_monoxide(), std::nan(""), *make_spin_rule({}), {}),
               DomainError);
}

}  // namespace
}  // namespace trotline
