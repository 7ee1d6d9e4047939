// Writes a report page of invented jobs, for the checks in a browser: invented_page COUNT FILE
#include <fmt/format.h>

#include <cstdlib>
#include <fstream>

#include <trotline/report/page.hpp>

#include "report/invented_results.hpp"

namespace {

using namespace trotline;
using namespace trotline::testing_room;

/// Most jobs are plain; now and then one is weak, failed, or named to attack the page.
struct Invented {
  PageJob job;
  Result result;
};

Invented invented_job(std::size_t i) {
  static const std::vector<std::string> kAttacks = {"<script>window.pwned=1</script>",
                                                    "\"><img src=x onerror=window.pwned=1>",
                                                    "</style><script>window.pwned=1</script>",
                                                    "' onmouseover='window.pwned=1",
                                                    "{{title}} {{{css}}}",
                                                    "]]>-->",
                                                    "javascript:window.pwned=1",
                                                    "&lt;b&gt;",
                                                    "\u202Eright to left"};
  Invented invented;
  invented.result =
      invented_result({.lines = 12,
                       .temperature_k = 15.0 + static_cast<double>(i * 37 % 120),
                       .log10_column_density_cm2 = 12.5 + 0.01 * static_cast<double>(i * 53 % 250),
                       .limits = i % 5 == 0 ? 2U : 0U,
                       .unused = i % 7 == 0 ? 1U : 0U,
                       .seed = static_cast<unsigned>(i + 1)});
  invented.result.source = fmt::format("Lantern {}", i);
  if (i % 11 == 3) invented.result = not_thermal_result();
  if (i % 13 == 4) invented.result.checks[0].outcome = Outcome::fail;
  if (i % 17 == 5) invented.result.warnings = {"2 rows of other species were passed over"};
  PageJob& job = invented.job;
  job.id = i;
  job.source = fmt::format("Lantern {}", i);
  job.species = i % 3 == 0 ? "CO" : i % 3 == 1 ? "13CO" : "CH3CN";
  job.status = invented.result.status == Status::done ? "done" : "weak";
  job.message = invented.result.message;
  job.table_file = "lines/lantern.csv";
  if (i % 29 == 6) {
    job.status = "failed";
    job.message = fmt::format("lines/lantern.csv:{}: column 'intensity' holds 'much'; expected a number", i);
  }
  if (i % 40 == 7) {
    const std::string& attack = kAttacks[i / 40 % kAttacks.size()];
    invented.result = with_hostile_text(invented.result, attack);
    job.source = job.message = job.table_file = attack;
  }
  return invented;
}

}  // namespace

int main(int count, char** arguments) {
  if (count != 3) return 2;
  SurveyPage page({"Lantern survey <&>", {}, {{"lines/torn.csv", "lines/torn.csv:1: the table is empty"}}});
  std::string rows, sections;
  for (std::size_t i = 0; i < std::strtoul(arguments[1], nullptr, 10); ++i) {
    Invented invented = invented_job(i);
    if (invented.job.status != "failed") invented.job.result = &invented.result;
    const SurveyPage::Pieces pieces = page.add(invented.job);
    rows += pieces.row;
    sections += pieces.section;
  }
  std::ofstream file(arguments[2], std::ios::binary);
  file << page.opening() << rows << page.middle() << sections << page.closing();
  return file ? 0 : 1;
}
