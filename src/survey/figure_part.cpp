#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <fstream>
#include <map>

#include <trotline/base/errors.hpp>
#include <trotline/base/files.hpp>
#include <trotline/report/survey_figures.hpp>

#include "gather_parts.hpp"

namespace trotline {
namespace {

namespace fs = std::filesystem;

constexpr std::size_t kMostPairs = 8;
constexpr std::size_t kMostVerdicts = 7;
constexpr std::size_t kMostNamedLines = 12;
constexpr std::size_t kNameColumns = 22;
constexpr std::size_t kVerdictColumns = 80;

// A line counts as off when its mean is this many of its errors from zero, and far enough to matter.
constexpr double kOffSigma = 4.0;
constexpr double kOffMean = 0.5;

/// Residuals of one line over all sources, as running moments.
struct LineMoments {
  std::string label;
  double frequency_ghz = 0.0;
  std::size_t count = 0;
  double mean = 0.0;
  double squares = 0.0;  ///< sum of squared distances from the mean (Welford 1962, Technometrics 4, 419)

  void add(double residual) {
    ++count;
    const double before = residual - mean;
    mean += before / static_cast<double>(count);
    squares += before * (residual - mean);
  }
  [[nodiscard]] double scatter() const {
    return count > 1 ? std::sqrt(squares / static_cast<double>(count - 1)) : 1.0;
  }

  /// From the scatter, and from the unit error that residuals should have where that is larger.
  [[nodiscard]] double error() const {
    return std::max(scatter(), 1.0) / std::sqrt(static_cast<double>(count));
  }
  [[nodiscard]] bool is_off() const {
    return std::abs(mean) > kOffSigma * error() && std::abs(mean) > kOffMean;
  }
};

class DataFile {
 public:
  DataFile(const fs::path& folder, const std::string& name, const char* head)
      : path_((folder / (name + ".tsv")).string()), stream_(path_, std::ios::binary) {
    stream_ << head << '\n';
  }

  void row(const std::string& cells) {
    ++rows_;
    stream_ << cells << '\n';
  }

  std::size_t close() {
    stream_.close();
    if (!stream_) throw SystemError(fmt::format("{} cannot be written", path_));
    return rows_;
  }

 private:
  std::string path_;
  std::ofstream stream_;
  std::size_t rows_ = 0;
};

/// The next of 1, 2, 5, 10, 20 ... that is no less.
double round_step(double least) {
  const double decade = std::pow(10.0, std::floor(std::log10(least)));
  for (const double factor : {1.0, 2.0, 5.0}) {
    if (factor * decade >= least) return factor * decade;
  }
  return 10.0 * decade;
}

/// Round edges of bins for a histogram, about as wide as Freedman & Diaconis 1981 (Z. Wahrscheinlichkeitstheorie
/// 57, 453) want them, at most 60. Up to 0.5 % of the values may lie above the last edge: they belong to the last bin.
std::vector<double> bin_edges(const std::vector<double>& sorted) {
  const auto last = static_cast<double>(sorted.size() - 1);
  const auto at = [&](double share) { return sorted[static_cast<std::size_t>(std::ceil(share * last))]; };
  const double low = sorted.front();
  const double span = std::max(at(0.995) - low, 1.0);
  const double width = 2.0 * (at(0.75) - at(0.25)) / std::cbrt(static_cast<double>(sorted.size()));
  const double step = round_step(std::clamp(width, span / 60.0, span / 4.0));
  std::vector<double> edges = {step * std::floor(low / step)};
  while (edges.back() <= low + span) edges.push_back(edges.front() + step * static_cast<double>(edges.size()));
  return edges;
}

}  // namespace

class FigurePart::Data {
 public:
  Data(Ledger& ledger, const fs::path& folder)
      : ledger_(ledger),
        output_(folder / "figures"),
        column_(output_.staging(), "temperature-column", "# species\tT [K]\terror\tlog10 N [cm-2]\terror") {}

  void add(const GatheredJob& gathered) {
    if (!gathered.result) return;
    const Result& result = *gathered.result;
    if (!result.verdict.empty()) ++verdicts_[verdict_without_details(result.verdict)];
    for (const LineResult& line : result.lines) {
      if (!line.used || line.limit || !std::isfinite(line.residual_sigma)) continue;
      LineMoments& moments = lines_[{result.species, line.transition, line.frequency_mhz}];
      if (moments.count == 0) {
        moments.label = result.species + " " + line.transition;
        moments.frequency_ghz = line.frequency_mhz / 1e3;
      }
      moments.add(line.residual_sigma);
    }
    if (result.status != Status::done || result.temperature_fixed) return;
    const auto species = species_.emplace(result.species, species_.size() + 1).first->second;
    column_.row(fmt::format("{}\t{:.6g}\t{:.6g}\t{:.6g}\t{:.6g}", species, result.temperature_k.value,
                            result.temperature_k.error, result.log10_column_density_cm2.value,
                            result.log10_column_density_cm2.error));
    temperatures_.push_back(static_cast<float>(result.temperature_k.value));
  }

  void finish() {
    const std::size_t points = column_.close();
    draw(SurveyFigure::temperature_column, points, by_number(species_));
    histogram();
    pairs();
    residuals();
    verdicts();
    output_.commit();
  }

  std::vector<PageFigure> figures;
  std::vector<std::string> warnings;

 private:
  static std::vector<FigureText> by_number(const std::map<std::string, std::size_t>& numbers) {
    std::vector<FigureText> texts(numbers.size());
    for (const auto& [text, number] : numbers) texts[number - 1].text = text;
    return texts;
  }

