#include <trotline/species/line_list_intensity.hpp>

#include <gtest/gtest.h>

#include <cmath>
#include <numbers>

#include <trotline/base/errors.hpp>
#include <trotline/physics/constants.hpp>

namespace trotline {
namespace {

ListedIntensity co_1_0() {
  // JPL entry 28001 (Pickett et al. 1998), row 115271.2018 MHz: log10 I = -5.0105, E_l = 0, g_u = 3; its
  // directory has log10 Q(300 K) = 2.0369.
  return {std::pow(10.0, -5.0105), 115271.2018e6, 0.0, 3.0, std::pow(10.0, 2.0369), 300.0};
}

TEST(ListedIntensity, AgreesWithTheTradesRoundedFactor) {
  // A = I nu^2 Q / g / (e^-El - e^-Eu) * 2.7964e-16 (documentation of the line lists); the factor is good to
  // half of its last digit.
  const ListedIntensity co = co_1_0();
  const double upper = std::exp(-constants::kKelvinPerHz * co.frequency_hz / 300.0);
  const double nu_mhz = co.frequency_hz * 1e-6;
  const double rounded =
      co.intensity_nm2_mhz * nu_mhz * nu_mhz * co.partition / 3.0 / (1.0 - upper) * 2.7964e-16;
  EXPECT_NEAR(einstein_a_from_intensity_per_s(co) / rounded, 1.0, 0.5 / 27964.0);
}

TEST(ListedIntensity, GivesThePublishedAOfCo) {
  // CDMS entry 28503: log10 A(1-0) = -7.1425. Three logarithms of four digits went in.
  EXPECT_NEAR(std::log10(einstein_a_from_intensity_per_s(co_1_0())), -7.1425, 3 * 0.00005);
}

TEST(ListedIntensity, UndoesTheDefinitionOfTheIntensity) {
  // I = c^2/(8 pi nu^2) A g_u/Q (exp(-E_l/kT) - exp(-E_u/kT)), here with numbers of our own, in long double.
  const long double nu = 5e11L;
  const long double a = 3.25e-3L;
  const long double el = 45.0L / 300.0L;
  const long double eu = el + static_cast<long double>(constants::kKelvinPerHz) * nu / 300.0L;
  const long double c = constants::kLightMPerS;
  const long double i = c * c / (8.0L * std::numbers::pi_v<long double> * nu * nu) * a * 27.0L / 812.0L *
                        (std::exp(-el) - std::exp(-eu)) / 1e-12L;
  const ListedIntensity listed = {static_cast<double>(i), 5e11, 45.0, 27.0, 812.0, 300.0};
  EXPECT_NEAR(einstein_a_from_intensity_per_s(listed) / static_cast<double>(a), 1.0, 1e-13);
}

TEST(ListedIntensity, DoesNotDependOnTheConventionOfSpins) {
  ListedIntensity listed = co_1_0();
  const double a = einstein_a_from_intensity_per_s(listed);
  listed.upper_degeneracy *= 6.0;
  listed.partition *= 6.0;
  EXPECT_DOUBLE_EQ(einstein_a_from_intensity_per_s(listed), a);
}

TEST(ListedIntensity, SaysWhichArgumentIsWrong) {
  const auto message_with = [](auto change) {
    ListedIntensity listed = co_1_0();
    change(listed);
    try {
      (void)einstein_a_from_intensity_per_s(listed);
    } catch (const DomainError& error) {
      return std::string(error.what());
    }
    return std::string("accepted");
  };
  EXPECT_NE(message_with([](auto& l) { l.partition = 0.0; }).find("partition"), std::string::npos);
  EXPECT_NE(message_with([](auto& l) { l.frequency_hz = -1.0; }).find("frequency_hz"), std::string::npos);
  EXPECT_NE(message_with([](auto& l) { l.upper_degeneracy = NAN; }).find("upper_degeneracy"),
            std::string::npos);
  EXPECT_NE(message_with([](auto& l) { l.intensity_nm2_mhz = -1.0; }).find("intensity"), std::string::npos);
  EXPECT_NE(message_with([](auto& l) { l.lower_energy_k = INFINITY; }).find("lower_energy_k"),
            std::string::npos);
}

}  // namespace
}  // namespace trotline
