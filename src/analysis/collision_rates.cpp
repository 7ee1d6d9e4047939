#include "collision_rates.hpp"

#include <fmt/format.h>
#include <yaml-cpp/yaml.h>

#include <algorithm>
#include <cmath>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/base/text.hpp>
#include <trotline/physics/quantity.hpp>

namespace trotline {
namespace {

Place place_of(const std::string& name, const YAML::Node& node) {
  const YAML::Mark mark = node.Mark();
  if (mark.is_null()) return {name};
  return {name, static_cast<std::size_t>(mark.line) + 1, static_cast<std::size_t>(mark.column) + 1};
}

YAML::Node load(const std::string& text, const std::string& name) {
  try {
    return YAML::Load(text);
  } catch (const YAML::Exception& error) {
    const Place place{name, static_cast<std::size_t>(error.mark.line) + 1};
    throw InputError(place, {"is no valid YAML: " + error.msg, "a file of collision rates"});
  }
}

void require_known_keys(const YAML::Node& root, const std::string& name) {
  const std::vector<std::string> keys = {"species", "partner", "from", "temperatures", "rate_unit", "rates"};
  for (const auto& entry : root) {
    const std::string key = entry.first.IsScalar() ? entry.first.Scalar() : "";
    if (std::find(keys.begin(), keys.end(), key) == keys.end()) {
      throw InputError(place_of(name, entry.first),
                       {fmt::format("'{}' is no key of a file of collision rates", printable(key)),
                        "one of: " + listed(keys, keys.size()), did_you_mean(key, keys)});
    }
  }
}

std::string scalar(const YAML::Node& root, const std::string& key, const std::string& name) {
  const YAML::Node node = root[key];
  if (!node || !node.IsScalar() || node.Scalar().empty()) {
    throw InputError(node ? place_of(name, node) : Place{name},
                     {fmt::format("'{}' is missing or no text", key), fmt::format("'{}: ...'", key)});
  }
  return node.Scalar();
}

const YAML::Node list(const YAML::Node& parent, const std::string& key, const std::string& name) {
  const YAML::Node node = parent[key];
  if (!node || !node.IsSequence() || node.size() == 0) {
    throw InputError(place_of(name, node ? node : parent),
                     {fmt::format("'{}' is missing or no list", key), fmt::format("'{}: [...]'", key)});
  }
  return node;
}

double number(const YAML::Node& node, const std::string& name) {
  const std::string text = node.IsScalar() ? node.Scalar() : "";
  const std::optional<double> value = parse_number(text);
  if (!value || !std::isfinite(*value) || !(*value > 0.0)) {
    throw InputError(place_of(name, node),
                     {fmt::format("'{}' is no rate", printable(text)), "a number above zero"});
  }
  return *value;
}

std::vector<double> temperatures(const YAML::Node& root, const std::string& name) {
  std::vector<double> values;
  for (const auto& node : list(root, "temperatures", name)) {
    try {
      values.push_back(parse_quantity(node.IsScalar() ? node.Scalar() : "", Dimension::temperature));
    } catch (const InputError& error) {
      throw InputError(place_of(name, node), error.complaint());
    }
    const bool rises = values.size() == 1 || values.back() > values[values.size() - 2];
    if (!(values.back() > 0.0) || !rises) {
      throw InputError(place_of(name, node),
                       {"the temperatures do not rise from above zero", "as [10 K, 20 K, 50 K]"});
    }
  }
  return values;
}

/// cm^3/s per unit of the file.
double rate_scale(const YAML::Node& root, const std::string& name) {
  const std::string unit = scalar(root, "rate_unit", name);
  if (unit == "cm3/s" || unit == "cm3 s-1") return 1.0;
  if (unit == "m3/s" || unit == "m3 s-1") return 1e6;
  throw InputError(
      place_of(name, root["rate_unit"]),
      {fmt::format("'{}' is no unit of a rate coefficient", printable(unit)), "'cm3/s' or 'm3/s'"});
}

std::size_t level_of(const YAML::Node& entry, const char* key, const Species& species,
                     const std::string& name) {
  const std::string label = normalised_label(scalar(entry, key, name));
  std::vector<std::string> labels;
  for (std::size_t i = 0; i < species.levels.size(); ++i) {
    if (normalised_label(species.levels[i].label) == label) return i;
    if (labels.size() < 500) labels.push_back(species.levels[i].label);
  }
  throw InputError(place_of(name, entry[key]),
                   {fmt::format("{} has no level '{}'", species.name, printable(label)),
                    fmt::format("a label such as '{}'", labels.front()), did_you_mean(label, labels)});
}

CollisionRates::Rate rate_of(const YAML::Node& entry, const Species& species, std::size_t count, double scale,
                             const std::string& name) {
  if (!entry.IsMap()) {
    throw InputError(place_of(name, entry), {"is no rate", "{upper: LABEL, lower: LABEL, values: [...]}"});
  }
  CollisionRates::Rate rate;
  rate.upper = level_of(entry, "upper", species, name);
  rate.lower = level_of(entry, "lower", species, name);
  if (!(species.levels[rate.upper].energy_k > species.levels[rate.lower].energy_k)) {
    throw InputError(place_of(name, entry),
                     {"the upper level does not lie above the lower one", "a downward rate"});
  }
  for (const auto& node : list(entry, "values", name)) rate.cm3_per_s.push_back(scale * number(node, name));
  if (rate.cm3_per_s.size() != count) {
    throw InputError(place_of(name, entry), {fmt::format("holds {} rates", rate.cm3_per_s.size()),
                                             fmt::format("{}, one for each temperature", count)});
  }
  return rate;
}

bool is_same_species(const std::string& text, const Species& species) {
  const std::string word = lower_case(trimmed(text));
  return word == lower_case(species.name) || word == lower_case(species.formula);
}

double interpolated(const std::vector<double>& temperature_k, const std::vector<double>& values, double t) {
  if (values.size() == 1) return values.front();
  const auto above = std::lower_bound(temperature_k.begin(), temperature_k.end(), t);
  const auto i = static_cast<std::size_t>(std::max<std::ptrdiff_t>(1, above - temperature_k.begin()));
  const double share = std::log(t / temperature_k[i - 1]) / std::log(temperature_k[i] / temperature_k[i - 1]);
  return std::exp((1.0 - share) * std::log(values[i - 1]) + share * std::log(values[i]));
}

}  // namespace

CollisionRates parse_collision_rates(const std::string& text, const std::string& name,
                                     const Species& species) {
  const YAML::Node root = load(text, name);
  if (!root.IsMap()) throw InputError(Place{name, 1}, {"holds no mapping", "a file of collision rates"});
  require_known_keys(root, name);
  if (const std::string of = scalar(root, "species", name); !is_same_species(of, species)) {
    throw InputError(place_of(name, root["species"]), {fmt::format("these are rates of {}", printable(of)),
                                                       fmt::format("rates of {}", species.name)});
  }
  CollisionRates collisions;
  collisions.file = name;
  collisions.partner = scalar(root, "partner", name);
  collisions.from = scalar(root, "from", name);
  collisions.temperature_k = temperatures(root, name);
  const double scale = rate_scale(root, name);
  for (const auto& entry : list(root, "rates", name)) {
    const CollisionRates::Rate rate = rate_of(entry, species, collisions.temperature_k.size(), scale, name);
    const bool twice =
        std::any_of(collisions.rates.begin(), collisions.rates.end(), [&](const CollisionRates::Rate& other) {
          return other.upper == rate.upper && other.lower == rate.lower;
        });
    if (twice)
      throw InputError(place_of(name, entry),
                       {"the rates of this pair of levels stand here again", "each pair once"});
    collisions.rates.push_back(rate);
  }
  return collisions;
}

CollisionRates read_collision_rates(const std::string& path, const Species& species) {
  constexpr std::size_t kMostBytes = 16 << 20;
  return parse_collision_rates(read_file(path, kMostBytes), path, species);
}

std::optional<double> critical_density_per_cm3(const CollisionRates& collisions, const Transition& transition,
                                               double temperature_k) {
  const auto& grid = collisions.temperature_k;
  if (grid.size() > 1 && (temperature_k < grid.front() || temperature_k > grid.back())) return std::nullopt;
  double sum = 0.0;
  for (const CollisionRates::Rate& rate : collisions.rates) {
    if (rate.upper == transition.upper) sum += interpolated(grid, rate.cm3_per_s, temperature_k);
  }
  if (!(sum > 0.0)) return std::nullopt;
  return transition.einstein_a_per_s / sum;
}

}  // namespace trotline