  /// A figure that cannot be drawn costs a warning; its data stay.
  void draw(SurveyFigure figure, std::size_t rows, const std::vector<FigureText>& texts,
            std::size_t columns = kNameColumns) {
    if (rows == 0) return;
    const std::string name = name_of(figure);
    SurveyFigureInput input{figure, rows, {}};
    for (const FigureText& text : texts) input.texts.push_back(text.text);
    if (!texts.empty()) output_.write(name + "-text.tsv", figure_texts(texts, columns));
    try {
      draw_survey_figure(input, output_.staging());
    } catch (const SystemError& error) {
      warnings.emplace_back(error.what());
      return;
    }
    constexpr std::uintmax_t kLargestOnPage = 1 << 20;
    const fs::path svg = output_.staging() / (name + ".svg");
    if (fs::file_size(svg) <= kLargestOnPage)
      figures.push_back({caption_of(figure), read_file(svg.string())});
  }

  void histogram() {
    if (temperatures_.empty()) return;
    std::vector<double> sorted(temperatures_.begin(), temperatures_.end());
    std::sort(sorted.begin(), sorted.end());
    const std::vector<double> edges = bin_edges(sorted);
    DataFile file(output_.staging(), "temperature-histogram",
                  "# from [K]\tto [K]\tjobs (the last bin holds all above it too)");
    for (std::size_t i = 0; i + 1 < edges.size(); ++i) {
      const bool last = i + 2 == edges.size();
      const auto begin = std::lower_bound(sorted.begin(), sorted.end(), edges[i]);
      const auto end = last ? sorted.end() : std::lower_bound(sorted.begin(), sorted.end(), edges[i + 1]);
      file.row(fmt::format("{:.6g}\t{:.6g}\t{}", edges[i], edges[i + 1], end - begin));
    }
    draw(SurveyFigure::temperature_histogram, file.close(), {});
  }

  void pairs() {
    std::vector<FigureText> names;
    DataFile file(output_.staging(), "species-pairs",
                  "# pair\tlog10 N of the first [cm-2]\terror\tlog10 N of the second\terror");
    for (auto first = species_.begin(); first != species_.end(); ++first) {
      for (auto second = std::next(first); second != species_.end(); ++second) {
        if (names.size() == kMostPairs) continue;
        std::size_t found = 0;
        ledger_.for_each_pair(first->first, second->first, [&](const ColumnPair& pair) {
          file.row(fmt::format("{}\t{:.6g}\t{:.6g}\t{:.6g}\t{:.6g}", names.size() + 1, pair.first,
                               pair.first_error, pair.second, pair.second_error));
          ++found;
        });
        if (found > 0) names.push_back({first->first + ", " + second->first});
      }
    }
    draw(SurveyFigure::species_pairs, file.close(), names);
  }

  void residuals() {
    DataFile file(
        output_.staging(), "line-residuals",
        "# frequency [GHz]\tmean residual [sigma]\terror of the mean\tscatter\tsources\toff (1)\tline");
    std::vector<FigureText> off;
    for (const auto& [key, line] : lines_) {
      std::string label = line.label;
      std::replace(label.begin(), label.end(), '\t', ' ');
      std::replace(label.begin(), label.end(), '\n', ' ');
      file.row(fmt::format("{:.9g}\t{:.5g}\t{:.5g}\t{:.5g}\t{}\t{}\t# {}", line.frequency_ghz, line.mean,
                           line.error(), line.scatter(), line.count, line.is_off() ? 1 : 0, label));
      if (line.is_off()) off.push_back({line.label, line.frequency_ghz, line.mean});
    }
    std::stable_sort(off.begin(), off.end(),
                     [](const FigureText& a, const FigureText& b) { return std::abs(a.y) > std::abs(b.y); });
    if (off.size() > kMostNamedLines) off.resize(kMostNamedLines);
    draw(SurveyFigure::line_residuals, file.close(), off);
  }

  void verdicts() {
    std::vector<std::pair<std::string, std::size_t>> sorted(verdicts_.begin(), verdicts_.end());
    std::stable_sort(sorted.begin(), sorted.end(),
                     [](const auto& a, const auto& b) { return a.second > b.second; });
    if (sorted.size() > kMostVerdicts) {
      std::size_t others = 0;
      for (std::size_t i = kMostVerdicts; i < sorted.size(); ++i) others += sorted[i].second;
      sorted.resize(kMostVerdicts);
      sorted.emplace_back("other verdicts", others);
    }
    DataFile file(output_.staging(), "verdicts", "# row\tjobs");
    std::vector<FigureText> texts;
    for (std::size_t i = 0; i < sorted.size(); ++i) {
      file.row(fmt::format("{}\t{}", i + 1, sorted[i].second));
      texts.push_back({sorted[i].first});
    }
    draw(SurveyFigure::verdicts, file.close(), texts, kVerdictColumns);
  }

  Ledger& ledger_;
  OutputFolder output_;
  DataFile column_;
  std::map<std::string, std::size_t> species_;
  std::map<std::string, std::size_t> verdicts_;
  std::map<std::tuple<std::string, std::string, double>, LineMoments> lines_;
  std::vector<float> temperatures_;
};

FigurePart::FigurePart(Ledger& ledger, const fs::path& folder)
    : data_(std::make_unique<Data>(ledger, folder)) {}
FigurePart::~FigurePart() = default;
void FigurePart::add(const GatheredJob& gathered) { data_->add(gathered); }
void FigurePart::finish() { data_->finish(); }
std::vector<PageFigure> FigurePart::figures() const { return data_->figures; }
const std::vector<std::string>& FigurePart::warnings() const { return data_->warnings; }

}  // namespace trotline
