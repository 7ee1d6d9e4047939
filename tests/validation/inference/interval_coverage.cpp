// How often intervals hold the truth, over simulated sources: the table and figure of docs/validation.md.
//
//     interval_coverage [SOURCES] [FOLDER] [SCENARIO]
//
// SOURCES of each scenario (1000); FOLDER is docs/, whose validation.md has the table between two marks and
// whose figures/ gets the numbers that interval_coverage.gp draws; without FOLDER the table goes to standard
// output.

#include <fmt/format.h>

#include <fstream>
#include <iostream>
#include <sstream>
#include <thread>

#include "coverage_methods.hpp"

namespace {

using namespace trotline;
using namespace trotline::coverage;

constexpr std::uint64_t kSeed = 20260601;

Tallies tally_on_all_cores(const Scenario& scenario, std::uint64_t number, int sources) {
  const int workers = static_cast<int>(std::max(1U, std::thread::hardware_concurrency()));
  std::vector<Tallies> parts(static_cast<std::size_t>(workers));
  {
    std::vector<std::jthread> threads;
    for (int w = 0; w < workers; ++w) {
      threads.emplace_back([&, w] {
        parts[static_cast<std::size_t>(w)] = tally(scenario, kSeed, number, sources, w, workers);
      });
    }
  }
  Tallies total = parts.front();
  for (std::size_t w = 1; w < parts.size(); ++w) {
    for (std::size_t t = 0; t < total.size(); ++t) {
      for (std::size_t m = 0; m < kMethods; ++m) total[t][m].add(parts[w][t][m]);
    }
  }
  return total;
}

bool is_within(const Tally& tally) {
  return std::abs(tally.coverage68() - 0.68) <= 0.04 && std::abs(tally.coverage95() - 0.95) <= 0.02 &&
         std::abs(tally.median_bias()) < 0.15;
}

/// "68.1 / 95.2 / +0.03", in bold where it is not within what was asked.
std::string cell(const Tally& tally) {
  if (tally.answered == 0) return "-";
  const std::string numbers = fmt::format("{:.1f} / {:.1f} / {:+.2f}", 100.0 * tally.coverage68(),
                                          100.0 * tally.coverage95(), tally.median_bias());
  return is_within(tally) ? numbers : "**" + numbers + "**";
}

struct Output {
  std::string table = "| scenario | of | straight line | likelihood | posterior |\n|---|---|---|---|---|\n";
  std::string numbers =
      "# scenario target, then coverage of 68 and 95 % by line, likelihood, posterior [%]\n";
  int outside = 0;
};

void add(Output& output, const Scenario& scenario, const Tallies& tallies) {
  for (std::size_t t = 0; t < tallies.size(); ++t) {
    const auto& row = tallies[t];
    const std::string target = scenario.targets[t].name;
    output.table += fmt::format("| {} | {} | {} | {} | {} |\n", t == 0 ? scenario.name : "", target,
                                cell(row[kLine]), cell(row[kLikelihood]), cell(row[kPosterior]));
    output.numbers += fmt::format("\"{}: {}\"", scenario.name, target);
    for (const Tally& tally : row) {
      output.numbers += tally.answered > 0 ? fmt::format(" {:.2f} {:.2f}", 100.0 * tally.coverage68(),
                                                         100.0 * tally.coverage95())
                                           : std::string(" NaN NaN");
    }
    output.numbers += '\n';
    output.outside += !is_within(row[kLikelihood]);
    output.outside += !is_within(row[kPosterior]);
  }
}

void replace_between_marks(const std::string& path, const std::string& text) {
  std::stringstream page;
  page << std::ifstream(path).rdbuf();
  const std::string begin = "<!-- interval_coverage: begin -->\n";
  const std::string end = "<!-- interval_coverage: end -->";
  std::string whole = page.str();
  const auto from = whole.find(begin);
  const auto to = whole.find(end);
  if (from == std::string::npos || to == std::string::npos)
    throw std::runtime_error(path + " has no marks for the table");
  whole.replace(from + begin.size(), to - from - begin.size(), text);
  std::ofstream(path) << whole;
}

}  // namespace

int main(int count, char** arguments) {
  const int sources = count > 1 ? std::stoi(arguments[1]) : 1000;
  const auto all = scenarios();
  Output output;
  for (std::size_t i = 0; i < all.size(); ++i) {
    if (count > 3 && static_cast<int>(i) != std::stoi(arguments[3])) continue;
    add(output, all[i], tally_on_all_cores(all[i], i, sources));
    std::cerr << output.table.substr(output.table.rfind("| " + all[i].name)) << std::flush;
  }
  const std::string table =
      fmt::format("{} sources of each scenario, seed {}.\n\n{}", sources, kSeed, output.table);
  if (count > 2 && std::string(arguments[2]) != "-") {
    const std::string folder = arguments[2];
    replace_between_marks(folder + "/validation.md", table);
    std::ofstream(folder + "/figures/interval_coverage.dat") << output.numbers;
  } else {
    std::cout << table;
  }
  std::cerr << output.outside
            << " of likelihood and posterior outside of 68 +- 4 %, 95 +- 2 %, bias 0.15 sigma\n";
}
