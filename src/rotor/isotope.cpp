#include <fmt/format.h>

#include <algorithm>
#include <array>

#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/physics/constants.hpp>
#include <trotline/rotor/isotope.hpp>

namespace trotline {
namespace {

struct Isotope {
  std::string_view name;
  double mass_u;
};

constexpr std::array<Isotope, 33> kIsotopes = {{
    {"1H", 1.007825031898},   {"2H", 2.014101777844},   {"4He", 4.002603254130}, {"12C", 12.0},
    {"13C", 13.00335483534},  {"14N", 14.00307400425},  {"15N", 15.00010889827}, {"16O", 15.99491461926},
    {"17O", 16.99913175595},  {"18O", 17.99915961214},  {"19F", 18.99840316207}, {"23Na", 22.98976928195},
    {"24Mg", 23.985041689},   {"25Mg", 24.985836966},   {"26Mg", 25.982592972},  {"27Al", 26.981538408},
    {"28Si", 27.97692653442}, {"29Si", 28.97649466434}, {"30Si", 29.973770137},  {"31P", 30.97376199768},
    {"32S", 31.97207117354},  {"33S", 32.97145890862},  {"34S", 33.967867011},   {"36S", 35.967080692},
    {"35Cl", 34.968852694},   {"37Cl", 36.965902573},   {"36Ar", 35.967545105},  {"40Ar", 39.96238312204},
    {"39K", 38.96370648482},  {"41K", 40.96182525611},  {"79Br", 78.918337574},  {"81Br", 80.916288197},
    {"127I", 126.904472592},
}};

std::string_view full_name(std::string_view isotope) {
  if (isotope == "H") return "1H";
  if (isotope == "D") return "2H";
  return isotope;
}

std::string_view element_of(std::string_view isotope) {
  const std::size_t symbol = isotope.find_first_not_of("0123456789");
  return symbol == std::string_view::npos ? std::string_view{} : isotope.substr(symbol);
}

[[noreturn]] void refuse(std::string_view isotope) {
  std::vector<std::string> of_element;
  for (const Isotope& known : kIsotopes) {
    if (element_of(known.name) == element_of(isotope)) of_element.emplace_back(known.name);
  }
  const std::string found = fmt::format("isotope '{}' is not in the table of masses", printable(isotope));
  if (!of_element.empty()) throw InputError({found, "one of " + listed(of_element)});
  throw InputError({found, "mass number and symbol, such as '13C'", did_you_mean(isotope, known_isotopes())});
}

}  // namespace

double isotope_mass_u(std::string_view isotope) {
  const std::string_view name = full_name(isotope);
  const auto found = std::find_if(kIsotopes.begin(), kIsotopes.end(),
                                  [&](const Isotope& known) { return known.name == name; });
  if (found == kIsotopes.end()) refuse(isotope);
  return found->mass_u;
}

double isotope_mass_kg(std::string_view isotope) {
  return isotope_mass_u(isotope) * constants::kAtomicMassKg;
}

std::vector<std::string> known_isotopes() {
  std::vector<std::string> names;
  for (const Isotope& known : kIsotopes) names.emplace_back(known.name);
  return names;
}

}  // namespace trotline
