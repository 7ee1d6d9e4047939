// Symbols: a ladder holds the levels of one K (or Ka); a stick is a line in a spectrum.
#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <map>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/base/text.hpp>
#include <trotline/report/axis.hpp>
#include <trotline/report/font_coverage.hpp>
#include <trotline/report/label_placement.hpp>
#include <trotline/report/rounding.hpp>
#include <trotline/report/species_figures.hpp>
#include <trotline/report/text_measure.hpp>
#include <trotline/report/typeset.hpp>

namespace trotline {
namespace {

namespace fs = std::filesystem;

constexpr FigureSize kLevelsSize = {120.0, 110.0};
constexpr FigureSize kLinesSize = {160.0, 84.0};
constexpr double kTextPoints = 7.0;

/// A text as data, in characters for which there are fonts.
std::string quoted(const std::string& text) { return figure_text(drawable_text(text)); }

/// A panel on a page [mm].
struct Panel {
  FigureSize page;
  Box box;
  [[nodiscard]] std::string margins() const {
    return fmt::format(
        "  set lmargin at screen {:.6f}\n  set rmargin at screen {:.6f}\n  set bmargin at screen {:.6f}\n"
        "  set tmargin at screen {:.6f}\n",
        box.left / page.width_mm, box.right / page.width_mm, box.bottom / page.height_mm,
        box.top / page.height_mm);
  }
};

std::string ticks(const char* axis, const Axis& of) {
  std::string list;
  for (const double tick : of.ticks) {
    list += fmt::format("{}\"{}\" {:.9g}", list.empty() ? "" : ", ", tick_text(of, tick), tick);
  }
  return fmt::format(
      "  set {0}range [{1:.9g}:{2:.9g}]\n  set {0}tics nomirror out scale 0.55 ({3}) textcolor rgb soft\n",
      axis, of.low, of.high, list);
}

/// Opening of a script whose only text is fixed words.
std::string opening(const char* stem, const std::vector<FigureFormat>& formats, const FigureSize& size) {
  return fmt::format("# To draw it again: gnuplot {}.gp\n", stem) + figure_palette(formats) +
         "array hue[4] = [0x1B7F8F, 0xA03A17, 0x16212B, 0x8A9299]\n"
         "set encoding utf8\nset datafile separator \"\\t\"\ndo for [format in formats] {\n  reset\n  unset "
         "key\n" +
         figure_terminals(size) + fmt::format("  set output \"{}.\".format\n  set multiplot\n", stem) +
         "  set border 3 linewidth 0.6 linecolor rgb soft back\n"
         "  set grid ytics linetype 1 linewidth 0.4 linecolor rgb hair back\n";
}

/// The title and the names of the isomers, in millimetres from the page's lower left corner.
std::string page_of_texts(const char* stem, const FigureSize& size) {
  return fmt::format(
      "  unset border\n  unset grid\n  unset tics\n  unset label\n  unset logscale\n"
      "  set lmargin at screen 0\n  set rmargin at screen 1\n  set bmargin at screen 0\n  set tmargin at "
      "screen 1\n"
      "  set xrange [0:{1:.9g}]\n  set yrange [0:{2:.9g}]\n"
      "  plot \"{0}-text.tsv\" using ($1==0?$2:NaN):3:4 with labels left noenhanced font face.\" Bold,9\" "
      "textcolor "
      "rgb ink notitle, \\\n"
      "    \"\" using ($1==1?$2:NaN):3:4 with labels right noenhanced font face.\",{3}\" textcolor rgb soft "
      "notitle, \\\n"
      "    \"\" using ($1>=2?$2:NaN):3:4 with labels left noenhanced font face.\",{3}\" textcolor rgb ink "
      "notitle, \\\n"
      "    \"\" using ($1>=2?$2-5:NaN):3:(4):(0):(hue[$1<2?1:int($1)-1]) with vectors nohead linewidth 1.6 "
      "linecolor rgb "
      "variable notitle\n  unset multiplot\n  unset output\n}}\n",
      stem, size.width_mm, size.height_mm, kTextPoints);
}

std::string text_row(int kind, double x_mm, double y_mm, const std::string& text) {
  return fmt::format("{}\t{:.4f}\t{:.4f}\t{}\n", kind, x_mm, y_mm, quoted(text));
}

std::string axis_name(int id, const char* words, double x_mm, double y_mm, const char* side,
                      const FigureSize& size) {
  return fmt::format(
      "  set label {} \"{}\" at screen {:.6f},{:.6f} {} font face.\",8\" textcolor rgb ink enhanced\n", id,
      words, x_mm / size.width_mm, y_mm / size.height_mm, side);
}

// ---- levels

/// K of "J(K)", Ka of "J(Ka,Kc)"; 0 for labels of another make.
int ladder_of(const Level& level) {
  const std::size_t open = level.label.find('(');
  if (open == std::string::npos) return 0;
  const std::size_t end = level.label.find_first_of(",)", open);
  const auto k = parse_whole_number(std::string_view(level.label).substr(open + 1, end - open - 1));
  return k ? static_cast<int>(std::abs(*k)) : 0;
}

/// J of "J(K)", else the whole label.
std::string rung_name(const Level& level) { return level.label.substr(0, level.label.find('(')); }

struct DrawnLevel {
  const Level* level = nullptr;
  int ladder = 0;
  int isomer = 1;  ///< 1 to 4: the colour
  bool named = false;
};

double highest_energy(const Species& species, const SpeciesQuery& query) {
  constexpr std::size_t kLevels = 60;
  constexpr double kTemperatures = 8.0;
  const double whole = species.levels.back().energy_k;
  if (query.strength) return std::min(whole, kTemperatures * query.strength->temperature_k);
  return species.levels[std::min(kLevels, species.levels.size()) - 1].energy_k;
}

std::vector<std::string> isomers_of(const Species& species) {
  std::vector<std::string> names;
  for (const Level& level : species.levels) {
    if (std::find(names.begin(), names.end(), level.spin) == names.end()) names.push_back(level.spin);
  }
  return names;
}

/// The levels up to an energy; the lowest ladders where there are too many to tell apart.
std::vector<DrawnLevel> drawn_levels(const Species& species, double highest_k) {
  constexpr int kMostLadders = 16;
  const auto isomers = isomers_of(species);
  std::vector<DrawnLevel> drawn;
  for (const Level& level : species.levels) {
    const int ladder = ladder_of(level);
    if (level.energy_k > highest_k || ladder >= kMostLadders) continue;
    const auto isomer = std::find(isomers.begin(), isomers.end(), level.spin) - isomers.begin();
    drawn.push_back({&level, ladder, static_cast<int>(std::min<std::ptrdiff_t>(isomer, 3)) + 1, false});
  }
  return drawn;
}

/// A level is named unless its name would touch the one below in its ladder.
void choose_names(std::vector<DrawnLevel>& levels, double k_per_mm) {
  constexpr double kLineMm = 2.6;
  std::map<int, double> last;
  for (DrawnLevel& level : levels) {
    const auto below = last.find(level.ladder);
    level.named = below == last.end() || level.level->energy_k - below->second >= kLineMm * k_per_mm;
    if (level.named) last[level.ladder] = level.level->energy_k;
  }
}

std::string levels_data(const std::vector<DrawnLevel>& levels) {
  std::string bytes = "# ladder (K)\tE/k [K]\tisomer\tnamed (1)\tname\n";
  for (const DrawnLevel& level : levels) {
    bytes += fmt::format("{}\t{:.9g}\t{}\t{}\t{}\n", level.ladder, level.level->energy_k, level.isomer,
                         level.named ? 1 : 0, quoted(rung_name(*level.level)));
  }
  return bytes;
}

/// Lines between drawn levels, while they are few enough to be seen.
std::string levels_lines_data(const Species& species, const SpeciesQuery& query, double highest_k) {
  constexpr std::size_t kMostLines = 60;
  std::string bytes = "# ladder\tE_u/k [K]\tto ladder\tE_l/k [K]\n";
  const auto lines = query.lines ? listed_lines(species, query) : std::vector<ListedLine>{};
  std::size_t drawn = 0;
  for (const ListedLine& line : lines) {
    const Level& upper = species.levels[line.transition->upper];
    const Level& lower = species.levels[line.transition->lower];
    if (upper.energy_k > highest_k || lines.size() > kMostLines) continue;
    bytes += fmt::format("{}\t{:.9g}\t{}\t{:.9g}\n", ladder_of(upper), upper.energy_k, ladder_of(lower),
                         lower.energy_k);
    ++drawn;
  }
  return drawn > 0 ? bytes : bytes + "NaN\tNaN\tNaN\tNaN\n";
}

std::string levels_text(const Species& species, const std::vector<DrawnLevel>& levels, const Box& box) {
  std::string bytes = "# kind (0 title, 1 note, 2.. isomer)\tx [mm]\ty [mm]\ttext\n";
  bytes += text_row(0, 3.0, kLevelsSize.height_mm - 4.0, typeset_formula(species.formula));
  bytes += text_row(1, kLevelsSize.width_mm - 3.0, kLevelsSize.height_mm - 4.0,
                    fmt::format("{} of {} levels", levels.size(), species.levels.size()));
  const auto isomers = isomers_of(species);
  if (isomers.size() < 2) return bytes;
  double x = box.left + 7.0;
  for (std::size_t i = 0; i < std::min<std::size_t>(isomers.size(), 4); ++i) {
    const std::string name = isomers[i].empty() ? "unnamed" : isomers[i];
    bytes += text_row(static_cast<int>(i) + 2, x, kLevelsSize.height_mm - 9.0, name);
    x += 10.0 + kTextPoints * kMmPerPoint * text_width_em(name);
  }
  return bytes;
}

std::string levels_script(const Panel& panel, const Axis& energy, int ladders,
                          const std::vector<FigureFormat>& formats) {
  std::string script = opening("levels", formats, panel.page) + panel.margins() + ticks("y", energy);
  script += fmt::format("  set xrange [-0.6:{}]\n", ladders - 0.3);
  script += ladders > 1 ? "  set xtics nomirror scale 0 1 textcolor rgb soft\n" : "  unset xtics\n";
  script += axis_name(1, "{/:Italic E}/{/:Italic k} (K)", 3.0, panel.box.top + 3.0, "left", panel.page);
  if (ladders > 1) {
    script += axis_name(2, "{/:Italic K} or {/:Italic K}_a of the ladder; levels by {/:Italic J}",
                        panel.box.right, 3.0, "right", panel.page);
  }
  return script +
         "  plot \"levels-lines.tsv\" using 1:2:($3-$1):($4-$2) with vectors head filled size screen 0.01,20 "
         "linewidth "
         "0.5 linecolor rgb grey notitle, \\\n"
         "    \"levels-levels.tsv\" using ($1-0.36):2:(0.56):(0):(hue[int($3)]) with vectors nohead "
         "linewidth 1.5 "
         "linecolor rgb variable notitle, \\\n" +
         fmt::format(
             "    \"\" using ($4==1?$1+0.24:NaN):2:5 with labels left noenhanced font face.\",{}\" textcolor "
             "rgb "
             "soft notitle\n",
             kTextPoints) +
         page_of_texts("levels", panel.page);
}

// ---- lines

struct Stick {
  double frequency_ghz = 0.0;
  double intensity_k_km_s = 0.0;
  std::string name;
};

std::vector<Stick> sticks_of(const Species& species, const SpeciesQuery& query) {
  std::vector<Stick> sticks;
  for (const ListedLine& line : listed_lines(species, query)) {
    if (!(line.intensity_k_km_s > 0.0)) continue;
    sticks.push_back({line.transition->frequency_hz * 1e-9, line.intensity_k_km_s,
                      typeset_transition(transition_label(species, *line.transition))});
  }
  if (sticks.empty()) {
    throw InputError({fmt::format("{} has no line to draw in this range", species.name),
                      "a wider --lines range, or a lower --stronger-than"});
  }
  return sticks;
}

/// From the strongest line down at most so many powers of ten.
Axis intensity_axis(const std::vector<Stick>& sticks) {
  constexpr double kMostDecades = 4.0;
  constexpr double kHeadroom = 0.6;
  double high = 0.0;
  double low = std::numeric_limits<double>::infinity();
  for (const Stick& stick : sticks) {
    high = std::max(high, stick.intensity_k_km_s);
    low = std::min(low, stick.intensity_k_km_s);
  }
  Axis axis;
  axis.high = std::log10(high) + kHeadroom;
  axis.low = std::max(std::floor(std::log10(low) - 0.2), std::floor(std::log10(high) - kMostDecades));
  for (double tick = axis.low; tick <= axis.high; tick += 1.0) axis.ticks.push_back(tick);
  return axis;
}

/// Names of the strongest lines where there is room; rows of the label file.
std::string stick_labels(const std::vector<Stick>& sticks, const Axis& frequency, const Axis& intensity,
                         const Box& box) {
  constexpr std::size_t kMostNames = 14;
  constexpr std::size_t kMostSticks = 400;  // that names keep off; the search asks each name about each
  std::vector<const Stick*> strongest;
  for (const Stick& stick : sticks) strongest.push_back(&stick);
  std::stable_sort(strongest.begin(), strongest.end(),
                   [](const Stick* a, const Stick* b) { return a->intensity_k_km_s > b->intensity_k_km_s; });
  strongest.resize(std::min(kMostNames, strongest.size()));
  const double mm_per_ghz = (box.right - box.left) / (frequency.high - frequency.low);
  const double mm_per_dex = (box.top - box.bottom) / (intensity.high - intensity.low);
  LabelScene scene;
  scene.frame = box;
  scene.marker_radius = 0.3;
  const double em_mm = kTextPoints * kMmPerPoint;
  for (const Stick* stick : strongest) {
    scene.labels.push_back({box.left + (stick->frequency_ghz - frequency.low) * mm_per_ghz,
                            box.bottom + (std::log10(stick->intensity_k_km_s) - intensity.low) * mm_per_dex,
                            em_mm * text_width_em(stick->name), em_mm * kCapHeight});
  }
  for (const Stick& stick : sticks) {
    const double x_mm = box.left + (stick.frequency_ghz - frequency.low) * mm_per_ghz;
    const double top_mm = box.bottom + (std::log10(stick.intensity_k_km_s) - intensity.low) * mm_per_dex;
    if (scene.lines.size() < kMostSticks && top_mm > box.bottom)
      scene.lines.push_back({x_mm, box.bottom, x_mm, top_mm});
  }
  const auto places = place_labels(scene);
  std::string bytes = "# x [mm]\ty [mm]\tleader (1)\tfrom\t\tto\t\tname\n";
  for (std::size_t i = 0; i < places.size(); ++i) {
    const PlacedLabel& place = places[i];
    if (!place.placed) continue;
    bytes += fmt::format("{:.4f}\t{:.4f}\t{}\t{:.4f}\t{:.4f}\t{:.4f}\t{:.4f}\t{}\n", place.x, place.y,
                         place.has_leader ? 1 : 0, place.leader.x0, place.leader.y0, place.leader.x1,
                         place.leader.y1, quoted(strongest[i]->name));
  }
  return bytes;
}

std::string lines_script(const Panel& panel, const Axis& frequency, const Axis& intensity,
                         const std::vector<FigureFormat>& formats) {
  std::string decades;
  for (const double tick : intensity.ticks) {
    decades += fmt::format("{}\"10^{{{:.0f}}}\" {:.0f}", decades.empty() ? "" : ", ", tick, tick);
  }
  std::string script = opening("lines", formats, panel.page) + panel.margins() + ticks("x", frequency);
  script += fmt::format(
      "  set yrange [{:.9g}:{:.9g}]\n  set ytics nomirror out scale 0.55 ({}) textcolor rgb soft\n",
      intensity.low, intensity.high, decades);
  script += axis_name(1, "{/:Italic W} (K km s^{-1})", 3.0, panel.box.top + 3.0, "left", panel.page);
  script += axis_name(2, "frequency (GHz)", panel.box.right, 3.0, "right", panel.page);
  script += fmt::format(
      "  plot \"lines-lines.tsv\" using 1:({0:.9g}):(0):(log10($2)>{0:.9g}?log10($2)-{0:.9g}:0) with vectors "
      "nohead "
      "linewidth 0.9 linecolor rgb line notitle\n",
      intensity.low);
  script += fmt::format(
      "  unset border\n  unset grid\n  unset tics\n  unset label\n"
      "  set lmargin at screen 0\n  set rmargin at screen 1\n  set bmargin at screen 0\n  set tmargin at "
      "screen 1\n"
      "  set xrange [0:{0:.9g}]\n  set yrange [0:{1:.9g}]\n"
      "  plot \"lines-labels.tsv\" using ($3==1?$4:NaN):5:($6-$4):($7-$5) with vectors nohead linewidth 0.4 "
      "linecolor rgb "
      "grey notitle, \\\n"
      "    \"\" using 1:2:8 with labels center noenhanced font face.\",{2}\" textcolor rgb soft notitle\n",
      panel.page.width_mm, panel.page.height_mm, kTextPoints);
  return script + page_of_texts("lines", panel.page);
}

std::vector<std::string> write_and_draw(const fs::path& folder, const std::vector<NamedBytes>& files,
                                        const FigureDrawing& drawing) {
  std::vector<std::string> names;
  for (const NamedBytes& file : files) {
    write_file(folder / file.name, file.bytes);
    names.push_back(file.name);
  }
  const auto figures = draw_figure(drawing, folder);
  names.insert(names.end(), figures.begin(), figures.end());
  return names;
}

}  // namespace

std::vector<std::string> write_level_diagram(const Species& species, const SpeciesQuery& query,
                                             const fs::path& folder,
                                             const std::vector<FigureFormat>& formats) {
  const Panel panel{kLevelsSize, {14.0, 9.0, kLevelsSize.width_mm - 3.0, kLevelsSize.height_mm - 17.0}};
  const double highest_k = highest_energy(species, query);
  constexpr double kAbove = 1.04;
  const Axis energy = axis_over(-0.02 * highest_k, kAbove * highest_k, 8);
  auto levels = drawn_levels(species, highest_k);
  choose_names(levels, (energy.high - energy.low) / (panel.box.top - panel.box.bottom));
  int ladders = 1;
  for (const DrawnLevel& level : levels) ladders = std::max(ladders, level.ladder + 1);
  return write_and_draw(
      folder,
      {{"levels-levels.tsv", levels_data(levels)},
       {"levels-lines.tsv", levels_lines_data(species, query, highest_k)},
       {"levels-text.tsv", levels_text(species, levels, panel.box)},
       {"levels.gp", levels_script(panel, energy, ladders, formats)}},
      {.script = "levels.gp", .stem = "levels", .title = "Energy levels", .formats = formats});
}

std::vector<std::string> write_stick_spectrum(const Species& species, const SpeciesQuery& query,
                                              const fs::path& folder,
                                              const std::vector<FigureFormat>& formats) {
  if (!query.strength) throw DomainError("query", 0, "a temperature, for which the lines are as strong");
  const Panel panel{kLinesSize, {14.0, 11.0, kLinesSize.width_mm - 4.0, kLinesSize.height_mm - 13.0}};
  const auto sticks = sticks_of(species, query);
  const double low = query.frequency_hz ? query.frequency_hz->low * 1e-9 : sticks.front().frequency_ghz;
  const double high = query.frequency_hz ? query.frequency_hz->high * 1e-9 : sticks.back().frequency_ghz;
  const double margin = 0.02 * (high - low);
  const Axis frequency = axis_over(low - margin, high + margin, 8);
  const Axis intensity = intensity_axis(sticks);
  std::string data = "# frequency [GHz]\tW [K km/s]\ttransition\n";
  for (const Stick& stick : sticks) {
    data +=
        fmt::format("{:.9g}\t{:.6g}\t{}\n", stick.frequency_ghz, stick.intensity_k_km_s, quoted(stick.name));
  }
  std::string texts = "# kind (0 title, 1 note)\tx [mm]\ty [mm]\ttext\n";
  texts += text_row(0, 3.0, kLinesSize.height_mm - 4.0, typeset_formula(species.formula));
  texts += text_row(
      1, kLinesSize.width_mm - 3.0, kLinesSize.height_mm - 4.0,
      fmt::format("LTE, thin, no background, beam filled: T = {:g} K, N = {} cm⁻²",
                  query.strength->temperature_k, significant(query.strength->column_density_per_cm2, 2)));
  return write_and_draw(
      folder,
      {{"lines-lines.tsv", data},
       {"lines-labels.tsv", stick_labels(sticks, frequency, intensity, panel.box)},
       {"lines-text.tsv", texts},
       {"lines.gp", lines_script(panel, frequency, intensity, formats)}},
      {.script = "lines.gp", .stem = "lines", .title = "Stick spectrum", .formats = formats});
}

}  // namespace trotline
