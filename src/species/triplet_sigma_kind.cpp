#include <array>

#include <trotline/rotor/triplet_sigma.hpp>

#include "rotor_constants.hpp"

namespace trotline {
namespace {

using T = TripletSigmaConstants;

constexpr std::array<ConstantKey<T>, 6> kOptional = {{
    {"D", &T::d_hz},
    {"H", &T::h_hz},
    {"lambda_D", &T::lambda_d_hz},
    {"lambda_H", &T::lambda_h_hz},
    {"gamma", &T::gamma_hz},
    {"gamma_D", &T::gamma_d_hz},
}};

T read_triplet_constants(const FileMap& file, Species& species) {
  const FileMap map = file.map("constants");
  T constants;
  constants.b_hz = map.quantity("B", Dimension::frequency);
  constants.lambda_hz = map.quantity("lambda", Dimension::frequency);
  read_constants(map, std::span<const ConstantKey<T>>(kOptional), constants);
  cite(map, "rotational and fine-structure constants", species);
  map.finish();
  return constants;
}

}  // namespace

void read_triplet_sigma(const FileMap& file, Species& species) {
  const T constants = read_triplet_constants(file, species);
  const double mu_c_m = read_axial_dipole(file, species);
  const auto spin = read_spin(file, species);
  auto modes = read_vibration(file, species);
  const Validity validity = read_validity(file);
  const auto make = [&] {
    return triplet_sigma_model(constants, mu_c_m, *spin, options_for(validity, constants.b_hz));
  };
  take_model(made_from(file, "constants", make), validity, std::move(modes), species);
}

}  // namespace trotline
