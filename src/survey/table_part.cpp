#include <fmt/format.h>

#include <algorithm>

#include <trotline/base/version.hpp>
#include <trotline/observation/fits_table_writer.hpp>
#include <trotline/report/text_tables.hpp>

#include "gather_parts.hpp"
#include "latex_results.hpp"

namespace trotline {
namespace {

TextWidths widths_of(Ledger& ledger) {
  TextWidths widths;
  const auto widen = [](std::size_t& width, const std::string& text) {
    width = std::max(width, ascii_text(table_text(text)).size());
  };
  ledger.for_each_text([&](const JobTexts& texts) {
    widen(widths.source, texts.source);
    widen(widths.species, texts.species);
    widen(widths.method, texts.method);
    widen(widths.verdict, texts.verdict);
    widen(widths.message, texts.message);
    widen(widths.table_file, texts.table_file);
  });
  return widths;
}

/// All tables at once, so that every job is read once.
class Tables : public GatherPart {
 public:
  Tables(Ledger& ledger, const std::filesystem::path& folder, const GatherOptions& options) {
    const auto& formats = options.outputs.tables;
    const auto wanted = [&](const char* format) {
      return std::find(formats.begin(), formats.end(), format) != formats.end();
    };
    const std::vector<TableColumn> columns =
        result_columns(wanted("fits") ? widths_of(ledger) : TextWidths{});
    const TableMeta meta = {{"survey", options.title}, {"made_by", fmt::format("trotline {}", version())}};
    if (wanted("ecsv")) writers_.push_back(ecsv_writer(folder / "results.ecsv", columns, meta));
    if (wanted("csv")) writers_.push_back(csv_writer(folder / "results.csv", columns));
    if (wanted("fits")) writers_.push_back(fits_table_writer(folder / "results.fits", "RESULTS", columns));
    if (wanted("votable")) writers_.push_back(votable_writer(folder / "results.vot", columns, meta));
    if (wanted("latex")) {
      latex_ = std::make_unique<LatexResults>(folder / "results.tex", options.title, ledger.counts().all());
    }
  }

  void add(const GatheredJob& gathered) override {
    if (latex_) latex_->add(gathered);
    if (writers_.empty()) return;
    const std::vector<Cell> cells = result_cells(gathered);
    for (const auto& writer : writers_) writer->add(cells);
  }

  void finish() override {
    for (const auto& writer : writers_) writer->finish();
    if (latex_) latex_->finish();
  }

 private:
  std::vector<std::unique_ptr<TableWriter>> writers_;
  std::unique_ptr<LatexResults> latex_;
};

}  // namespace

std::unique_ptr<GatherPart> table_part(Ledger& ledger, const std::filesystem::path& folder,
                                       const GatherOptions& options) {
  return std::make_unique<Tables>(ledger, folder, options);
}

}  // namespace trotline
