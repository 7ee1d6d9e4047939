// Sources that obey LTE and sources that depart from it, for the rates at which the checks tell them apart.
#pragma once

#include <fmt/format.h>

#include <functional>
#include <map>
#include <string>
#include <vector>

#include "validation/analysis/statistical_equilibrium.hpp"

namespace trotline::departures {

struct Case {
  std::string name;
  std::string what;  ///< departure, or empty for true LTE
  std::string method;
  std::function<IntensityTable(const Species&)> noiseless;
  bool isomers = false;
  std::function<void(RunOptions&)> set = {};
};

struct Rates {
  int tables = 0;
  int answered = 0;                     ///< status done
  int caught = 0;                       ///< the verdict: one temperature does not describe the lines, or N is too low
  int cannot_tell = 0;                  ///< the verdict: these lines cannot tell
  std::map<std::string, int> by_check;  ///< how often each check failed
};

inline void give_errors(IntensityTable& table, double relative_error, double floor_share) {
  double most = 0.0;
  for (const IntensityRow& row : table.rows) most = std::max(most, row.intensity);
  for (IntensityRow& row : table.rows) {
    row.intensity_sigma = std::hypot(relative_error * row.intensity, floor_share * most);
  }
}

inline void share_calibration(IntensityTable& table, double error) {
  for (std::size_t i = 0; i < table.rows.size(); ++i) {
    table.rows[i].calibration_error = error;
    table.rows[i].calibration_group = i < table.rows.size() / 2 ? "low" : "high";
  }
}

/// Noise and calibration as the rows state them.
inline IntensityTable observed(IntensityTable table, std::mt19937_64& engine) {
  std::normal_distribution<double> normal;
  std::map<std::string, double> factors;
  for (IntensityRow& row : table.rows) {
    if (row.calibration_group) {
      const auto [found, is_new] = factors.emplace(*row.calibration_group, 0.0);
      if (is_new) found->second = std::exp(*row.calibration_error * normal(engine));
      row.intensity *= found->second;
    }
    row.intensity += row.intensity_sigma * normal(engine);
    if (row.is_limit) row.intensity = 3.0 * row.intensity_sigma;
  }
  return table;
}

/// The fainter half of the lines become limits at 3 sigma where they are fainter than that.
inline IntensityTable with_limits(IntensityTable table) {
  give_errors(table, 0.05, 0.03);
  for (IntensityRow& row : table.rows) row.is_limit = row.intensity < 2.0 * row.intensity_sigma;
  return table;
}

inline IntensityTable lte(const Species& species, const std::vector<simulated_table::Layer>& layers, std::size_t lines,
                          double relative_error) {
  IntensityTable table = simulated_table::table_of(species, layers, lines, relative_error);
  give_errors(table, relative_error, 0.2 * relative_error);
  return table;
}

inline double column(const Species& species, double tau0) {
  return simulated_table::column_for(species, tau0, 40.0, 10);
}

inline std::vector<Case> true_lte() {
  using simulated_table::Layer;
  std::vector<Case> cases;
  for (const char* method : {"line", "likelihood"}) {
    cases.push_back({"thin, 10 lines, S/N 20", "", method, [](const Species& s) {
                       return lte(s, {{40.0, column(s, 0.02)}}, 10, 0.05);
                     }});
    cases.push_back({"thin, 10 lines, S/N 7", "", method, [](const Species& s) {
                       return lte(s, {{40.0, column(s, 0.02)}}, 10, 0.14);
                     }});
    cases.push_back({"thin, 5 lines, S/N 20", "", method, [](const Species& s) {
                       return lte(s, {{40.0, column(s, 0.02)}}, 5, 0.05);
                     }});
    cases.push_back({"thin, 10 lines, 10 % shared calibration in two groups", "", method, [](const Species& s) {
                       IntensityTable table = lte(s, {{40.0, column(s, 0.02)}}, 10, 0.05);
                       share_calibration(table, 0.10);
                       return table;
                     }});
  }
  cases.push_back({"tau0 = 3, 10 lines, S/N 20", "", "likelihood", [](const Species& s) {
                     return lte(s, {{40.0, column(s, 3.0)}}, 10, 0.05);
                   }});
  cases.push_back({"tau0 = 1, source of 20 arcsec, size free", "", "likelihood",
                   [](const Species& s) { return lte(s, {{40.0, column(s, 1.0), 20.0}}, 10, 0.05); }, false,
                   [](RunOptions& options) { options.source_size_free = true; }});
  cases.push_back({"half of the lines limits", "", "likelihood", [](const Species& s) {
                     return with_limits(lte(s, {{20.0, column(s, 0.02)}}, 12, 0.05));
                   }});
  cases.push_back({"two spin isomers in their ratio", "", "likelihood",
                   [](const Species& s) { return lte(s, {{40.0, column(s, 0.02)}}, 10, 0.05); }, true});
  return cases;
}

inline std::vector<Case> departed() {
  std::vector<Case> cases;
  for (const double density : {1e6, 1e5, 1e4}) {
    cases.push_back({fmt::format("n = 1e{:.0f} cm-3, S/N 20", std::log10(density)), "subthermal high-J levels",
                     "likelihood", [density](const Species& s) {
                       IntensityTable table = equilibrium::table_of(s, column(s, 0.02), 40.0, density, 10, 0.05);
                       give_errors(table, 0.05, 0.01);
                       return table;
                     }});
  }
  for (const double share : {0.05, 0.15, 0.5}) {
    cases.push_back({fmt::format("{:.0f} % more at 120 K beside 30 K, S/N 20", 100.0 * share),
                     "second component not recognised", "likelihood", [share](const Species& s) {
                       const double n = column(s, 0.02);
                       return lte(s, {{30.0, n}, {120.0, share * n}}, 12, 0.05);
                     }});
  }
  for (const double tau0 : {0.5, 1.0, 3.0}) {
    cases.push_back({fmt::format("tau0 = {:g}, widths known, S/N 20", tau0), "opacity ignored", "line",
                     [tau0](const Species& s) { return lte(s, {{40.0, column(s, tau0)}}, 10, 0.05); }});
    cases.push_back({fmt::format("tau0 = {:g}, widths not known, S/N 20", tau0), "opacity ignored", "line",
                     [tau0](const Species& s) {
                       IntensityTable table = lte(s, {{40.0, column(s, tau0)}}, 10, 0.05);
                       for (IntensityRow& row : table.rows) row.fwhm_km_s.reset();
                       return table;
                     }});
  }
  for (const double size : {60.0, 20.0}) {
    cases.push_back({fmt::format("source of {:g} arcsec taken to fill beams of 120 to 12 arcsec", size),
                     "beam dilution ignored", "likelihood",
                     [size](const Species& s) { return lte(s, {{40.0, column(s, 0.02), size}}, 10, 0.05); }});
  }
  cases.push_back({"source of 20 arcsec, beams of the upper half given 30 % too small", "wrong beam", "likelihood",
                   [](const Species& s) {
                     IntensityTable table = lte(s, {{40.0, column(s, 0.02), 20.0}}, 10, 0.05);
                     for (std::size_t i = 5; i < 10; ++i) *table.rows[i].beam_fwhm_rad *= 0.7;
                     return table;
                   },
                   false, [](RunOptions& options) { options.source_size_rad = 20.0 * simulated_table::kRadPerArcsec; }});
  for (const double more : {0.2, 0.5}) {
    cases.push_back({fmt::format("another line adds {:.0f} % to one of 10, S/N 20", 100.0 * more),
                     "one line blended", "likelihood", [more](const Species& s) {
                       IntensityTable table = lte(s, {{40.0, column(s, 0.02)}}, 10, 0.05);
                       table.rows[4].intensity *= 1.0 + more;
                       return table;
                     }});
  }
  cases.push_back({"g of one spin isomer 3 times too small", "wrong spin weights", "likelihood",
                   [](const Species& s) {
                     IntensityTable table = lte(s, {{40.0, column(s, 0.02)}}, 10, 0.05);
                     for (IntensityRow& row : table.rows) {
                       const bool ortho = (std::stoi(*row.transition) % 2) == 1;
                       if (ortho) row.intensity *= 3.0;
                       if (ortho) row.intensity_sigma *= 3.0;
                     }
                     return table;
                   },
                   true});
  cases.push_back({"all g and intensities 3 times those of Q", "wrong Q convention, all lines alike", "likelihood",
                   [](const Species& s) {
                     IntensityTable table = lte(s, {{40.0, column(s, 0.02)}}, 10, 0.05);
                     for (IntensityRow& row : table.rows) row.intensity *= 3.0, row.intensity_sigma *= 3.0;
                     return table;
                   }});
  return cases;
}

inline Rates rates_of(const Case& one, int tables, std::uint64_t seed) {
  const Species species = simulated_table::rotor(one.isomers);
  const IntensityTable noiseless = one.noiseless(species);
  RunOptions options = simulated_table::by(one.method);
  if (one.set) one.set(options);
  std::mt19937_64 engine(seed);
  Rates rates;
  for (int i = 0; i < tables; ++i) {
    const Result result = analyse(species, observed(noiseless, engine), options);
    ++rates.tables;
    rates.answered += result.status == Status::done;
    rates.caught += result.verdict.find("not describe") != std::string::npos ||
                    result.verdict.find("N is too low") != std::string::npos;
    rates.cannot_tell += result.verdict == "these lines cannot tell";
    for (const Check& check : result.checks) {
      if (check.outcome == Outcome::fail) ++rates.by_check[check.name];
    }
  }
  return rates;
}

}  // namespace trotline::departures
