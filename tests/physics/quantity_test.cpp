#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>
#include <limits>
#include <numbers>
#include <string>
#include <thread>
#include <vector>

#include <trotline/base/errors.hpp>
#include <trotline/physics/constants.hpp>
#include <trotline/physics/quantity.hpp>

namespace trotline {
namespace {

constexpr double kArcsecRad = std::numbers::pi / 648000.0;

constexpr Dimension kAll[] = {Dimension::frequency,
                              Dimension::velocity,
                              Dimension::angle,
                              Dimension::temperature,
                              Dimension::integrated_intensity,
                              Dimension::flux_times_velocity,
                              Dimension::column_density,
                              Dimension::number_density,
                              Dimension::wavenumber,
                              Dimension::length,
                              Dimension::mass,
                              Dimension::dipole_moment,
                              Dimension::time,
                              Dimension::dimensionless};

std::string message_of(std::string_view text, Dimension dimension) {
  try {
    const double value = parse_quantity(text, dimension);
    return "read as " + std::to_string(value);
  } catch (const InputError& error) {
    return error.what();
  }
}

TEST(Quantity, UsualSpellingsAreRead) {
  EXPECT_DOUBLE_EQ(parse_quantity("230.538 GHz", Dimension::frequency), 230.538e9);
  EXPECT_DOUBLE_EQ(parse_quantity("230538 MHz", Dimension::frequency), 230.538e9);
  EXPECT_DOUBLE_EQ(parse_quantity("230538MHz", Dimension::frequency), 230.538e9);
  EXPECT_DOUBLE_EQ(parse_quantity(" 1e3 Hz ", Dimension::frequency), 1e3);
  EXPECT_DOUBLE_EQ(parse_quantity("27.4 arcsec", Dimension::angle), 27.4 * kArcsecRad);
  EXPECT_DOUBLE_EQ(parse_quantity("1 deg", Dimension::angle), std::numbers::pi / 180.0);
  EXPECT_DOUBLE_EQ(parse_quantity("1.2 K km/s", Dimension::integrated_intensity), 1200.0);
  EXPECT_DOUBLE_EQ(parse_quantity("1.2 K km s-1", Dimension::integrated_intensity), 1200.0);
  EXPECT_DOUBLE_EQ(parse_quantity("400 mJy/beam km/s", Dimension::flux_times_velocity), 400.0);
  EXPECT_DOUBLE_EQ(parse_quantity("-5.5 km/s", Dimension::velocity), -5500.0);
  EXPECT_DOUBLE_EQ(parse_quantity("1e14 cm-2", Dimension::column_density), 1e18);
  EXPECT_DOUBLE_EQ(parse_quantity("1e5 cm-3", Dimension::number_density), 1e11);
  EXPECT_DOUBLE_EQ(parse_quantity("3.845 cm-1", Dimension::wavenumber), 384.5);
  EXPECT_DOUBLE_EQ(parse_quantity("1.128 Angstrom", Dimension::length), 1.128e-10);
  EXPECT_DOUBLE_EQ(parse_quantity("12 u", Dimension::mass), 12.0 * constants::kAtomicMassKg);
  // One debye is 3.33564e-30 C m (CODATA 2018: 1e-21 / c).
  EXPECT_NEAR(parse_quantity("0.11 D", Dimension::dipole_moment), 0.11 * 3.33564e-30, 0.11 * 0.000005e-30);
  EXPECT_DOUBLE_EQ(parse_quantity("10 min", Dimension::time), 600.0);
  EXPECT_DOUBLE_EQ(parse_quantity("10 %", Dimension::dimensionless), 0.1);
  EXPECT_DOUBLE_EQ(parse_quantity("10%", Dimension::dimensionless), 0.1);
  EXPECT_DOUBLE_EQ(parse_quantity("0.1", Dimension::dimensionless), 0.1);
}

TEST(Quantity, EveryExampleIsAQuantityOfItsDimensionAndOfNoOther) {
  for (const Dimension dimension : kAll) {
    if (dimension == Dimension::dimensionless) continue;
    const std::string example(example_of(dimension));
    EXPECT_TRUE(std::isfinite(parse_quantity(example, dimension))) << example;
    for (const Dimension other : kAll) {
      if (other == dimension) continue;
      EXPECT_THROW((void)parse_quantity(example, other), InputError) << example << " as " << name_of(other);
    }
  }
}

TEST(Quantity, DecimalPrefixesAreExact) {
  EXPECT_EQ(unit_scale("GHz", Dimension::frequency), 1e9);
  EXPECT_EQ(unit_scale("MHz", Dimension::frequency), 1e6);
  EXPECT_EQ(unit_scale("K km/s", Dimension::integrated_intensity), 1e3);
  EXPECT_EQ(unit_scale("mK km/s", Dimension::integrated_intensity), 1.0);
  EXPECT_EQ(unit_scale("Jy/beam km/s", Dimension::flux_times_velocity), 1e3);
  EXPECT_EQ(unit_scale("Jy km / (beam s)", Dimension::flux_times_velocity), 1e3);
  EXPECT_EQ(unit_scale("cm-2", Dimension::column_density), 1e4);
}

TEST(Quantity, TrapSpellingsAreRefusedAndNotGuessed) {
  // Each of these could be read as something plausible and wrong.
  const std::vector<std::pair<std::string, Dimension>> traps = {
      {"230.538", Dimension::frequency},      // no unit
      {"230,538 GHz", Dimension::frequency},  // decimal comma
      {"230.538 ghz/s", Dimension::frequency},
      {"230 538 MHz", Dimension::frequency},  // separator of thousands
      {"1.3 mm", Dimension::frequency},       // a wavelength
      {"5 K", Dimension::frequency},
      {"3.8 cm-1", Dimension::frequency},
      {"12 mas/s", Dimension::angle},
      {"12 s", Dimension::angle},  // seconds of time
      {"12 km", Dimension::velocity},
      {"12 kms", Dimension::velocity},
      {"12 km/h/s", Dimension::velocity},
      {"1.2 K", Dimension::integrated_intensity},
      {"1.2 K/km/s", Dimension::integrated_intensity},
      {"1.2 Jy km/s", Dimension::flux_times_velocity},  // the beam is missing
      {"1e14 cm2", Dimension::column_density},
      {"1e14 cm-3", Dimension::column_density},
      {"20 degC", Dimension::temperature},
      {"20 C", Dimension::temperature},
      {"1e5 km/s K Hz", Dimension::integrated_intensity},
      {"nan GHz", Dimension::frequency},
      {"inf GHz", Dimension::frequency},
      {"1e999 GHz", Dimension::frequency},
      {"1e300 GHz", Dimension::frequency},  // overflows once it is in Hz
      {"GHz", Dimension::frequency},
      {"", Dimension::frequency},
      {"5 log(Hz)", Dimension::frequency},
      {"5 Hz**2", Dimension::frequency},
      {"5 5 Hz", Dimension::frequency},
      {"10 %", Dimension::frequency},
      {"5 " + std::string(500, 'k') + "Hz", Dimension::frequency},
      {std::string("5 G\0Hz", 6), Dimension::frequency},
      {"5 GHz\n6 GHz", Dimension::frequency},
  };
  for (const auto& [text, dimension] : traps) {
    EXPECT_THAT(message_of(text, dimension), testing::HasSubstr("; expected ")) << text;
  }
}

TEST(Quantity, UpperAndLowerCaseOfAPrefixAreNotConfused) {
  // mHz and MHz differ by 1e9: milli is not mega.
  EXPECT_EQ(unit_scale("mHz", Dimension::frequency), 1e-3);
  EXPECT_EQ(unit_scale("MHz", Dimension::frequency), 1e6);
  EXPECT_EQ(unit_scale("mK", Dimension::temperature), 1e-3);
  EXPECT_EQ(unit_scale("MK", Dimension::temperature), 1e6);
}

TEST(Quantity, MessagesShowAnExampleAndTheDimensionThatWasFound) {
  EXPECT_EQ(message_of("27.4", Dimension::angle),
            "'27.4' has no unit; expected an angle such as '27.4 arcsec'");
  EXPECT_EQ(message_of("27.4 km/s", Dimension::angle),
            "unit 'km/s' is a unit of a velocity; expected an angle such as '27.4 arcsec'");
  EXPECT_EQ(message_of("x arcsec", Dimension::angle),
            "'x arcsec' does not begin with a finite number; expected an angle such as '27.4 arcsec'");
  EXPECT_THAT(message_of("1 \x1B[2Jfoo", Dimension::angle), testing::Not(testing::HasSubstr("\x1B")));
}

TEST(Quantity, IsUnitOfNeverThrows) {
  EXPECT_TRUE(is_unit_of("km/s", Dimension::velocity));
  EXPECT_TRUE(is_unit_of("", Dimension::dimensionless));
  EXPECT_FALSE(is_unit_of("", Dimension::velocity));
  EXPECT_FALSE(is_unit_of("furlong/fortnight", Dimension::velocity));
  EXPECT_FALSE(is_unit_of("((((", Dimension::velocity));
  EXPECT_FALSE(is_unit_of("m/s)", Dimension::velocity));
}

TEST(Quantity, RangesTakeOneUnitOrTwo) {
  const auto range = parse_quantity_range("80..116 GHz", Dimension::frequency);
  EXPECT_DOUBLE_EQ(range.low, 80e9);
  EXPECT_DOUBLE_EQ(range.high, 116e9);
  EXPECT_DOUBLE_EQ(parse_quantity_range("800 MHz .. 1 GHz", Dimension::frequency).low, 8e8);
  EXPECT_DOUBLE_EQ(parse_quantity_range("-5..5 km/s", Dimension::velocity).low, -5000.0);
  for (const char* bad :
       {"80 GHz", "116..80 GHz", "80..80 GHz", "80..", "..116 GHz", "80..116", "80 GHz..116"}) {
    EXPECT_THROW((void)parse_quantity_range(bad, Dimension::frequency), InputError) << bad;
  }
}

TEST(Quantity, UnitsAreReadByManyThreadsAtOnce) {
  std::vector<std::thread> threads;
  for (int i = 0; i < 4; ++i) {
    threads.emplace_back([] {
      for (int k = 0; k < 500; ++k) {
        EXPECT_EQ(unit_scale("K km s-1", Dimension::integrated_intensity), 1e3);
        EXPECT_FALSE(is_unit_of("K km s-", Dimension::velocity));
      }
    });
  }
  for (std::thread& thread : threads) thread.join();
}

}  // namespace
}  // namespace trotline
