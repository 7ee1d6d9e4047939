#include <fmt/format.h>

#include <array>

#include <trotline/base/text.hpp>
#include <trotline/rotor/asymmetric.hpp>

#include "rotor_constants.hpp"

namespace trotline {
namespace {

constexpr std::array<ConstantKey<AsymmetricConstants>, 3> kRigid = {{
    {"A", &AsymmetricConstants::a_hz},
    {"B", &AsymmetricConstants::b_hz},
    {"C", &AsymmetricConstants::c_hz},
}};

constexpr std::array<ConstantKey<AReduction>, 9> kOffDiagonalA = {{
    {"delta_J", &AReduction::delta_j_hz},
    {"delta_K", &AReduction::delta_k_hz},
    {"phi_J", &AReduction::h_j_hz},
    {"phi_JK", &AReduction::h_jk_hz},
    {"phi_K", &AReduction::h_k_hz},
    {"l_J", &AReduction::l_j_hz},
    {"l_JK", &AReduction::l_jk_hz},
    {"l_KJ", &AReduction::l_kj_hz},
    {"l_K", &AReduction::l_k_hz},
}};

constexpr std::array<ConstantKey<SReduction>, 9> kOffDiagonalS = {{
    {"d_1", &SReduction::d1_hz},
    {"d_2", &SReduction::d2_hz},
    {"h_1", &SReduction::h1_hz},
    {"h_2", &SReduction::h2_hz},
    {"h_3", &SReduction::h3_hz},
    {"l_1", &SReduction::l1_hz},
    {"l_2", &SReduction::l2_hz},
    {"l_3", &SReduction::l3_hz},
    {"l_4", &SReduction::l4_hz},
}};

Representation read_representation(const FileMap& map) {
  struct Name {
    const char* written;
    Representation representation;
  };
  constexpr std::array<Name, 4> kNames = {{{"I^r", Representation::i_r},
                                           {"I^l", Representation::i_l},
                                           {"III^r", Representation::iii_r},
                                           {"III^l", Representation::iii_l}}};
  const std::string written = map.optional_text("representation", "I^r");
  for (const Name& name : kNames) {
    if (written == name.written) return name.representation;
  }
  map.refuse("representation", {fmt::format("the representation is '{}'", printable(written)),
                                "one of I^r, I^l, III^r, III^l", "I^r is meant where nothing is said"});
}

void read_distortion(const FileMap& map, AsymmetricConstants& constants) {
  const std::string reduction = map.text("reduction");
  if (reduction == "A") {
    AReduction off_diagonal;
    read_constants(map, a_reduction_keys(), constants.diagonal);
    read_constants(map, std::span<const ConstantKey<AReduction>>(kOffDiagonalA), off_diagonal);
    constants.off_diagonal = off_diagonal;
  } else if (reduction == "S") {
    SReduction off_diagonal;
    read_constants(map, distortion_keys(), constants.diagonal);
    read_constants(map, std::span<const ConstantKey<SReduction>>(kOffDiagonalS), off_diagonal);
    constants.off_diagonal = off_diagonal;
  } else {
    map.refuse("reduction", {fmt::format("the reduction is '{}'", printable(reduction)), "A or S",
                             "Watson's two reductions have constants that do not mix"});
  }
}

AsymmetricConstants read_asymmetric_constants(const FileMap& file, Species& species) {
  const FileMap map = file.map("constants");
  AsymmetricConstants constants;
  for (const auto& [key, member] : kRigid) constants.*member = map.quantity(key, Dimension::frequency);
  constants.representation = read_representation(map);
  read_distortion(map, constants);
  cite(map, "rotational constants", species);
  map.finish();
  made_from(file, "constants", [&] {
    require_valid(constants);
    return 0;
  });
  return constants;
}

}  // namespace

void read_asymmetric(const FileMap& file, Species& species) {
  const AsymmetricConstants constants = read_asymmetric_constants(file, species);
  const DipoleMoment dipole = read_dipole_components(file, species);
  const auto spin = read_spin(file, species);
  auto modes = read_vibration(file, species);
  const Validity validity = read_validity(file);
  RotorOptions options = options_for(validity, constants.c_hz);
  options.least_line_strength = kFaintestLineStrength;
  take_model(
      made_from(file, "constants", [&] { return asymmetric_model(constants, dipole, *spin, options); }),
      validity, std::move(modes), species);
}

}  // namespace trotline
