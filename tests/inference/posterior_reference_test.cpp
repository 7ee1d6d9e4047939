#include <gtest/gtest.h>
#include <nlohmann/json.hpp>

#include <fstream>

#include <trotline/inference/posterior.hpp>

#include "simulated_source.hpp"

namespace trotline {
namespace {

// tests/reference/posteriors.py: scipy.integrate on stored tables; values stored beside it.
TEST(Posterior, AgreesWithScipyQuadrature) {
  const std::string folder = std::string(TROTLINE_SOURCE_DIR) + "/tests/reference/";
  std::ifstream tables_file(folder + "likelihood_fits.json");
  std::ifstream file(folder + "posteriors.json");
  const auto tables = nlohmann::json::parse(tables_file).at("tables");
  const auto document = nlohmann::json::parse(file);
  ASSERT_GE(document.at("posteriors").size(), 10U);
  for (const auto& stored : document.at("posteriors")) {
    const auto& table = tables.at(stored.at("table").get<std::size_t>());
    std::vector<ModelLine> lines;
    LikelihoodProblem problem;
    for (std::size_t i = 0; i < table.at("frequency_hz").size(); ++i) {
      ModelLine line;
      line.constants = {table.at("frequency_hz")[i], table.at("energy_k")[i], table.at("degeneracy")[i],
                        table.at("einstein_a")[i]};
      line.fwhm_km_s = table.at("fwhm_km_s")[i];
      line.beam_fwhm_arcsec = table.at("beam_arcsec")[i];
      line.datum = static_cast<int>(i);
      lines.push_back(line);
      Measurement datum;
      datum.intensity_k_km_s = table.at("intensity")[i];
      datum.sigma_k_km_s = table.at("sigma")[i];
      datum.is_limit = table.at("limit")[i].get<bool>();
      problem.data.push_back(datum);
    }
    problem.parameters = simulated::column_and_temperature_free(simulated::state(
        30.0, 30.0, table.at("size_arcsec").get<double>(), table.at("background_k").get<double>()));
    const ForwardModel model(lines, simulated::partitions(), {});
    const IntensityLikelihood likelihood(model, problem);
    const Posterior result = posterior(likelihood, fit_likelihood(likelihood));
    ASSERT_TRUE(result.usable());
    EXPECT_NEAR(-result.ln_evidence, stored.at("minus_ln_evidence").get<double>(), 1e-4);
    for (std::size_t k = 0; k < 2; ++k) {
      const auto& quantiles = stored.at(k == 0 ? "ln_column" : "ln_temperature");
      const MarginalDensity& m = result.marginals[k];
      const double found[] = {m.central95.low, m.central68.low, m.median, m.central68.high, m.central95.high};
      // the stored quantiles come from a grid and are good to some 2e-4 of a standard error
      for (std::size_t q = 0; q < 5; ++q)
        EXPECT_NEAR(found[q], quantiles[q].get<double>(), 1e-3 * m.sigma) << table.at("kind");
    }
  }
}

}  // namespace
}  // namespace trotline
