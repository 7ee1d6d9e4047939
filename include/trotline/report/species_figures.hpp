#pragma once

#include <filesystem>
#include <string>
#include <vector>

#include <trotline/report/figure.hpp>
#include <trotline/report/species_report.hpp>
#include <trotline/species/species.hpp>

namespace trotline {

/// Draws the levels of a species by ladder (K, Ka, or a single one) against E/k into `folder`: levels.svg,
/// levels.pdf, levels.png as asked, with the script levels.gp and its data levels-*.tsv beside them. Spin
/// isomers differ in colour. Up to eight times the query's temperature, else the lowest 60 levels or so; the
/// lines asked for are drawn between the levels while they are few.
/// @return the names of all files written
/// @throws SystemError as draw_figure()
std::vector<std::string> write_level_diagram(const Species& species, const SpeciesQuery& query,
                                             const std::filesystem::path& folder,
                                             const std::vector<FigureFormat>& formats);

/// Draws the lines asked for as sticks: frequency against the intensity of a thin line in LTE at the query's
/// temperature and column density, the strongest of them named; lines.svg and so on, as
/// write_level_diagram().
/// @throws DomainError  the query states no temperature; InputError  no line is left to draw
std::vector<std::string> write_stick_spectrum(const Species& species, const SpeciesQuery& query,
                                              const std::filesystem::path& folder,
                                              const std::vector<FigureFormat>& formats);

}  // namespace trotline
