// Rotation diagrams from the literature, computed again from the tables that the papers print.

#include <gtest/gtest.h>

#include <boost/math/tools/roots.hpp>
#include <cmath>
#include <set>

#include <trotline/excitation/thin_line.hpp>
#include <trotline/inference/least_squares.hpp>
#include <trotline/inference/thermal_line.hpp>

#include "support/shared_folder.hpp"

namespace trotline {
namespace {

using testing_support::read_plain_csv;
using testing_support::reference_file;

double number(const std::map<std::string, std::string>& row, const std::string& column) {
  return std::stod(row.at(column));
}

/// The diagram of printed column densities per level: (E, ln(N/g)) with relative errors.
DiagramData printed_diagram(const std::vector<std::array<double, 3>>& energy_ln_sigma) {
  DiagramData data;
  const auto size = static_cast<Eigen::Index>(energy_ln_sigma.size());
  data.upper_energy_k.resize(size);
  data.ln_nu_over_gu.resize(size);
  data.frequency_hz = Eigen::VectorXd::Constant(size, 1e11);  // no background: frequencies do not count
  data.covariance.setZero(size, size);
  for (Eigen::Index i = 0; i < size; ++i) {
    const auto& [energy, ln, sigma] = energy_ln_sigma[static_cast<std::size_t>(i)];
    data.upper_energy_k[i] = energy;
    data.ln_nu_over_gu[i] = ln;
    data.covariance(i, i) = sigma * sigma;
  }
  return data;
}

// Beuther et al. 2010, A&A 512, A29, Table 3: 13CO v=1-0, lower levels of R(J); the paper gives 111 K for the
// component at -15 km/s, from an unweighted line. Columns are printed with two digits.
TEST(PublishedDiagram, CarbonMonoxide13TowardBnHas111K) {
  const auto path = reference_file("tables/carbon_monoxide_13_orion.csv");
  if (!std::filesystem::exists(path)) GTEST_SKIP() << "the table is not here";
  std::vector<std::array<double, 3>> points;
  for (const auto& row : read_plain_csv(path)) {
    if (row.at("component") != "BN_-15kms") continue;
    points.push_back({number(row, "E_lower_K"), std::log(number(row, "N_l_1e15") / number(row, "gJ")), 1.0});
  }
  ASSERT_EQ(points.size(), 7U);
  const auto fit = fit_thermal_line(printed_diagram(points));
  EXPECT_NEAR(1.0 / fit.inverse_temperature_per_k, 111.0, 0.5);
}

// Ao et al. 2011, A&A 529, A154, Table 1 (NH3 in NGC 1068): T_rot = 44 K from (1,1) and (2,2), 119 K from (2,2)
// and (4,4). Level energies 64.45 - 23.26 K and 200.53 - 64.45 K: from memory.
TEST(PublishedDiagram, AmmoniaOfNgc1068Has44And119K) {
  const auto path = reference_file("tables/ammonia_ngc1068.csv");
  if (!std::filesystem::exists(path)) GTEST_SKIP() << "the table is not here";
  const std::map<std::string, double> energy = {{"1", 23.26}, {"2", 64.45}, {"4", 200.53}};
  std::map<std::string, std::array<double, 3>> point;
  for (const auto& row : read_plain_csv(path)) {
    const std::string j = row.at("J");
    if (!energy.contains(j)) continue;
    const double n = number(row, "N_1e13cm-2");
    point[j] = {energy.at(j), std::log(n / (2 * std::stod(j) + 1)), number(row, "N_err") / n};
  }
  const auto cold = fit_thermal_line(printed_diagram({point["1"], point["2"]}));
  const auto warm = fit_thermal_line(printed_diagram({point["2"], point["4"]}));
  EXPECT_EQ(cold.dof, 0);
  const double t_cold = 1.0 / cold.inverse_temperature_per_k;
  const double t_warm = 1.0 / warm.inverse_temperature_per_k;
  // The printed columns carry three digits: N(2,2) +- 0.005 alone moves T by 0.2 K, N(4,4) by 0.6 K.
  EXPECT_NEAR(t_cold, 44.0, 1.0);
  EXPECT_NEAR(t_warm, 119.0, 1.0);
}

// A&A 500, 725 (2009), Table 5: integrated optical depths of two lines each toward PKS 1830-211 and the
// excitation temperatures in LTE that the paper derives. Rest frequencies from B (MHz), from memory:
// SiO 21711.98, C34S 24103.54, H13CO+ 43377.3, H13CN 43170.1, CS 24495.56.
TEST(PublishedDiagram, TwoLineExcitationTemperaturesOfPks1830) {
  const auto path = reference_file("tables/two_level_pks1830.csv");
  if (!std::filesystem::exists(path)) GTEST_SKIP() << "the table is not here";
  struct Rotor {
    double b_hz;
    int j_upper;
  };
  const std::map<std::string, Rotor> rotors = {{"SiO", {21711.98e6, 2}},    {"C34S", {24103.54e6, 4}},
                                               {"H13CO+", {43377.3e6, 2}}, {"H13CN", {43170.1e6, 2}},
                                               {"CS-NE", {24495.56e6, 4}}};
  const auto tau = [](double b_hz, int j, double t) {
    const double nu = 2.0 * b_hz * j;
    // A of a rigid rotor but for its dipole, which the ratio of two lines does not see
    const LineConstants line{nu, 0.0, 1.0, std::pow(nu / 1e11, 3) * j / (2.0 * j + 1.0)};
    const double energy_k = 4.799243073e-11 * b_hz * j * (j + 1);
    return central_optical_depth(line, (2 * j + 1) * std::exp(-energy_k / t), t, 1.0);
  };
  int tested = 0;
  for (const auto& row : read_plain_csv(path)) {
    if (!rotors.contains(row.at("species"))) continue;
    const Rotor rotor = rotors.at(row.at("species"));
    const auto ratio_at = [&](double t) { return tau(rotor.b_hz, rotor.j_upper, t) / tau(rotor.b_hz, 1, t); };
    // What the printed ratio and its error allow, against what the paper prints.
    const double measured = number(row, "ratio_up_over_low");
    const auto temperature = [&](double ratio) {
      std::uintmax_t steps = 100;
      const auto root = boost::math::tools::toms748_solve([&](double t) { return ratio_at(t) - ratio; }, 2.0, 1e5,
                                                          boost::math::tools::eps_tolerance<double>(30), steps);
      return root.first;
    };
    if (row.at("Tex_LTE_err").empty()) {
      EXPECT_NEAR(temperature(measured), number(row, "Tex_LTE_K"), 0.5) << row.at("species");  // digits printed
    } else {
      EXPECT_NEAR(temperature(measured), number(row, "Tex_LTE_K"), number(row, "Tex_LTE_err")) << row.at("species");
    }
    ++tested;
  }
  EXPECT_EQ(tested, 5);
}

}  // namespace
}  // namespace trotline
